"""The ground plan of the seats, one sign a seat by what is left to its cap.

Seen from above with the stage below, so that right on the screen is right as a panel looks out.
"""

from __future__ import annotations

from itertools import groupby, pairwise

from beamctl.desk.format import BLANK, Role, Row, Span, fit
from beamctl.snapshot import SeatLevel

REACHED, MORE, SILENT = "!", "o", "."
WITHIN_DB = ((3.0, "3"), (6.0, "6"), (10.0, "X"))  # dB left to the cap, at most → sign
ROLES: dict[str, Role] = {REACHED: "alarm", "3": "attention", "6": "text"}
KEY = f"{REACHED} cap reached   3 6 X within 3, 6, 10 dB of it   {MORE} more left   {SILENT} silent"
_CELLS_PER_M, _ROWS_PER_M = 8.0, 4.0  # at most; a cell is about twice as high as it is wide


def left_db(seat: SeatLevel) -> float | None:
    """What is left to its cap; None when nothing is heard there."""
    return None if seat.level_db is None else seat.cap_db - seat.level_db


def sign_of(seat: SeatLevel) -> str:
    """One sign by what is left to the cap, distinct without colour."""
    left = left_db(seat)
    if left is None:
        return SILENT
    if left <= 0.0:
        return REACHED
    return next((sign for most_db, sign in WITHIN_DB if left <= most_db), MORE)


def plan_rows(seats: tuple[SeatLevel, ...], width: int, height: int) -> list[Row]:
    """`height` rows: the seats, and the stage's edge below; where several share a cell, the worst.

    Each axis is stretched to the room, but no further than a true plan of 4 rows to a metre.
    """
    if width < 1 or height < 1:
        return [BLANK] * max(height, 0)
    seats = tuple(sorted(seats, key=urgency))  # the worst first, and it keeps its cell
    columns = _places([seat.at_m[0] for seat in seats], width, _CELLS_PER_M)
    upward = _places([seat.at_m[1] for seat in seats], height - 1, _ROWS_PER_M)
    signs: dict[tuple[int, int], str] = {}
    for seat, x, up in zip(seats, columns, upward, strict=True):
        signs.setdefault((x, height - 2 - up), sign_of(seat))
    rows = [_row(signs, y, width) for y in range(height - 1)]
    return [*rows, (Span(" stage ".center(width, "-")[:width]),)]


def urgency(seat: SeatLevel) -> float:
    """Sorts by what is left to the cap, least first and silent seats last."""
    left = left_db(seat)
    return float("inf") if left is None else left


def _places(all_m: list[float], cells: int, most_per_m: float) -> list[int]:
    """The cell of each, 0 to `cells` - 1, in the middle of the room when they need less of it."""
    low_m = min(all_m, default=0.0)
    span_m = max(all_m, default=0.0) - low_m
    per_m = min(most_per_m, (cells - 1) / span_m) if span_m > 0.0 else most_per_m
    per_m = _even(per_m, all_m)
    start = round((cells - 1 - per_m * span_m) / 2.0)
    places = (start + round(per_m * (at_m - low_m)) for at_m in all_m)
    return [min(max(place, 0), max(cells - 1, 0)) for place in places]


def _even(per_m: float, all_m: list[float]) -> float:
    """`per_m` or somewhat less, so that neighbours are whole cells apart: no gap like an aisle."""
    places_m = sorted({round(at_m, 3) for at_m in all_m})
    pitch_m = min((b - a for a, b in pairwise(places_m)), default=0.0)
    whole = int(per_m * pitch_m + 1e-6)
    return whole / pitch_m if whole else per_m


def _row(signs: dict[tuple[int, int], str], y: int, width: int) -> Row:
    line = [signs.get((x, y), " ") for x in range(width)]
    runs = groupby(line, key=lambda sign: ROLES.get(sign, "dim"))
    return fit([Span("".join(run), role) for role, run in runs], width)
