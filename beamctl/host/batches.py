"""Records on their way to the engine, until it is certain at which sample each was taken.

The engine moves a batch that comes too late as a whole and says by how much. Only then does it go
into the journal, in the order it was made.
"""

from __future__ import annotations

import json
from collections import deque
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Any

from beamctl.show.records import SOUNDING, Record


@dataclass(slots=True)
class Batch:
    """Records that were sent together."""

    number: int
    records: list[Record]
    certain: bool


class Batches:
    """`write` gets records once they are certain; `moved` is told of those that came late."""

    def __init__(
        self,
        write: Callable[[Iterable[Record]], None],
        moved: Callable[[Iterable[Record], int], None],
    ) -> None:
        self._write = write
        self._moved = moved
        self._waiting: deque[Batch] = deque()
        self._number = 0

    def send(self, records: list[Record], send: Callable[[dict[str, Any]], bool]) -> None:
        """Send what sounds through `send`; what only tells waits for its turn in the journal."""
        if not records:
            return
        sounding = [r for r in records if r.what in SOUNDING]
        self._number += 1
        if sounding:
            rows = [json.loads(r.to_json()) for r in sounding]
            if not send({"batch": self._number, "records": rows}):
                records = [r for r in records if r.what not in SOUNDING]
                sounding = []
        self._waiting.append(Batch(self._number, records, not sounding))
        self._flush()

    @property
    def open(self) -> bool:
        """True while a batch is on its way."""
        return any(not batch.certain for batch in self._waiting)

    def settle(self, number: int, moved: int) -> None:
        """The engine took batch `number`, `moved` samples later than asked."""
        for batch in self._waiting:
            if batch.number == number:
                if moved:
                    self._moved(batch.records, moved)
                batch.records = [r.later(moved) for r in batch.records]
                batch.certain = True
        self._flush()

    def forget(self) -> None:
        """The engine is gone: what it never confirmed did not sound; what only tells is kept."""
        for batch in self._waiting:
            if not batch.certain:
                batch.records = [r for r in batch.records if r.what not in SOUNDING]
                batch.certain = True
        self._flush()

    def _flush(self) -> None:
        while self._waiting and self._waiting[0].certain:
            self._write(self._waiting.popleft().records)
