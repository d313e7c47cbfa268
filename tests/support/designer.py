"""A designer at a desk, who reads the screen and plays a script of keys.

A script has a line for each deed, and what must show below the heading then after `->`:

    f6 -> > panel main           keys, by name
    tilt_deg = -18               to the field of that name, and another value typed into its box
    New cue: rain -> ] 2         the verb of that title, by the key that the legend tells, and an
    New: spot / lamp -> lamp     answer for each box that comes of it
    Copy -> ] 3                  a verb that asks nothing
"""

from __future__ import annotations

import re
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest
from support.paper import Paper
from support.ptydesk import KEYS, PtyDesk
from support.running import SOON_S, stop_host

PACE_S = 0.026  # presses that come faster may be taken for a paste
LOOKS_S = 0.01
PATIENCE_S = 1.0  # for what was typed to show
HEADING = 2  # rows that tell the newest deed; what it led to shows below them
NO_EDITS = ("Find", "Lift", "Depth", "Law", "Spot")  # what only looks, holds or tries
EDITS = re.compile(r"(\d+) edits? not on disk")
LEAVE = "\x11"  # Ctrl+Q
RUB_OUT = "\x15"  # Ctrl+U: all that a box begins with
LEGEND = {"Del": "delete", "Esc": "escape", "Ins": "insert"}
LEGEND_ROWS = 6  # at most, with the one below


class Designer(PtyDesk):
    """Waits for what the screen says, and presses no key before."""

    def __init__(self, show: Path, size: tuple[int, int] = (120, 40), **env: str) -> None:
        super().__init__(show, size, **env)
        self._paper = Paper(*size)
        self._read_to = 0
        self._next_s = 0.0
        self._doing = ""

    # -- hands and eyes ------------------------------------------------------------------------

    def press(self, key: str) -> float:
        """Send a key, by name or as a sign, once the one before is far enough back."""
        time.sleep(max(0.0, self._next_s - time.monotonic()))
        at_s = super().press(key)
        self._next_s = at_s + PACE_S
        return at_s

    def insist(self, press: Callable[[], None], so: Callable[[], bool], what: str) -> None:
        """Press keys until what they are for is so.

        Where the machine stalls, keys reach the desk together, and it may take them for a paste.
        """
        until_s = time.monotonic() + SOON_S
        while not so() and time.monotonic() < until_s:
            press()
            self._wait(so, PATIENCE_S)
        self._until(so, what)
        self._next_s = time.monotonic() + PACE_S

    def screen(self) -> list[str]:
        """The rows that show now."""
        read_to = len(self._said)
        self._paper.write(bytes(self._said[self._read_to : read_to]))
        self._read_to = read_to
        return self._paper.lines

    def sees(self, text: str, timeout_s: float = SOON_S, below: int = 0) -> None:
        """Wait until `text` shows, `below` so many rows, and no box."""
        self._until(lambda: any(text in row for row in self._page()[below:]), text, timeout_s)

    def loses(self, text: str) -> None:
        """Wait until `text` shows no more, nor a box."""

        def is_gone() -> bool:
            rows = self._page()
            return bool(rows) and not any(text in row for row in rows)

        self._until(is_gone, f"no {text}")

    def unsaved(self) -> int:
        """How many edits the screen says are not on disk."""
        found = (EDITS.search(row) for row in self.screen()[:HEADING])
        return next((int(many[1]) for many in found if many), 0)

    def key_of(self, title: str) -> str:
        """The first key that the legend tells for a title."""
        keys = re.compile(rf"(?:^|  )(\S+): {re.escape(title)}(?:  |$)")
        told: list[str] = []

        def tells() -> bool:
            told[:] = (m[1] for row in self.screen()[-LEGEND_ROWS:] if (m := keys.search(row)))
            return bool(told)

        self._until(tells, f"{title} in the legend")
        key = told[0].split("/")[0] or "/"
        return LEGEND.get(key, key.lower() if len(key) > 1 else key)

    def _page(self) -> list[str]:
        """The rows that show, none under a box."""
        rows = self.screen()
        return [] if any(row.startswith("+-") for row in rows) else rows

    def _until(self, so: Callable[[], bool], what: str, timeout_s: float = SOON_S) -> None:
        if not self._wait(so, timeout_s):
            shown = "\n".join(self.screen())
            pytest.fail(f"{self._doing!r}: waited for {what!r}, and the screen says\n{shown}")

    def _wait(self, so: Callable[[], bool], timeout_s: float) -> bool:
        until_s = time.monotonic() + timeout_s
        while not (is_so := so()) and time.monotonic() < until_s and self.process.poll() is None:
            time.sleep(LOOKS_S)
        return is_so

    # -- scripts -------------------------------------------------------------------------------

    def play(self, script: str) -> None:
        """Do all lines of a script, one after the other; one edit each, but for NO_EDITS."""
        for line in filter(None, map(str.strip, script.splitlines())):
            self._doing = line
            deed, _, shows = line.partition(" -> ")
            edits = self.unsaved() + self._does(deed)
            self._until(lambda edits=edits: self.unsaved() == edits, f"{edits} edits")
            if shows:
                self.sees(shows, below=HEADING)

    def _does(self, deed: str) -> bool:
        """Do one thing; whether it was an edit."""
        field, fills, value = deed.partition(" = ")
        verb, _, answers = deed.partition(": ")
        if fills:
            self._fill(field, value)
        elif all(word in KEYS for word in deed.split()):
            for key in deed.split():
                self.press(key)
            return False
        else:
            self.press(self.key_of(verb))
            for answer in filter(None, answers.split(" / ")):
                self._answer(answer)
        return verb not in NO_EDITS

    def _answer(self, text: str) -> None:
        """Type into the box that opens; what stands there already is rubbed out."""

        def type_it() -> None:
            for key in (RUB_OUT if self._typed() else "", *text):
                if key:
                    self.press(key)

        self._until(lambda: self._typed() is not None, "a box")
        box = self._box()
        self.insist(type_it, lambda: self._typed() == text, f"{text} in the box")
        self.press("enter")
        self._until(lambda: self._box() != box, f"an end of {box}")

    def _box(self) -> str:
        """The upper edge of the box that is open, "" for none."""
        return next((row for row in self.screen() if row.startswith("+-")), "")

    def _typed(self) -> str | None:
        """What stands in the box that is open, None for no box."""
        asks = (row for row in self.screen() if row.startswith("| Type "))
        return next((row[:-1].rstrip().rpartition(": ")[2][:-1] for row in asks), None)

    # -- the whole show ------------------------------------------------------------------------

    def save(self) -> None:
        """Write it to disk."""
        self.press(self.key_of("Save"))
        self.loses("not on disk")

    def walk_history(self, title: str, edits: int) -> None:
        """Undo or redo that many edits after a save, which is all there are."""
        key = self.key_of(title)

        def press() -> None:
            for _ in range(edits - self.unsaved()):
                self.press(key)

        self.insist(press, lambda: self.unsaved() == edits, f"{title} of {edits} edits")
        self.loses(f": {title}")

    def leave(self) -> int:
        """Leave the desk, and the host with it; its exit code."""
        self.press(LEAVE)
        return self.process.wait(SOON_S)

    # -- fields --------------------------------------------------------------------------------

    def _fill(self, field: str, value: str) -> None:
        """Walk to a field, change it, and wait until it reads otherwise."""

        def walk() -> None:
            away = self._away(field) or 0
            for _ in range(abs(away)):
                self.press("down" if away > 0 else "up")

        self._until(lambda: self._away(field) is not None, field)
        self.insist(walk, lambda: self._away(field) == 0, f"the cursor on {field}")
        before = self._reads(field)
        self.press("right")
        self._answer(value)
        self._until(lambda: self._reads(field) not in ("", before), f"another {field}")

    def _away(self, field: str) -> int | None:
        """Rows from the cursor down to a field; None while either does not show."""
        rows = self._page()
        found = re.compile(rf"[> ] {field} {{2,}}\S")
        fields = [(n, match.start()) for n, row in enumerate(rows) for match in found.finditer(row)]
        cursors = [
            (n, at) for n, row in enumerate(rows) for _, at in fields if row[at:].startswith("> ")
        ]
        return next((n - m for n, at in fields for m, other in cursors if at == other), None)

    def _reads(self, field: str) -> str:
        """What stands at the field under the cursor; "" while a box hides it."""
        told = (row.partition(f"> {field} ")[2].strip() for row in self._page())
        return next(filter(None, told), "")


@contextmanager
def at_desk(show: Path) -> Iterator[Designer]:
    """A designer whose desk and host are gone when the block is left."""
    designer = Designer(show)
    try:
        yield designer
    finally:
        designer.end()
        stop_host(show)
