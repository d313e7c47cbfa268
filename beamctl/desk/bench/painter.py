"""Works out pictures on a thread of its own: the newest question wins, older ones are dropped."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable
from typing import Generic, TypeVar

from threadpoolctl import threadpool_limits

PACE_S = 1.0 / 15.0  # from one picture to the next, at least: more of them nobody sees
IDLE_S = 2.0  # without a question the thread ends, and the next question starts another
LATE_S = 0.5  # what takes longer than this is said to be under way

Q = TypeVar("Q")
A = TypeVar("A")


class Painter(Generic[Q, A]):
    """Asked by the screen, which never waits; what is read is replaced whole, so needs no lock.

    answer   the newest question that was worked out, with what came of it
    failure  why the newest could not be, "" when it could
    """

    def __init__(self, work: Callable[[Q], A]) -> None:
        self._work = work
        self._changed = threading.Condition()
        self._waiting: list[Q] = []  # one at most
        self._running = False
        self._begun_s = 0.0  # when the newest picture was begun
        self._asked_s: float | None = None  # when the newest was asked, while it has no answer
        self.answer: tuple[Q, A] | None = None
        self.failure = ""

    def ask(self, question: Q) -> None:
        """Have a question worked out, in place of one that still waits."""
        with self._changed:
            self._waiting[:] = [question]
            self._asked_s = self._asked_s or time.monotonic()
            self._changed.notify()
            if not self._running:
                self._running = True
                threading.Thread(target=self._run, name="desk-painter", daemon=True).start()

    @property
    def late(self) -> bool:
        """Whether a question has waited for its answer for a while."""
        asked_s = self._asked_s
        return asked_s is not None and time.monotonic() - asked_s > LATE_S

    def _run(self) -> None:
        with threadpool_limits(1):  # small products, and the other cores are the engine's
            while (question := self._next()) is not None:
                try:
                    self.answer, self.failure = (question, self._work(question)), ""
                except Exception as error:
                    self.failure = f"{type(error).__name__}: {error}"
                with self._changed:
                    self._asked_s = time.monotonic() if self._waiting else None

    def _next(self) -> Q | None:
        """The newest question, in time; None once none came for a while."""
        with self._changed:
            if not self._changed.wait_for(lambda: self._waiting, IDLE_S):
                self._running = False
                return None
        time.sleep(max(0.0, self._begun_s + PACE_S - time.monotonic()))
        with self._changed:
            self._begun_s = time.monotonic()
            return self._waiting.pop()
