"""An evening cut into equal stretches, so that a page or a picture can hold it."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from beamctl.report.evening import Reading, SeatBlock

STEPS_S = (1, 2, 5, 10, 30, 60, 300, 600, 1800, 3600, 7200, 14400, 43200, 86400)


def step_for(readings: Sequence[Reading], most: int) -> int:
    """The shortest step in seconds that cuts the readings into no more than `most` stretches."""
    span_s = readings[-1].at.second - readings[0].at.second
    return next((step for step in STEPS_S if span_s < step * most), STEPS_S[-1])


def stretches(readings: Sequence[Reading], step_s: int) -> Iterator[Sequence[Reading]]:
    """The readings of every stretch that has one, counted from the first reading."""
    start = readings[0].at.second
    found: dict[int, list[Reading]] = {}
    for reading in readings:
        found.setdefault(int((reading.at.second - start) // step_s), []).append(reading)
    yield from found.values()


def nearest_cap(told: Iterable[SeatBlock]) -> SeatBlock:
    """The one with the least headroom; a quiet one only when all were quiet."""
    return min(told, key=lambda s: float("inf") if s.headroom_db is None else s.headroom_db)
