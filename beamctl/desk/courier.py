"""Carries requests to the host and pictures back, on two lines of its own.

The quick line has hush before every other action, and actions before pictures; so hush waits for
nothing but the one quick call that may be under way. What may take the host longer, edits and what
is read with them, goes by the slow line. An action other than hush that could not be sent within a
second is dropped and said to be late: a GO must not surprise anyone.
"""

from __future__ import annotations

import time
from collections import deque
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

from beamctl.desk.line import UNREACHABLE, Line
from beamctl.desk.link import Draft, HostLink
from beamctl.show.edits import Edit
from beamctl.snapshot import Answer, CueLevel, SeatLevel, SheetView, Snapshot

HUSH = "hush"
TOO_LATE_S = 1.0
LEVELS_S, LOG_S = 0.25, 0.5  # how often they are asked for where they show
LOG_LINES = 500
GONE = Answer(False, "", "NOT SENT: the host is gone")

_RANK_HUSH, _RANK_ACT, _RANK_PICTURE = range(3)
_SHOWS_LEVELS = ("guard", "house")
Then = Callable[[Answer], None]


@dataclass(frozen=True, slots=True)
class Picture:
    """The last that came from the host; `at_s` is when, on the courier's clock."""

    sheet: SheetView | None = None
    snapshot: Snapshot | None = None
    at_s: float = 0.0
    gone: bool = False


@dataclass(frozen=True, slots=True)
class Levels:
    """The seats as they last came; `at_s` is when, on the courier's clock."""

    seats: tuple[SeatLevel, ...]
    at_s: float


class Courier:
    """What the screen reads is replaced whole, never changed; so it needs no lock."""

    def __init__(self, link: HostLink, clock: Callable[[], float] = time.monotonic) -> None:
        self.clock = clock
        self.picture = Picture(at_s=clock())
        self.levels: Levels | None = None
        self.draft: Draft | None = None
        self.cue_levels: tuple[CueLevel, ...] = ()
        self.log: tuple[str, ...] = ()
        self._answers: deque[tuple[str, Answer]] = deque(maxlen=64)
        self._heard: deque[Callable[[], None]] = deque()
        self._looked = -1
        self._next_s = {"levels": 0.0, "log": 0.0}
        self._quick = Line("desk-quick", link, self._lose, clock)
        self._slow = Line("desk-slow", link.twin(), self._lose, clock)

    def start(self) -> None:
        """Begin carrying."""
        self._quick.start()
        self._slow.start()

    def stop(self) -> None:
        """Send what was posted, and close both lines."""
        self._quick.stop()
        self._slow.stop()

    # -- what the screen asks ------------------------------------------------------------------

    def post(self, name: str, /, **arguments: object) -> None:
        """Have the host asked for action `name`; returns at once."""
        posted_s = self.clock()
        rank = _RANK_HUSH if name == HUSH else _RANK_ACT
        self._quick.put(rank, lambda link: self._act(link, name, arguments, posted_s))

    def edit(self, edit: Edit, then: Then) -> None:
        """Have the show edited; `then` is among the news once the host has answered."""
        self._slow.put(_RANK_ACT, lambda link: self._hear(then, lambda: link.edit(edit)))

    def history(self, what: str, then: Then) -> None:
        """The same for "undo", "redo" and "save"."""
        self._slow.put(_RANK_ACT, lambda link: self._hear(then, lambda: link.history(what)))

    def ask_picture(self) -> None:
        """Have a fresh picture fetched, unless one is being fetched or the host just failed."""
        self._quick.put_once("picture", _RANK_PICTURE, self._fetch)

    def want(self, screen: str) -> None:
        """Have fetched what `screen` shows and what has changed."""
        seen, now_s = self.picture.snapshot, self.clock()
        if seen is None:
            return
        if self.draft is None or self.draft.version != seen.sheet_version:
            self._slow.put_once("draft", _RANK_PICTURE, self._fetch_draft)
        if self._looked != seen.looked:
            self._slow.put_once("cues", _RANK_PICTURE, self._fetch_cue_levels)
        if screen in _SHOWS_LEVELS and now_s >= self._next_s["levels"]:
            self._next_s["levels"] = now_s + LEVELS_S
            self._quick.put_once("levels", _RANK_PICTURE, self._fetch_levels)
        if screen == "log" and now_s >= self._next_s["log"]:
            self._next_s["log"] = now_s + LOG_S
            self._slow.put_once("log", _RANK_PICTURE, self._fetch_log)

    def take_answer(self) -> tuple[str, Answer] | None:
        """The oldest answer nobody took yet, with the name of its action."""
        return self._answers.popleft() if self._answers else None

    def news(self) -> Iterator[Callable[[], None]]:
        """What became of edits, to be called on the screen's own thread."""
        while self._heard:
            yield self._heard.popleft()

    # -- on the lines --------------------------------------------------------------------------

    def _act(
        self, link: HostLink, name: str, arguments: dict[str, object], posted_s: float
    ) -> None:
        waited_s = self.clock() - posted_s
        if name != HUSH and waited_s > TOO_LATE_S:
            late = Answer(False, "too-late", f"not sent: it waited {waited_s:.1f} s for the host")
            self._answers.append((name, late))
            return
        try:
            self._answers.append((name, link.act(name, **arguments)))
        except UNREACHABLE:
            self._answers.append((name, GONE))
            raise
        self.ask_picture()

    def _hear(self, then: Then, ask: Callable[[], Answer]) -> None:
        try:
            answer = ask()
        except UNREACHABLE:
            self._heard.append(lambda: then(GONE))
            raise
        self._heard.append(lambda: then(answer))
        self.ask_picture()

    def _fetch(self, link: HostLink) -> None:
        snapshot = link.snapshot()
        sheet = self.picture.sheet
        if sheet is None or sheet.version != snapshot.sheet_version:
            sheet = link.sheet()
        self.picture = Picture(sheet, snapshot, self.clock())

    def _fetch_draft(self, link: HostLink) -> None:
        self.draft = link.draft()

    def _fetch_cue_levels(self, link: HostLink) -> None:
        seen = self.picture.snapshot
        looked = -1 if seen is None else seen.looked
        self.cue_levels, self._looked = link.cue_levels(), looked

    def _fetch_levels(self, link: HostLink) -> None:
        self.levels = Levels(link.levels(), self.clock())

    def _fetch_log(self, link: HostLink) -> None:
        self.log = link.log(LOG_LINES)

    def _lose(self) -> None:
        self.picture = replace(self.picture, gone=True)
