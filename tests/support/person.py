"""Someone at a terminal in which a wiring check runs, and what it leaves in the show."""

from __future__ import annotations

import os
import pty
import select
import subprocess
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from support.running import COMMAND, SOON_S, STARTS_S

from beamctl.files.measurement import Measurement, read_measurement
from beamctl.host.marking import ALONE_S, TOGETHER_S

HAND_S = 0.25  # from hearing to key, of somebody who is at it


class Person:
    """Someone at a terminal in which the check runs."""

    def __init__(self, terminal: int, process: subprocess.Popen[bytes]) -> None:
        self.terminal, self.process = terminal, process
        self.seen = ""
        self._read_to = 0

    def read(self, timeout_s: float) -> bool:
        """Take what is on the screen; False once the program has let go of the terminal."""
        if select.select([self.terminal], [], [], timeout_s)[0]:
            try:
                self.seen += os.read(self.terminal, 65_536).decode()
            except OSError:
                return False
        return True

    def wait_for(self, text: str) -> None:
        """Read on until this shows, after what was waited for before."""
        until = time.monotonic() + STARTS_S
        while (at := self.seen.find(text, self._read_to)) < 0:
            assert self.read(0.05) and time.monotonic() < until, f"{text!r} in {self.seen}"
        self._read_to = at + len(text)

    def type(self, text: str) -> None:
        os.write(self.terminal, text.encode())

    def hang_up(self) -> None:
        """Close the terminal."""
        os.close(self.terminal)
        self.terminal = -1

    def ends(self) -> int:
        """Exit code, once everything was read."""
        while self.terminal >= 0 and self.read(SOON_S):
            pass
        return self.process.wait(SOON_S)


@contextmanager
def person(show: Path, *arguments: str) -> Iterator[Person]:
    """The check in a terminal of its own; it is gone when the block is left."""
    ours, theirs = pty.openpty()
    process = subprocess.Popen(
        [*COMMAND, "wirecheck", str(show), *arguments], stdin=theirs, stdout=theirs, stderr=theirs
    )
    os.close(theirs)
    who = Person(ours, process)
    try:
        yield who
    finally:
        if process.poll() is None:
            process.kill()
            process.wait()
        if who.terminal >= 0:
            os.close(ours)


def mark(who: Person, *keys: str, after_s: float = ALONE_S + TOGETHER_S + HAND_S) -> None:
    """Mark as many feeds as there are keys, each once it was heard."""
    for key in keys:
        who.wait_for("  feed ")
        time.sleep(after_s)
        who.type(key)


def begin(who: Person) -> None:
    """Type the word, and wait until the first feed sounds."""
    who.wait_for('Type "sound" to let it sound')
    who.type("sound\n")


def files_in(show: Path) -> dict[str, bytes]:
    """Every file of a show and its content."""
    return {str(p): p.read_bytes() for p in sorted(show.rglob("*")) if p.is_file()}


def measured(show: Path) -> tuple[Path, Measurement]:
    """The one measurement of a show."""
    (path,) = (show / "measured").glob("*.toml")
    return path, read_measurement(path)
