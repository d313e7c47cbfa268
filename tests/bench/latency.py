"""From a GO to the first changed sample entering the sink: `python tests/bench/latency.py [N]`.

A real host on the null sink and a real desk in a pseudo-terminal that redraws a sheet of 500 cues;
N (1,000) GOs by local command, each from silence. The changed sample is looked for in the ring
itself (shared memory); the time it enters the sink comes from the sink's own note of which frame it
asked for when. Then N / 10 hushes: from the command to the first ramped sample. Exit 1 when a
figure is over its bar by more than a quarter.
"""

from __future__ import annotations

import os
import pty
import subprocess
import sys
import tempfile
import threading
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[1]))

from support.running import COMMAND, Running, host, wait_for
from support.smallshow import write_show

from beamctl.engine import layout as at
from beamctl.engine.outlet import Outlet
from beamctl.host.places import memory_folder, show_key

CUES = 500
HOUSE_CUES = """
[[cue]]
ref = "{on}"
title = "the drone comes"
[[cue.act]]
beam = "drone"
sound = "tone.wav"
loop = true
azimuth_deg = 0.0
trim_db = -20.0
over_s = 0.02
[[cue]]
ref = "{off}"
title = "the drone goes"
[[cue.act]]
beam = "drone"
fall_s = 0.02
"""


def write_long_show(folder: Path) -> Path:
    """The small show with a sheet of 500 cues that come and go in turn."""
    show = write_show(folder)
    sheet = show / "sheet.toml"
    head = sheet.read_text(encoding="utf-8").split("[[cue]]")[0]
    pairs = (HOUSE_CUES.format(on=2 * i + 1, off=2 * i + 2) for i in range(CUES // 2))
    sheet.write_text(head + "".join(pairs), encoding="utf-8")
    return show


def open_desk(show: Path) -> subprocess.Popen[bytes]:
    """A desk in a pseudo-terminal that is read and thrown away."""
    ours, theirs = pty.openpty()
    environment = os.environ | {"TERM": "xterm-256color", "COLUMNS": "120", "LINES": "40"}
    desk = subprocess.Popen(
        [*COMMAND, "desk", str(show)], stdin=theirs, stdout=theirs, stderr=theirs, env=environment
    )
    os.close(theirs)

    def drain() -> None:
        try:
            while os.read(ours, 65536):
                pass
        except OSError:
            return

    threading.Thread(target=drain, daemon=True).start()
    return desk


def entering_ms(outlet: Outlet, frame: int, since_ns: int, rate_hz: int) -> float:
    """Milliseconds from `since_ns` until the sink asked for `frame`."""
    while True:
        read, at_ns = outlet.count(at.LAST_READ), outlet.count(at.LAST_NS)
        if read == outlet.count(at.LAST_READ):
            break
    return (at_ns + (frame - read) / rate_hz * 1e9 - since_ns) / 1e6


def first_sounding(outlet: Outlet, first: int) -> int:
    """Number of the first frame at or after `first` that is not silence, once it is written."""
    frames, channels = outlet.frames, outlet.channels
    ring = outlet.memory[at.SAMPLES :].view(np.float32)[: frames * channels]
    ring = ring.reshape(frames, channels)
    until = time.monotonic() + 2.0
    while time.monotonic() < until:
        written = outlet.count(at.WRITTEN)
        if written > first:
            numbers = np.arange(first, written)
            loud = np.any(ring[numbers % frames] != 0.0, axis=1)
            if loud.any():
                return int(numbers[loud.argmax()])
            first = written
        time.sleep(0.0003)
    raise SystemExit("no GO was heard within two seconds")


def silent_from(outlet: Outlet) -> int:
    """Frame from which the ring holds silence; waits for it."""
    frames, channels = outlet.frames, outlet.channels
    ring = outlet.memory[at.SAMPLES :].view(np.float32)[: frames * channels]
    until = time.monotonic() + 5.0
    while time.monotonic() < until:
        written = outlet.count(at.WRITTEN)
        newest = ring.reshape(frames, channels)[np.arange(written - 512, written) % frames]
        if not newest.any():
            return written
        time.sleep(0.002)
    raise SystemExit("the ring never fell silent")


def measure(host: Running, show: Path, count: int) -> tuple[list[float], list[float], float]:
    """GO and hush latencies in ms, and the ring's length in ms."""
    outlet = Outlet.attach(memory_folder() / f"{show_key(show)}.outlet")
    rate_hz = host.snapshot().engine.rate_hz
    host.act("ready")
    host.act("confirm")
    gos, hushes = [], []
    for i in range(count):
        on, off = str(2 * (i % (CUES // 2)) + 1), str(2 * (i % (CUES // 2)) + 2)
        silence = silent_from(outlet)
        asked = time.monotonic_ns()
        host.act("go", ref=on)
        gos.append(entering_ms(outlet, first_sounding(outlet, silence), asked, rate_hz))
        time.sleep(0.03)
        if i % 10 == 0:
            hushes.append(hush_ms(host, outlet, rate_hz))
        host.act("go", ref=off)
        wait_for(lambda on=on: host.snapshot().states.get(on) != "running", "the cue to be done")
    return gos, hushes, 1000.0 * outlet.frames / rate_hz


def hush_ms(host: Running, outlet: Outlet, rate_hz: int) -> float:
    """From the command to the first frame of the ramp entering the sink; restores afterwards."""
    outlet.events()
    asked = time.monotonic_ns()
    host.act("hush")
    found: list[int] = []
    wait_for(
        lambda: bool(
            found.extend(e.sample for e in outlet.events() if e.name == "hushed") or found
        ),
        "the gate to shut",
    )
    took = entering_ms(outlet, found[0], asked, rate_hz)
    host.act("ready")
    host.act("confirm")
    return took


def main() -> int:
    """Measure, print the distributions; 1 when a figure is over its bar by more than a quarter."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder)
        os.environ["BEAMCTL_RUNTIME"] = str(root / "run")
        os.environ["BEAMCTL_STATE"] = str(root / "state")
        show = write_long_show(root / "show")
        with host(show, "null", root / "journal.jsonl") as running:
            priority = running.snapshot().engine.priority
            desk = open_desk(show)
            try:
                time.sleep(3.0)
                gos, hushes, ring_ms = measure(running, show, count)
            finally:
                desk.kill()
                desk.wait()
            late = running.snapshot().engine.late
    print(
        f"{count} GOs, desk redrawing {CUES} cues, {priority}, ring {ring_ms:.2f} ms, late {late}"
    )
    for name, figures in (("GO", gos), ("hush", hushes)):
        p = np.percentile(figures, [0, 50, 90, 99, 100])
        print(
            f"{name:5s} min {p[0]:.2f}  median {p[1]:.2f}  90 % {p[2]:.2f}  "
            f"99 % {p[3]:.2f}  max {p[4]:.2f} ms"
        )
    median, tail = np.percentile(gos, [50, 99])
    bars = ((median - ring_ms, 3.0), (tail - ring_ms, 12.0))
    print(f"beyond the ring: median {bars[0][0]:.2f} (≤ 3), 99 % {bars[1][0]:.2f} (≤ 12) ms")
    return 0 if all(value <= 1.25 * bar for value, bar in bars) else 1


if __name__ == "__main__":
    sys.exit(main())
