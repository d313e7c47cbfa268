"""The guard in one line."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations

import pytest
from desk.pictures import guard_views
from hypothesis import given, settings
from hypothesis import strategies as st

from beamctl.desk.format import Row, length
from beamctl.desk.rows.guardline import MARKS, Part, guard_row, squeeze
from beamctl.snapshot import GuardView

NEAR = GuardView(
    "NEAR", "", 2.4, "stalls B4", 40_000.0, 97.6, 100.0, {}, 12.4, "stalls B5",
    "signed by the depot on 2026-12-01", 10.0,
)  # fmt: skip


def text_of(row: Row) -> str:
    return "".join(span.text for span in row)


@given(guard_views(), st.integers(0, 250))
def test_it_keeps_to_any_width(guard: GuardView, width: int) -> None:
    assert length(guard_row(guard, width)) <= width


@given(guard_views(), st.integers(11, 250))
@settings(deadline=None)
def test_states_differ_without_colour(guard: GuardView, width: int) -> None:
    texts = {state: text_of(guard_row(replace(guard, state=state), width)) for state in MARKS}
    for a, b in combinations(MARKS, 2):
        assert texts[a][:3] != texts[b][:3]
        assert texts[a][4:11] != texts[b][4:11]
    assert all(texts[state].startswith(f"{MARKS[state]} {state}") for state in MARKS)


@given(guard_views(), st.integers(11, 250))
def test_only_trips_and_blindness_look_like_alarms(guard: GuardView, width: int) -> None:
    alarmed = any(span.role == "alarm" for span in guard_row(guard, width))
    assert alarmed == (guard.state in ("TRIPPED", "BLIND"))


def test_a_wide_line_says_all_of_it() -> None:
    text = text_of(guard_row(replace(NEAR, held_db={"prow": 3.0}), 200))
    assert text == (
        "(-) NEAR  2.4 dB left  at stalls B4, 40 kHz  prow held 3.0 dB = 6.0 dB of programme"
        "  signed by the depot on 2026-12-01  dose 12 % stalls B5  margin 10 dB"
    )


def test_80_columns_hold_the_most_of_it() -> None:
    text = text_of(guard_row(NEAR, 80))
    for part in ("(-) NEAR", "2.4 dB", "stalls B4", "40 kHz", "signed", "dose 12 %", "margin 10"):
        assert part in text


def test_what_is_held_and_unsigned_outlast_dose_and_margin() -> None:
    guard = replace(NEAR, state="CAPPING", held_db={"prow": 1.0, "stern": 3.0}, signed="")
    text = text_of(guard_row(guard, 80))
    assert "stern held 3.0 = 6.0 dB programme +1" in text
    assert text.endswith("UNSIGNED")
    assert "margin" not in text


def test_a_silent_house_and_a_reason() -> None:
    assert "nothing heard" in text_of(guard_row(replace(NEAR, headroom_db=None), 80))
    tripped = replace(NEAR, state="TRIPPED", reason="14.2 kHz at -48 dB re carrier")
    text = text_of(guard_row(tripped, 80))
    assert text.startswith("(X) TRIPPED  14.2 kHz at -48 dB re carrier")
    assert "left" not in text
    blind = text_of(guard_row(replace(tripped, state="BLIND", reason=""), 80))
    assert blind.startswith("(?) BLIND  no reason given")


def test_why_it_is_unsigned_is_said_where_there_is_room() -> None:
    guard = replace(NEAR, signed="UNSIGNED: never signed")
    assert "UNSIGNED: never signed" in text_of(guard_row(guard, 120))


@pytest.mark.parametrize(
    ("width", "text"),
    [(40, "one  two  three"), (14, "one  two  3"), (9, "one  two"), (7, "one"), (2, "")],
)
def test_the_lowest_rank_is_shortened_and_then_dropped_first(width: int, text: str) -> None:
    parts = [Part(9, ("one",)), Part(5, ("two",)), Part(1, ("three", "3"))]
    assert text_of(squeeze(parts, width)) == text
