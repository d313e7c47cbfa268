"""The room in signs."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from desk.conftest import NIGHT_TRAM, WHISPER
from hypothesis import given, settings
from hypothesis import strategies as st
from support.rigs import make_show

from beamctl.acoustics.geometry import angles_deg, to_panel
from beamctl.desk.format import Row, length
from beamctl.desk.rows.canvas import Canvas
from beamctl.desk.rows.groundplan import (
    KEY,
    Mark,
    Trace,
    beam_trace,
    draw_room,
    edge_row,
    plan_rows,
    section,
)
from beamctl.forecast.landing import Room
from beamctl.show.show import Show
from beamctl.show.targets import frame_of

SIZES = st.integers(0, 120), st.integers(0, 50)
SEATS: dict[str, Any] = {
    "class": "seats", "first_m": (-2.0, 4.0, 1.2), "rows": ("A", "B"),
    "row_step_m": (0.0, 1.5, 0.0), "seats": 4, "seat_step_m": (1.0, 0.0, 0.0),
}  # fmt: skip
PIT = SEATS | {"class": "crew", "rows": ("pit",), "seats": 1, "first_m": (3.0, 2.0, 1.2)}


def text_of(rows: list[Row]) -> list[str]:
    return ["".join(span.text for span in row) for row in rows]


def hall(**house: Any) -> Show:
    return make_show(house={"block": {"stalls": SEATS, "pit": PIT}} | house, at_m=(0.0, 0.0, 3.0))


@settings(deadline=None, max_examples=40)
@given(*SIZES)
def test_any_room_fits_any_size(width: int, height: int) -> None:
    rows = plan_rows(NIGHT_TRAM, width, height)
    assert len(rows) == height
    assert all(length(row) in (0, width) for row in rows)


def test_every_seat_and_crew_point_has_its_sign() -> None:
    drawn = Counter("".join(text_of(plan_rows(hall(), 60, 24))[:-1]))
    assert (drawn["o"], drawn["c"], drawn["^"]) == (8, 1, 1)


def test_the_stage_is_below_and_what_is_far_away_above() -> None:
    rows = text_of(plan_rows(hall(), 60, 24))
    assert rows[-1].strip("-") == " stage "
    seats = [n for n, row in enumerate(rows) if "o" in row]
    (panel,) = (n for n, row in enumerate(rows) if "^" in row)
    assert max(seats) < panel


def test_a_wall_is_a_line_and_a_ceiling_an_outline() -> None:
    wall = {"corner_m": (-3.0, 8.0, 0.0), "along_m": (6.0, 0.0, 0.0), "up_m": (0.0, 0.0, 4.0)}
    roof = {"corner_m": (-3.0, 1.0, 5.0), "along_m": (6.0, 0.0, 0.0), "up_m": (0.0, 6.0, 0.0)}
    lines = [
        [row.count("=") for row in text_of(plan_rows(hall(surface={"s": s}), 60, 24))]
        for s in (wall | {"reflection": 0.9}, roof | {"reflection": 0.9})
    ]
    assert sum(count > 0 for count in lines[0]) == 1
    assert sum(count > 0 for count in lines[1]) > 6


def test_spots_are_named_where_there_is_room() -> None:
    show = hall(spot={"conductor": {"at_m": (1.0, 2.0, 1.6)}})
    assert any("x conductor" in row for row in text_of(plan_rows(show, 60, 24)))
    assert any("x" in row for row in text_of(plan_rows(show, 12, 8)))
    assert not any("conductor" in row for row in text_of(plan_rows(show, 12, 8)))


@pytest.mark.parametrize(("pan_deg", "sign"), [(0.0, "^"), (90.0, ">"), (-90.0, "<"), (180.0, "v")])
def test_a_panel_shows_which_way_it_looks(pan_deg: float, sign: str) -> None:
    show = make_show(house={"block": {"stalls": SEATS}}, at_m=(0.0, 0.0, 3.0), pan_deg=pan_deg)
    assert any(f"{sign} p" in row for row in text_of(plan_rows(show, 60, 24)))


def test_marks_stand_over_all_else_and_the_first_keeps_its_cell() -> None:
    seat = hall().house.seats()["A1"]
    marks = [Mark(seat, "3", "attention", "A1"), Mark(seat, "X")]
    rows = plan_rows(hall(), 60, 24, marks=marks)
    drawn = Counter("".join(text_of(rows)[:-1]))
    assert (drawn["3"], drawn["X"], drawn["o"]) == (1, 0, 7)
    assert any(span.role == "attention" and "3" in span.text for row in rows for span in row)


def test_a_live_beam_is_drawn_to_the_seat_it_points_at() -> None:
    show = NIGHT_TRAM
    frame = frame_of(show.rig.panel["prow"])
    azimuth, elevation = angles_deg(to_panel(frame, np.array(show.house.seats()["B4"])))
    beam = replace(WHISPER, aim_deg=(float(azimuth), float(elevation)), peak_deg=None)
    trace = beam_trace(show, Room(show), beam)
    assert trace.way_m[0] == pytest.approx((0.0, 0.0, 3.0))
    assert trace.way_m[-1] == pytest.approx(show.house.seats()["B4"], abs=0.01)
    rows = plan_rows(show, 60, 24, traces=[trace])
    assert "".join(text_of(rows)).count("*") == 1
    assert sum("live" in {span.role for span in row} for row in rows) > 6


def test_a_beam_is_named_where_there_is_room() -> None:
    trace = Trace(((0.0, 0.0, 3.0), (-2.5, 2.0, 1.2)), name="whisper")
    assert any(
        "whisper *" in row or "* whisper" in row
        for row in text_of(plan_rows(hall(), 60, 24, traces=[trace]))
    )


def test_a_bounce_goes_there_and_back() -> None:
    trace = Trace(((0.0, 0.0, 3.0), (0.0, 8.0, 2.0), (1.0, 4.0, 1.2)))
    rows = text_of(plan_rows(hall(), 60, 24, traces=[trace]))
    end = next(n for n, row in enumerate(rows) if "*" in row)
    assert any("|" in row or "\\" in row for row in rows[:end])


def test_the_section_has_the_panel_above_the_seats() -> None:
    canvas = Canvas(section(hall(), 60, 14))
    draw_room(canvas, hall())
    rows = text_of(canvas.rows())
    (panel,) = (n for n, row in enumerate(rows) if ">" in row)
    (seats,) = {n for n, row in enumerate(rows) if "o" in row}
    assert panel < seats
    assert rows[panel].index(">") < rows[seats].index("o")
    assert "floor" in "".join(span.text for span in edge_row(canvas.projection))


def test_every_sign_is_in_the_key_and_in_ascii() -> None:
    show = hall(
        spot={"x1": {"at_m": (1.0, 2.0, 1.6)}},
        surface={
            "w": {"corner_m": (-3.0, 8.0, 0.0), "along_m": (6.0, 0.0, 0.0),
                  "up_m": (0.0, 0.0, 4.0), "reflection": 0.9},
        },
    )  # fmt: skip
    text = "".join(text_of(plan_rows(show, 100, 40)[:-1]))
    assert text.isascii()
    assert set(text) - set("p1 ") <= set(KEY)
