"""Ten minutes on JACK at 64 × 4: `python tests/bench/soak.py [SECONDS [real-time|ordinary]]`.

A real JACK server (dummy driver, 192 kHz, period 1,024), a real host on it with four beams that
travel all the time, a real desk at 20 pictures a second in a pseudo-terminal, and one process that
keeps a core busy. Once with the ring of 12 ms at real-time priority, once with 32 ms at ordinary
priority, unless one is named. Exit 1 when a callback found the ring empty, the gate shut by itself,
or resident memory of host and engine grew by more than 5 MB after the first tenth.
"""

from __future__ import annotations

import multiprocessing
import os
import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

import numpy as np
import soundfile
from bench.latency import open_desk
from jackserver import SINK, jack_server
from support.running import Running, host, told
from support.smallshow import CELL, GUARD, HOUSE

BEAMS = ("a", "b", "c", "d")
TURN_S = 2.0
TURNS = 400


def write_busy_show(folder: Path) -> Path:
    """Four beams on 64 feeds; one cue, in which they go to and fro for longer than the soak."""
    (folder / "sounds").mkdir(parents=True)
    tone = 0.5 * np.sin(2.0 * np.pi * 700.0 * np.arange(48_000) / 48_000)
    soundfile.write(folder / "sounds" / "tone.wav", tone, 48_000)
    rig = f"format = 1\n[panel.p]\nat_m = [0.0, 0.0, 3.0]\ntilt_deg = -17.0\n{CELL}"
    rig += "grid = { columns = 8, rows = 8, pitch_mm = 10.0 }\n"
    acts = []
    for i, beam in enumerate(BEAMS):
        acts.append(
            f'[[cue.act]]\nbeam = "{beam}"\nsound = "tone.wav"\nloop = true\n'
            f"azimuth_deg = -15.0\nelevation_deg = {i}.0\ntrim_db = -26.0\n"
        )
        for turn in range(TURNS):
            acts.append(
                f'[[cue.act]]\nat_s = {1.0 + turn * TURN_S}\nbeam = "{beam}"\n'
                f"azimuth_deg = {15.0 if turn % 2 == 0 else -15.0}\nelevation_deg = {i}.0\n"
                f"over_s = {TURN_S}\n"
            )
    beams = "".join(f'[beam.{beam}]\npanel = "p"\n' for beam in BEAMS)
    cue = '[[cue]]\nref = "1"\ntitle = "to and fro"\n'
    sheet = f'format = 1\ntitle = "Soak"\n{beams}{cue}{"".join(acts)}'
    for name, text in (("rig", rig), ("sheet", sheet), ("house", HOUSE), ("guard", GUARD)):
        (folder / f"{name}.toml").write_text(text, encoding="utf-8")
    return folder


def burn() -> None:
    """Keep one core busy."""
    while True:
        sum(range(100_000))


def resident_mb(pid: int) -> float:
    """Resident memory of a process and its children, in MB."""
    pids = [pid]
    tasks = Path(f"/proc/{pid}/task/{pid}/children").read_text(encoding="ascii")
    pids += [int(child) for child in tasks.split()]
    pages = sum(int(Path(f"/proc/{p}/statm").read_text(encoding="ascii").split()[1]) for p in pids)
    return pages * os.sysconf("SC_PAGE_SIZE") / 1e6


def soak(seconds: float, priority: str, root: Path) -> bool:
    """One soak; prints its figures, True when the bars hold."""
    os.environ["BEAMCTL_RUNTIME"], os.environ["BEAMCTL_STATE"] = str(root / "r"), str(root / "s")
    os.environ["BEAMCTL_PRIORITY"] = priority
    show = write_busy_show(root / "show")
    journal = root / "journal.jsonl"
    burner = multiprocessing.get_context("spawn").Process(target=burn, daemon=True)
    with jack_server(192_000, 1024, 2, 64) as server:
        os.environ.update(server.env)
        with host(show, SINK, journal) as running:
            desk = open_desk(show)
            burner.start()
            try:
                memory, snapshot = _watch(running, seconds)
            finally:
                burner.kill()
                desk.kill()
                desk.wait()
            running.stop()
    gates = [r.args for r in told(journal, "gate")]
    trips = sum(g["why"] == "lease-over" for g in gates)
    engine = snapshot.engine
    grown = max(memory[len(memory) // 10 :]) - memory[len(memory) // 10]
    print(
        f"{seconds:.0f} s, {engine.priority}, ring {engine.ring_ms:.1f} ms: "
        f"{engine.callbacks} callbacks, {engine.late} found the ring empty, {trips} false trips, "
        f"{len(told(journal, 'stream')) - 1} restarts, longest gap {engine.longest_ms:.1f} ms, "
        f"load {engine.load_pct:.1f} %, memory grown by {grown:.1f} MB",
        flush=True,
    )
    wanted = (engine.priority == "ordinary") == (priority == "ordinary")
    if not wanted:
        print(f"  asked for {priority} priority, the system granted {engine.priority}")
    return engine.late == 0 and trips == 0 and grown <= 5.0 and snapshot.output == "OPEN"


def _watch(running: Running, seconds: float):
    running.open()
    running.act("go", ref="1")
    memory = []
    until = time.monotonic() + seconds
    while time.monotonic() < until:
        memory.append(resident_mb(running.process.pid))
        time.sleep(1.0)
    return memory, running.snapshot()


def main() -> int:
    """Soak at both priorities, or the one that is named."""
    seconds = float(sys.argv[1]) if len(sys.argv) > 1 else 600.0
    priorities = sys.argv[2:3] or ["real-time", "ordinary"]
    good = True
    for priority in priorities:
        with tempfile.TemporaryDirectory() as folder:
            good &= soak(seconds, priority, Path(folder))
    return 0 if good else 1


if __name__ == "__main__":
    sys.exit(main())
