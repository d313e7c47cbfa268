"""The four big readings."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from desk.pictures import guard_views
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from beamctl.caution import CAUTION_LINE
from beamctl.desk.box import vouch_box
from beamctl.desk.format import Row, View, length
from beamctl.desk.rows.glyphs import draw
from beamctl.desk.rows.readings import HEIGHT, between, readings
from beamctl.snapshot import Answer, GuardView

Make = Callable[..., View]


def text_of(rows: list[Row]) -> list[str]:
    return ["".join(span.text for span in row) for row in rows]


def flat(rows: list[Row]) -> str:
    return " ".join(" ".join(text_of(rows)).split())


@pytest.mark.parametrize("width", [80, 120, 200])
def test_all_four_are_drawn_in_glyphs(view: Make, width: int) -> None:
    rows = text_of(readings(view(about={"dot": "#"}), width))
    assert len(rows) == HEIGHT
    upper, lower = rows[:5], rows[6:]
    for block, reading in ((upper, "12.5"), (upper, "OPEN"), (lower, "1:23"), (lower, "NEAR 2.4")):
        glyphs = draw(reading, "#")
        assert any(
            all(row[at:].startswith(glyph) for row, glyph in zip(block, glyphs, strict=True))
            for at in range(width)
        ), reading


@pytest.mark.parametrize("width", [20, 40, 80, 81, 120, 300])
@pytest.mark.parametrize("output", ["COLD", "SHUT", "OPEN", "HUSHED", "TRIPPED", "LOST"])
def test_rows_keep_to_the_width(view: Make, width: int, output: str) -> None:
    for row in readings(view(output=output, standby="12345.678901ABC"), width):
        assert length(row) <= width


@pytest.mark.parametrize("output", ["COLD", "SHUT", "OPEN", "HUSHED", "TRIPPED", "LOST"])
def test_every_output_state_fits_80_columns_in_glyphs(view: Make, output: str) -> None:
    rows = text_of(readings(view(about={"dot": "#"}, output=output), 80))[:5]
    assert all(row[44:].startswith(g) for row, g in zip(rows, draw(output, "#"), strict=True))


def test_a_reference_too_wide_for_glyphs_is_written_in_full(view: Make) -> None:
    assert "12345.678901ABC" in flat(readings(view(standby="12345.678901ABC"), 80))


def test_the_exact_reference_stands_beside_the_glyphs(view: Make) -> None:
    assert "stand by 15a" in flat(readings(view(standby="15a"), 80))


def test_title_and_note_of_the_standby_cue(view: Make) -> None:
    text = flat(readings(view(), 80))
    assert "whisper crosses row B" in text
    assert "on the word 'terminus'" in text


def test_nothing_stands_by(view: Make) -> None:
    assert "nothing stands by" in flat(readings(view(standby=""), 80))


def test_a_barred_cue_says_so(view: Make) -> None:
    assert "BARRED 12.5" in flat(readings(view(states={"12.5": "barred"}), 80))


def test_words_between_the_readings(view: Make) -> None:
    assert "READY: Enter arms" in flat(readings(view(arming=True, output="SHUT"), 80))
    assert "READY: Enter restores" in flat(readings(view(arming=True, output="HUSHED"), 80))
    assert "HOLDING" in flat(readings(view(holding=True), 80))
    assert "STALE: as it was 3.2 s ago" in flat(readings(view(about={"stale_s": 3.2}), 80))
    quiet = flat(readings(view(), 80))
    assert not any(word in quiet for word in ("READY", "HOLDING", "STALE"))


def test_an_answer_names_its_action_and_reason(view: Make) -> None:
    refused = ("Go", Answer(False, "not-armed", "press * then Enter"))
    assert "Go REFUSED: not-armed, press" in flat(readings(view(about={"answer": refused}), 120))
    done = ("Go", Answer(True))
    assert "Go: done" in flat(readings(view(about={"answer": done}), 80))


def test_before_the_first_go(view: Make) -> None:
    assert "no GO yet" in flat(readings(view(since_go_s=None, newest=""), 80))


def test_small_print_does_not_move_with_the_number(view: Make) -> None:
    places = {
        text_of(readings(view(since_go_s=seconds), 80))[6].index("s since GO")
        for seconds in (0.0, 1.1, 9.9, 10.0, 58.8)
    }
    assert len(places) == 1


STATES = ["CLEAR", "NEAR", "CAPPING", "TRIPPED", "BLIND"]


def stands_in(rows: list[str], reading: str) -> bool:
    """True when the glyphs of `reading` stand in these rows, all at one place."""
    glyphs = draw(reading, "#")
    return any(
        all(row[at:].startswith(glyph) for row, glyph in zip(rows, glyphs, strict=True))
        for at in range(len(rows[0]))
    )


@pytest.mark.parametrize("width", [80, 120])
@pytest.mark.parametrize(
    ("state", "headroom_db", "reading"),
    [
        ("CLEAR", 34.25, "CLEAR 34.2"),
        ("CLEAR", None, "CLEAR --"),
        ("NEAR", 2.4, "NEAR 2.4"),
        ("CAPPING", 0.04, "CAPPING 0.0"),
        ("CAPPING", -1.3, "CAPPING -1.3"),
        ("TRIPPED", None, "TRIPPED"),
        ("BLIND", 3.0, "BLIND"),
    ],
)
def test_state_and_headroom_of_the_guard_in_glyphs(
    view: Make, width: int, state: str, headroom_db: float | None, reading: str
) -> None:
    guard = GuardView(state, "why", headroom_db)
    assert stands_in(text_of(readings(view(about={"dot": "#"}, guard=guard), width))[6:], reading)


def test_far_over_a_cap_the_tenths_give_way_and_never_the_glyphs(view: Make) -> None:
    guard = GuardView("CAPPING", headroom_db=-12.3)
    rows = text_of(readings(view(about={"dot": "#"}, guard=guard), 80))[6:]
    assert stands_in(rows, "CAPPING -12")


@given(guard=guard_views(), width=st.integers(1, 200))
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
def test_any_guard_keeps_to_any_width_and_its_states_differ(
    view: Make, guard: GuardView, width: int
) -> None:
    looks = {}
    for state in STATES:
        rows = readings(view(about={"dot": "#"}, guard=replace(guard, state=state)), width)
        assert len(rows) == HEIGHT
        assert all(length(row) <= width for row in rows)
        looks[state] = "\n".join(text_of(rows))
    assert width < 40 or len(set(looks.values())) == len(STATES)


def test_why_nothing_may_sound_stands_beside_the_state(view: Make) -> None:
    guard = GuardView("TRIPPED", "14.2 kHz at -48 dB")
    assert "14.2 kHz at -48 dB" in flat(readings(view(guard=guard), 120))


def test_the_caution_stands_beside_ready(view: Make) -> None:
    for output in ("SHUT", "HUSHED"):
        row = "".join(span.text for span in between(view(arming=True, output=output)))
        assert row.endswith(f"  {CAUTION_LINE}")
        assert len(row) <= 80


def test_what_the_second_key_does_after_a_trip_and_without_seats(view: Make) -> None:
    tripped = between(view({"asks_word": True}, output="TRIPPED"))
    assert tripped[0].text == "READY: Enter opens a box for a typed word"
    assert between(view({"asks_word": True}, output="OPEN")) == ()
    unvouched = view(output="SHUT", arming=True, unvouched=True)
    assert between(unvouched)[0].text.startswith("READY: Enter asks who answers")
    assert between(replace(unvouched, box=vouch_box())) == ()


def test_a_barred_cue_gives_its_reason_in_place_of_its_note(view: Make) -> None:
    why = "over its cap at stalls B4 by 3.2 dB; whisper at trim -25.2 dB fits"
    seen = view(states={"12.5": "barred"}, barred={"12.5": why})
    text = flat(readings(seen, 200))
    assert why in text
    assert "on the word" not in text
