"""The rows of the Guard screen."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from desk.pictures import guard_views, seat_levels
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from beamctl.caution import CAUTION_LINE
from beamctl.desk.format import Row, View, length
from beamctl.desk.rows.guard import (
    TABLE,
    seat_rows,
    standing_rows,
    status_rows,
    worst_row,
    worst_rows,
)
from beamctl.snapshot import GuardView, SeatLevel

Make = Callable[..., View]
SEAT = SeatLevel("stalls B4", "stalls", False, (0.0, 5.0, 1.2), 97.6, 31_500.0, 100.0, 12.4)
BARRED = {
    str(n): f"stalls B{n}, 40 kHz: {n}.2 dB over the cap at 4.2 s; a trim of -25.2 dB fits"
    for n in range(1, 30)
}


def text_of(rows: list[Row]) -> str:
    return "\n".join("".join(span.text for span in row) for row in rows)


@given(
    guard=guard_views(),
    seats=st.none() | seat_levels(),
    barred=st.dictionaries(st.text(max_size=8), st.text(max_size=150), max_size=12),
    width=st.integers(1, 200),
    height=st.integers(0, 50),
)
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
def test_any_picture_fits_any_room(
    view: Make,
    guard: GuardView,
    seats: tuple[SeatLevel, ...] | None,
    barred: dict[str, str],
    width: int,
    height: int,
) -> None:
    seen = view(guard=guard, barred=barred)
    rows = seat_rows(seats, width, height)
    assert len(rows) == height
    below = standing_rows(seen, width, height)
    assert len(below) <= max(height, 5 + len(guard.held_db))
    assert all(length(row) <= width for row in [*rows, *below, *status_rows(seen, width)])


def test_a_seat_with_its_figures() -> None:
    text = text_of([worst_row(SEAT)])
    assert text.split() == ["3", "stalls", "B4", "31.5k", "97.6", "100.0", "2.4", "12%"]
    assert len(text) == TABLE
    silent = text_of([worst_row(replace(SEAT, level_db=None))])
    assert silent.split() == [".", "stalls", "B4", "--", "100.0", "--", "12%"]


def test_a_name_without_its_block_gets_it() -> None:
    assert worst_row(replace(SEAT, name="B4")) == worst_row(SEAT)


def test_the_worst_of_every_block_and_the_worst_block_first(host) -> None:
    balcony = [replace(s, block="balcony", level_db=80.0) for s in host.seats]
    crew = replace(SEAT, name="crew X1", block="crew", crew=True, level_db=101.0)
    text = text_of(worst_rows((*balcony, *host.seats, crew), 8)).splitlines()
    assert [row.split()[1] for row in text[1:]] == ["crew"] + ["stalls"] * 2 + ["balcony"] * 2
    assert text[1].startswith("!")
    assert text[2].split()[:3] == ["3", "stalls", "B4"]


def test_blocks_without_room_are_counted() -> None:
    seats = tuple(replace(SEAT, block=f"b{n}") for n in range(9))
    rows = text_of(worst_rows(seats, 5)).splitlines()
    assert len(rows) == 5
    assert rows[-1] == "and 6 more blocks"


def test_before_levels_come_and_without_seats() -> None:
    assert "waiting for levels" in text_of(seat_rows(None, 80, 8))
    assert "no seat is declared: nothing is measured" in text_of(seat_rows((), 80, 8))


def test_plan_and_table_stand_side_by_side_or_the_table_alone(host) -> None:
    both = text_of(seat_rows(host.seats, 80, 10))
    assert "- stage -" in both
    assert "3 stalls B4" in both
    narrow = text_of(seat_rows(host.seats, 60, 10))
    assert "stage" not in narrow
    assert "3 stalls B4" in narrow


@pytest.mark.parametrize(("width", "height"), [(80, 8), (120, 13)])
def test_who_signed_dose_held_barred_and_the_caution(
    view: Make, host, width: int, height: int
) -> None:
    guard = replace(host.now.guard, held_db={"prow": 3.0, "stern": 1.5})
    text = text_of(standing_rows(view(guard=guard), width, height))
    for part in (
        "signed by the depot on 2026-12-01  margin 10 dB",
        "dose 12 % of its window at stalls B4",
        "prow held 3.0 dB = 6.0 dB of programme  stern held 1.5 dB = 3.0 dB of programme",
        "[!] 13     stalls B4, 40 kHz: 3.2 dB over the cap at 4.2 s; a trim of -25.2 dB",
        "! cap reached",
        CAUTION_LINE,
    ):
        assert part in text


def test_barred_cues_beyond_the_room_are_counted(view: Make) -> None:
    text = text_of(standing_rows(view(barred=BARRED), 80, 8))
    shown = [n for n in BARRED if f"[!] {n:6} stalls B{n}," in text]
    assert 1 <= len(shown) < len(BARRED)
    assert f"[!] and {len(BARRED) - len(shown)} more" in text
    assert "no cue is barred" in text_of(standing_rows(view(barred={}), 80, 8))


def test_the_status_row_says_what_enter_would_fire(view: Make) -> None:
    text = text_of(status_rows(view(), 80))
    assert text.startswith("[=] stand by 12.5  whisper crosses row B")
    assert text.endswith("OPEN  1:23 since GO")
    assert text_of(status_rows(view(standby="13"), 80)).startswith("[!] stand by 13")
    assert text_of(status_rows(view(standby=""), 80)).startswith("nothing stands by")
