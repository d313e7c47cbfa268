"""The thread that talks to the host, so that the screen never waits for it.

Whatever waits is sent in order of rank: hush before every other action, actions before pictures.
So hush waits for nothing but the one call that may be under way. An action other than hush that
could not be sent within a second is dropped and said to be late: a GO must not surprise anyone.
"""

from __future__ import annotations

import itertools
import time
import traceback
from collections import deque
from collections.abc import Callable
from dataclasses import dataclass, replace
from queue import PriorityQueue
from threading import Event, Thread

from beamctl.desk.link import HostLink
from beamctl.snapshot import Answer, SeatLevel, SheetView, Snapshot

HUSH = "hush"
RETRY_S = 1.0
TOO_LATE_S = 1.0
STOP_WAIT_S = 2.0
UNREACHABLE = (OSError, EOFError)

_RANK_HUSH, _RANK_ACT, _RANK_PICTURE = range(3)


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
    """Carries actions to the host and pictures back."""

    def __init__(self, link: HostLink, clock: Callable[[], float] = time.monotonic) -> None:
        self.clock = clock
        self.picture = Picture(at_s=clock())
        self.levels: Levels | None = None
        self._answers: deque[tuple[str, Answer]] = deque(maxlen=64)
        self._link = link
        self._jobs: PriorityQueue[tuple[int, int, Callable[[], None] | None]] = PriorityQueue()
        self._order = itertools.count()
        self._picture_waits, self._levels_wait = Event(), Event()
        self._retry_at_s = 0.0
        self._thread = Thread(target=self._work, name="desk-courier", daemon=True)

    def start(self) -> None:
        """Begin carrying."""
        self._thread.start()

    def stop(self) -> None:
        """Send what was posted, close the link, and wait two seconds at most for that."""
        self._put(_RANK_ACT, None)
        self._thread.join(STOP_WAIT_S)

    def post(self, name: str, /, **arguments: object) -> None:
        """Have the host asked for action `name`; returns at once."""
        posted_s = self.clock()
        rank = _RANK_HUSH if name == HUSH else _RANK_ACT
        self._put(rank, lambda: self._act(name, arguments, posted_s))

    def ask_picture(self) -> None:
        """Have a fresh picture fetched, unless one is being fetched or the host just failed."""
        self._ask_once(self._picture_waits, self._fetch)

    def ask_levels(self) -> None:
        """Have the levels at the seats fetched, on the same terms."""
        self._ask_once(self._levels_wait, self._fetch_levels)

    def take_answer(self) -> tuple[str, Answer] | None:
        """The oldest answer nobody took yet, with the name of its action."""
        return self._answers.popleft() if self._answers else None

    def _ask_once(self, waits: Event, fetch: Callable[[], None]) -> None:
        if not waits.is_set() and self.clock() >= self._retry_at_s:
            waits.set()
            self._put(_RANK_PICTURE, fetch)

    def _put(self, rank: int, job: Callable[[], None] | None) -> None:
        self._jobs.put((rank, next(self._order), job))

    def _work(self) -> None:
        while (job := self._jobs.get()[2]) is not None:
            try:
                job()
            except Exception:  # a fault in a link must not take hush away with this thread
                traceback.print_exc()
                self._lose()
        self._link.close()

    def _act(self, name: str, arguments: dict[str, object], posted_s: float) -> None:
        waited_s = self.clock() - posted_s
        if name != HUSH and waited_s > TOO_LATE_S:
            late = Answer(False, "too-late", f"not sent: it waited {waited_s:.1f} s for the host")
            self._answers.append((name, late))
            return
        try:
            answer = self._link.act(name, **arguments)
        except UNREACHABLE:
            self._lose()
            answer = Answer(False, "", "NOT SENT: the host is gone")
        self._answers.append((name, answer))
        self.ask_picture()

    def _fetch(self) -> None:
        self._picture_waits.clear()
        try:
            snapshot = self._link.snapshot()
            sheet = self.picture.sheet
            if sheet is None or sheet.version != snapshot.sheet_version:
                sheet = self._link.sheet()
        except UNREACHABLE:
            self._lose()
        else:
            self.picture = Picture(sheet, snapshot, self.clock())

    def _fetch_levels(self) -> None:
        self._levels_wait.clear()
        try:
            self.levels = Levels(self._link.levels(), self.clock())
        except UNREACHABLE:
            self._lose()

    def _lose(self) -> None:
        self._retry_at_s = self.clock() + RETRY_S
        self.picture = replace(self.picture, gone=True)
