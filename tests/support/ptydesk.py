"""A desk on a pseudo-terminal: bytes in at a known moment, bytes out as they come."""

from __future__ import annotations

import fcntl
import os
import pty
import re
import signal
import struct
import subprocess
import sys
import termios
import threading
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from support.running import COMMAND, SOON_S, STARTS_S, wait_for

KEYS = {
    "f1": b"\x1bOP", "f2": b"\x1bOQ", "f3": b"\x1bOR", "f4": b"\x1bOS", "f5": b"\x1b[15~",
    "f6": b"\x1b[17~", "f7": b"\x1b[18~", "f8": b"\x1b[19~", "f9": b"\x1b[20~",
    "f10": b"\x1b[21~", "f11": b"\x1b[23~", "f12": b"\x1b[24~", "shift+f8": b"\x1b[19;2~",
    "insert": b"\x1b[2~", "delete": b"\x1b[3~", "home": b"\x1b[H", "end": b"\x1b[F",
    "pageup": b"\x1b[5~", "pagedown": b"\x1b[6~", "up": b"\x1b[A", "down": b"\x1b[B",
    "right": b"\x1b[C", "left": b"\x1b[D", "enter": b"\r", "escape": b"\x1b", "tab": b"\t",
    "backspace": b"\x7f", "space": b" ",
}  # fmt: skip
_ESCAPES = re.compile(
    rb"\x1b(?:\[[0-9;?<>=]*[ -/]*[@-~]|[PX^_].*?\x1b\\|\][^\x07\x1b]*(?:\x07|\x1b\\)|.)"
)


class PtyDesk:
    """One desk process; what it wrote since `mark` can be searched."""

    def __init__(self, show: Path, size: tuple[int, int] = (120, 40), **env: str) -> None:
        self._ours, theirs = pty.openpty()
        columns, rows = size
        fcntl.ioctl(theirs, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))
        self.process = subprocess.Popen(
            [*COMMAND, "desk", str(show)],
            stdin=theirs,
            stdout=theirs,
            stderr=theirs,
            start_new_session=True,
            env={**os.environ, "TERM": "xterm-256color", **env},
        )
        os.close(theirs)
        self._said = bytearray()
        self._mark = 0
        self._frozen = threading.Event()
        threading.Thread(target=self._read, daemon=True).start()

    def press(self, key: str) -> float:
        """Send a key, by name or as a sign; the moment it was sent, on the monotonic clock."""
        self._mark = len(self._said)
        at_s = time.monotonic()
        os.write(self._ours, KEYS.get(key) or key.encode())
        return at_s

    def said(self) -> str:
        """Text that it wrote since the last press."""
        return _ESCAPES.sub(b"", bytes(self._said[self._mark :])).decode(errors="replace")

    def shows(self, text: str, timeout_s: float = SOON_S) -> None:
        """Wait until it has written `text` since the last press."""
        wait_for(lambda: text in self.said(), f"the desk to show {text!r}", timeout_s)

    def read_caution(self) -> None:
        """Close the caution that a desk begins with."""
        self.shows("I have read this", STARTS_S)
        self.press("enter")
        self.shows("no GO yet")

    def end(self) -> None:
        """Kill it."""
        self.process.send_signal(signal.SIGKILL)
        self.process.wait(SOON_S)
        os.close(self._ours)

    def freeze(self) -> None:
        """Read nothing more of what it writes, and wait until it is blocked by that."""
        self._frozen.set()
        wait_for(self._full, "the desk to be blocked in writing")

    def _full(self) -> bool:
        """True when the terminal's buffer of 4096 bytes takes no more."""
        waiting = fcntl.ioctl(self._ours, termios.FIONREAD, bytes(4))
        return int.from_bytes(waiting, sys.byteorder) >= 4000

    def _read(self) -> None:
        try:
            while not self._frozen.is_set() and (data := os.read(self._ours, 65_536)):
                self._said += data
        except OSError:
            return


@contextmanager
def pty_desk(show: Path, **env: str) -> Iterator[PtyDesk]:
    """A desk that is gone when the block is left."""
    desk = PtyDesk(show, **env)
    try:
        yield desk
    finally:
        desk.end()
