"""The house in a picture, and the air in it."""

from __future__ import annotations

from collections.abc import Iterable

import pytest
from desk.conftest import NIGHT_TRAM
from hypothesis import given
from hypothesis import strategies as st

from beamctl.desk.format import Row, length
from beamctl.desk.rows.house import air_row, house_rows
from beamctl.snapshot import AirView, SeatLevel

SEATS = tuple(
    SeatLevel(
        f"benches {name}", "benches", False, at_m, 97.6 if name == "B4" else None, 4e4, 100.0, 1.0
    )
    for name, at_m in NIGHT_TRAM.house.block["benches"].seat_points().items()
)


def text_of(rows: Iterable[Row]) -> str:
    return "\n".join("".join(span.text for span in row) for row in rows)


def lit(rows: Iterable[Row]) -> list[str]:
    return [span.text for row in rows for span in row if span.role == "text"]


@given(
    chosen=st.sampled_from(["air", "spot buffer", "block benches", "surface back_wall", "gone"]),
    levels=st.sampled_from([None, (), SEATS]),
    width=st.integers(0, 150),
    height=st.integers(0, 50),
)
def test_the_picture_fits_any_room(chosen, levels, width, height) -> None:
    rows = house_rows(NIGHT_TRAM, levels, chosen, width, height)
    assert len(rows) <= height
    assert all(length(row) <= width for row in rows)


def test_seats_are_signed_by_what_is_left_to_their_caps() -> None:
    text = text_of(house_rows(NIGHT_TRAM, SEATS, "air", 60, 30))
    assert text.count("3 benches B4") == 1
    assert "within 3, 6, 10 dB" in text
    plan = text[: text.index("stage")]
    assert plan.count("3") == 1
    assert plan.count(".") == 23


def test_without_levels_the_plan_still_shows_the_room() -> None:
    text = text_of(house_rows(NIGHT_TRAM, None, "air", 60, 30))
    plan = text[: text.index("stage")]
    assert plan.count("o") - plan.count("prow") - 2 * plan.count("conductor") >= 24
    assert "seat" in text


def test_what_the_cursor_is_on_stands_out() -> None:
    assert "buffer" in text_of(house_rows(NIGHT_TRAM, None, "spot buffer", 60, 30))
    before = lit(house_rows(NIGHT_TRAM, None, "air", 60, 30))
    for chosen, sign in (("spot buffer", "x"), ("surface back_wall", "="), ("block benches", "o")):
        rows = house_rows(NIGHT_TRAM, None, chosen, 60, 30)
        more = [text for text in lit(rows) if text not in before]
        assert sign in "".join(more), chosen


def test_the_worst_seats_give_way_to_the_plan() -> None:
    assert "benches B4" not in text_of(house_rows(NIGHT_TRAM, SEATS, "air", 60, 13))
    assert "benches B4" in text_of(house_rows(NIGHT_TRAM, SEATS, "air", 60, 16))


@pytest.mark.parametrize(
    ("air", "said"),
    [
        (
            AirView(16.0, 60.0, 101.325),
            "air 16.0 C  60 %  101.3 kPa  from house.toml, not read since",
        ),
        (
            AirView(21.5, 44.0, 99.0, "desk", 125.0),
            "air 21.5 C  44 %  99.0 kPa  read 2 min ago by desk",
        ),
        (
            AirView(21.5, 44.0, 99.0, "desk", 1801.0),
            "air 21.5 C  44 %  99.0 kPa  read 30 min ago by desk  AIR OLD",
        ),
    ],
)
def test_the_air_says_how_old_it_is(air: AirView, said: str) -> None:
    assert text_of([air_row(air, 100)]) == said
