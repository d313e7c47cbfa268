"""The ground plan of the seats."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace

import pytest
from desk.pictures import seat_levels
from hypothesis import given
from hypothesis import strategies as st

from beamctl.desk.format import Row, length
from beamctl.desk.rows.seatplan import KEY, plan_rows, sign_of
from beamctl.snapshot import SeatLevel

SEAT = SeatLevel("stalls A1", "stalls", False, (0.0, 0.0, 1.2), 95.0, 40e3, 100.0, 0.0)


def text_of(rows: list[Row]) -> list[str]:
    return ["".join(span.text for span in row) for row in rows]


def hall(rows: int, seats: int) -> tuple[SeatLevel, ...]:
    """A rectangle of seats, half a metre apart, all at 5 dB under their cap."""
    return tuple(
        replace(SEAT, name=f"{r} {n}", at_m=(0.55 * n, 0.9 * r, 1.2))
        for r in range(rows)
        for n in range(seats)
    )


@pytest.mark.parametrize(
    ("left_db", "sign"),
    [
        (-2.0, "!"),
        (0.0, "!"),
        (0.1, "3"),
        (3.0, "3"),
        (3.1, "6"),
        (6.0, "6"),
        (6.1, "X"),
        (10.0, "X"),
        (10.1, "o"),
        (60.0, "o"),
        (None, "."),
    ],
)
def test_signs(left_db: float | None, sign: str) -> None:
    level_db = None if left_db is None else 100.0 - left_db
    assert sign_of(replace(SEAT, level_db=level_db)) == sign
    assert sign in KEY


@given(seat_levels(), st.integers(0, 120), st.integers(0, 40))
def test_any_seats_fit_any_room(seats: tuple[SeatLevel, ...], width: int, height: int) -> None:
    rows = plan_rows(seats, width, height)
    assert len(rows) == height
    assert all(length(row) <= width for row in rows)


@given(seat_levels(), st.integers(1, 120), st.integers(2, 40))
def test_the_worst_seat_is_always_on_the_plan(
    seats: tuple[SeatLevel, ...], width: int, height: int
) -> None:
    drawn = set("".join(text_of(plan_rows(seats, width, height)[:-1]))) - {" "}
    signs = [sign_of(seat) for seat in seats]
    worst = next((sign for sign in "!36Xo." if sign in signs), None)
    assert drawn <= set(signs)
    assert worst is None or worst in drawn


@pytest.mark.parametrize(("rows", "seats"), [(3, 8), (9, 30), (1, 1)])
def test_every_seat_has_a_cell_of_its_own_where_there_is_room(rows: int, seats: int) -> None:
    drawn = Counter("".join(text_of(plan_rows(hall(rows, seats), 32, 10)[:-1])))
    assert drawn["6"] == rows * seats


@pytest.mark.parametrize("width", [25, 32, 40, 70, 118])
def test_neighbours_are_equally_far_apart(width: int) -> None:
    row = text_of(plan_rows(hall(1, 25), width, 3))
    line = next(text for text in row if "6" in text)
    assert len({b - a for a, b in zip(_at(line), _at(line)[1:], strict=False)}) == 1


def _at(line: str) -> list[int]:
    return [n for n, sign in enumerate(line) if sign != " "]


def test_right_is_right_and_the_stage_is_below() -> None:
    near_left = replace(SEAT, at_m=(-2.0, 3.0, 1.2), level_db=None)
    far_right = replace(SEAT, at_m=(2.0, 6.0, 1.2), level_db=101.0)
    rows = text_of(plan_rows((near_left, far_right), 40, 12))
    (up,) = (n for n, row in enumerate(rows) if "!" in row)
    (down,) = (n for n, row in enumerate(rows) if "." in row)
    assert up < down
    assert rows[up].index("!") > rows[down].index(".")
    assert rows[-1].strip("-") == " stage "


def test_of_seats_that_share_a_cell_the_worst_is_drawn() -> None:
    stacked = [replace(SEAT, level_db=db) for db in (None, 92.0, 101.0, 95.0)]
    drawn = "".join(text_of(plan_rows(tuple(stacked), 20, 5)[:-1])).split()
    assert drawn == ["!"]
