"""What the desk costs and how soon it shows: `python tests/bench/desk.py`.

A desk in a terminal of 120 by 40 with the shipped show of 64 and 16 feeds: the Desk with beams that
travel, and the Bench while an arrow key is held. Prints processor shares of one core, pictures a
second, and the time from a key to the picture that answers it; exit 1 when one misses its bar.
"""

from __future__ import annotations

import fcntl
import os
import pty
import re
import struct
import subprocess
import sys
import termios
import threading
import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np

sys.path[0] = str(Path(__file__).parents[1])  # in place of this folder, whose desk.py hides desk/

from desk.conftest import BELL, WHISPER, FakeHost

from beamctl.desk.app import run_desk
from beamctl.snapshot import Snapshot

COLUMNS, ROWS = 120, 40
TICK_S = 0.05
MOST_PCT, LEAST_PICTURES, LATEST_MS = 25.0, 10.0, 100.0  # the bars
RIGHT, LEFT, F4, LEAVE = b"\x1b[C", b"\x1b[D", b"\x1bOS", b"\x11"
AIM = re.compile(rb"aim *(?:\x1b\[[\d;]*m)*az ([+-]\d+\.\d) el")


class LiveHost(FakeHost):
    """Beams that travel, a little in every picture."""

    def snapshot(self) -> Snapshot:
        seen = super().snapshot()
        azimuth = 15.0 * float(np.sin(time.monotonic()))
        beams = (
            replace(WHISPER, aim_deg=(azimuth, -1.0), peak_deg=(azimuth, -1.0)),
            replace(BELL, panel="prow", aim_deg=(-azimuth, 5.0), peak_deg=(-azimuth, 5.0)),
        )
        return replace(seen, standby="2", beams=beams)


class Terminal:
    """A pseudo-terminal with a desk in it; what it writes is kept with the time it came."""

    def __init__(self) -> None:
        self._master, slave = pty.openpty()
        fcntl.ioctl(slave, termios.TIOCSWINSZ, struct.pack("HHHH", ROWS, COLUMNS, 0, 0))
        env = os.environ | {"TERM": "xterm-256color", "COLORTERM": "truecolor"}
        self.process = subprocess.Popen(
            [sys.executable, __file__, "--desk"],
            stdin=slave, stdout=slave, stderr=slave, env=env, start_new_session=True,
        )  # fmt: skip
        os.close(slave)
        self.heard: list[tuple[float, bytes]] = []
        threading.Thread(target=self._read, daemon=True).start()

    def type(self, keys: bytes) -> float:
        """Send keys; when that was."""
        os.write(self._master, keys)
        return time.monotonic()

    def since(self, begin_s: float) -> bytes:
        """All that was written since."""
        return b"".join(text for at_s, text in list(self.heard) if at_s >= begin_s)

    def aims(self, begin_s: float) -> list[float]:
        """The azimuths that were shown since, each once, in their order."""
        return list(dict.fromkeys(float(found) for found in AIM.findall(self.since(begin_s))))

    def cpu_s(self) -> float:
        """Processor time of the desk so far."""
        fields = Path(f"/proc/{self.process.pid}/stat").read_text().rsplit(")", 1)[1].split()
        return (int(fields[11]) + int(fields[12])) / os.sysconf("SC_CLK_TCK")

    def close(self) -> None:
        """Leave the desk."""
        self.type(LEAVE)
        time.sleep(0.3)
        self.process.kill()
        self.process.wait()

    def _read(self) -> None:
        while True:
            try:
                text = os.read(self._master, 65536)
            except OSError:
                return
            self.heard.append((time.monotonic(), text))


def wait(ready: Callable[[], object], what: str) -> float:
    """Wait for something; when it was."""
    end_s = time.monotonic() + 60.0
    while not ready():
        if time.monotonic() > end_s:
            raise SystemExit(f"waited in vain for {what}")
        time.sleep(0.001)
    return time.monotonic()


def share_pct(terminal: Terminal, seconds: float, *keys: bytes) -> float:
    """Share of a core over some seconds, while a key is typed at every tick: each for a second."""
    begin_s, begin_cpu_s = time.monotonic(), terminal.cpu_s()
    for n in range(round(seconds / TICK_S)):
        if keys:
            terminal.type(keys[n // 20 % len(keys)])
        time.sleep(max(0.0, begin_s + (n + 1) * TICK_S - time.monotonic()))
    return 100.0 * (terminal.cpu_s() - begin_cpu_s) / (time.monotonic() - begin_s)


def delays_ms(terminal: Terminal, count: int) -> list[float]:
    """From an arrow key to the picture with its aim, one at a time."""
    found = []
    for n in range(count):
        known = len(terminal.heard)
        begin_s = terminal.type(RIGHT if n // 10 % 2 == 0 else LEFT)

        def shown(known: int = known) -> bool:
            return bool(AIM.search(b"".join(text for _, text in terminal.heard[known:])))

        found.append(1000.0 * (wait(shown, "a picture") - begin_s))
        time.sleep(0.1 + 0.013 * (n % 7))  # at any moment between two ticks
    return found


def pictures_a_second(terminal: Terminal, seconds: float) -> float:
    """Different aims that were shown while a key repeats 30 times a second."""
    begin_s = time.monotonic()
    while time.monotonic() < begin_s + seconds:
        terminal.type(RIGHT)
        time.sleep(1.0 / 30.0)
    return len(terminal.aims(begin_s)) / seconds


def main() -> int:
    """Measure, print; 1 when a figure misses its bar."""
    begin_s = time.monotonic()
    terminal = Terminal()
    try:
        wait(lambda: b"Night Tram" in terminal.since(begin_s), "the desk")
        time.sleep(1.0)
        desk = share_pct(terminal, 8.0)
        terminal.type(F4)
        wait(lambda: b"dB under" in terminal.since(begin_s), "the Bench")
        time.sleep(1.0)
        resting = share_pct(terminal, 5.0)
        delays = delays_ms(terminal, 60)
        live = share_pct(terminal, 8.0, RIGHT, LEFT)
        terminal.type(b"\x1b")
        time.sleep(1.0)
        pictures = pictures_a_second(terminal, 3.0)
    finally:
        terminal.close()
    print(f"Desk, two beams travelling     {desk:.1f} % of a core")
    print(f"Bench, nothing changes         {resting:.1f} %")
    print(f"Bench, aimed 20 times a second {live:.1f} % (at most {MOST_PCT:g})")
    p = np.percentile(delays, [0, 50, 95, 100])
    print(
        f"key to picture: least {p[0]:.0f}, median {p[1]:.0f}, 95 % {p[2]:.0f}, most {p[3]:.0f} ms"
    )
    print(f"a held key: {pictures:.1f} pictures a second (at least {LEAST_PICTURES:g})")
    good = max(desk, live) <= MOST_PCT and pictures >= LEAST_PICTURES and p[1] <= LATEST_MS
    return 0 if good else 1


if __name__ == "__main__":
    sys.exit(run_desk(LiveHost(), Path(os.devnull)) if "--desk" in sys.argv else main())
