"""A thread with one line to the host, so that the screen never waits for it."""

from __future__ import annotations

import itertools
import traceback
from collections.abc import Callable
from queue import PriorityQueue
from threading import Event, Thread

from beamctl.desk.link import HostLink

RETRY_S = 1.0
STOP_WAIT_S = 2.0
UNREACHABLE = (OSError, EOFError)

Job = Callable[[HostLink], None]


class Line:
    """Does jobs one at a time, the lowest rank first; a job that cannot reach the host is over."""

    def __init__(
        self, name: str, link: HostLink, on_lost: Callable[[], None], clock: Callable[[], float]
    ) -> None:
        self._link, self._on_lost, self._clock = link, on_lost, clock
        self._jobs: PriorityQueue[tuple[int, int, Job | None]] = PriorityQueue()
        self._order = itertools.count()
        self._waiting: dict[str, Event] = {}
        self._retry_at_s = 0.0
        self._thread = Thread(target=self._work, name=name, daemon=True)

    def start(self) -> None:
        """Begin."""
        self._thread.start()

    def stop(self) -> None:
        """Do what was put, close the link, and wait two seconds at most for that."""
        self.put(1, None)
        self._thread.join(STOP_WAIT_S)

    def put(self, rank: int, job: Job | None) -> None:
        """Have `job` done after all of a lower rank."""
        self._jobs.put((rank, next(self._order), job))

    def put_once(self, name: str, rank: int, job: Job) -> None:
        """The same, unless a job of that name waits already or the host just failed."""
        waits = self._waiting.setdefault(name, Event())
        if waits.is_set() or self._clock() < self._retry_at_s:
            return
        waits.set()

        def once(link: HostLink) -> None:
            waits.clear()
            job(link)

        self.put(rank, once)

    def _work(self) -> None:
        while (job := self._jobs.get()[2]) is not None:
            try:
                job(self._link)
            except UNREACHABLE:
                self._lose()
            except Exception:  # a fault in a link must not take hush away with this thread
                traceback.print_exc()
                self._lose()
        self._link.close()

    def _lose(self) -> None:
        self._retry_at_s = self._clock() + RETRY_S
        self._on_lost()
