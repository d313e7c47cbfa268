"""The four big readings."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from beamctl.desk.format import Row, View, length
from beamctl.desk.glyphs import draw
from beamctl.desk.readings import HEIGHT, loudest, readings
from beamctl.snapshot import Answer, PanelView

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
    for block, reading in ((upper, "12.5"), (upper, "OPEN"), (lower, "1:23"), (lower, "-12.3")):
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


def test_loudest_panel() -> None:
    quiet, loud = PanelView("a", 8, -40.0, 0.0), PanelView("b", 8, -3.0, 0.0)
    silent = PanelView("c", 8, None, 0.0)
    assert loudest((quiet, silent, loud)) is loud
    assert loudest((silent,)) is None
    assert loudest((PanelView("d", 8, 0.0, 0.0), quiet)) == PanelView("d", 8, 0.0, 0.0)


def test_exact_zero_is_said(view: Make) -> None:
    assert "exact zero" in flat(readings(view(panels=(PanelView("c", 8, None, 0.0),)), 80))
