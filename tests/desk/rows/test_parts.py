"""Beams, panels, sink, notices, legend and help."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest

from beamctl.caution import CAUTION_LINE, CAUTION_TEXT
from beamctl.desk.format import Row, View, length
from beamctl.desk.keymap import DEFAULT
from beamctl.desk.registry import EVERYTHING
from beamctl.desk.rows.parts import (
    beam_row,
    beam_rows,
    help_rows,
    legend_rows,
    notice_row,
    panel_row,
    panel_rows,
    sink_row,
)
from beamctl.desk.verbs.common import HELP, SCREENS
from beamctl.snapshot import BeamView, PanelView

Make = Callable[..., View]


def text_of(row: Row) -> str:
    return "".join(span.text for span in row)


def whisper(view: View, **changes: object) -> BeamView:
    return replace(view.snapshot.beams[0], **changes)


def test_a_travelling_beam_in_80_columns_is_whole(view: Make) -> None:
    text = text_of(beam_row(whisper(view()), 80))
    assert text.startswith("> whisper")
    for part in ("seat B4", "az -12.3 el +2.0", "peak -12.1 +2.0", "far", "ssb 0.70", "-22.0 dB"):
        assert part in text


def test_wide_rows_say_travelling_and_the_whole_target(view: Make) -> None:
    assert text_of(beam_row(whisper(view()), 120)).endswith("travelling")
    assert "spot pit via back_wall" in text_of(beam_row(view().snapshot.beams[1], 120))


def test_a_standing_beam_has_no_mark(view: Make) -> None:
    text = text_of(beam_row(whisper(view(), travelling=False), 120))
    assert text.startswith("  whisper")
    assert "travelling" not in text


@pytest.mark.parametrize(
    ("peak", "said"),
    [
        ((-12.3, 2.0), False),
        ((-12.21, 2.0), False),
        ((-12.2, 2.0), True),
        ((-12.3, 2.1), True),
        ((-12.3, 1.5), True),
    ],
)
def test_the_peak_is_said_when_it_differs_by_a_tenth(
    view: Make, peak: tuple[float, float], said: bool
) -> None:
    assert ("peak" in text_of(beam_row(whisper(view(), peak_deg=peak), 80))) is said


def test_a_peak_not_computed_is_not_passed_over(view: Make) -> None:
    assert "peak --" in text_of(beam_row(whisper(view(), peak_deg=None), 80))


def test_reach_in_metres(view: Make) -> None:
    assert " 6.0 m " in text_of(beam_row(view().snapshot.beams[1], 80))


def test_only_sounding_beams(view: Make) -> None:
    silent = whisper(view(), name="mute", sound="", level_db=None)
    rows = beam_rows(view(beams=(silent, *view().snapshot.beams)), 80, 4)
    assert len(rows) == 4
    assert not any("mute" in text_of(row) for row in rows)
    assert text_of(beam_rows(view(beams=(silent,)), 80, 2)[0]) == "no beam sounds"


def test_beams_beyond_the_room_are_counted(view: Make) -> None:
    five = tuple(whisper(view(), name=f"b{n}") for n in range(5))
    rows = beam_rows(view(beams=five), 80, 3)
    assert text_of(rows[2]) == "and 3 more beams sounding"


@pytest.mark.parametrize(
    ("peak_db", "lit"), [(None, 0), (-90.0, 0), (-60.0, 0), (-30.0, 10), (0.0, 20), (3.0, 20)]
)
def test_panel_bar(peak_db: float | None, lit: int) -> None:
    text = text_of(panel_row(PanelView("prow", 64, peak_db, 0.0), 80))
    assert text.count("|") == lit
    assert text.count("|") + text[: text.index("]")].count(".") == 20
    assert text.endswith("64 feeds")


def test_panel_numbers() -> None:
    assert "-12.3 dB  shared -1.2 dB" in text_of(panel_row(PanelView("a", 8, -12.3, -1.2), 80))
    assert "shared" not in text_of(panel_row(PanelView("a", 8, -12.3, -0.01), 80))
    assert "exact zero" in text_of(panel_row(PanelView("a", 8, None, 0.0), 80))


def test_two_panels_share_one_row_rather_than_vanish(view: Make) -> None:
    both = tuple(replace(panel, shared_gain_db=-3.0) for panel in view().snapshot.panels)
    for panels in (view().snapshot.panels, both):
        (row,) = panel_rows(view(panels=panels), 80, 1)
        assert "prow" in text_of(row)
        assert "stern" in text_of(row)
        assert length(row) <= 80


def test_panels_beyond_the_room_are_counted(view: Make) -> None:
    many = tuple(PanelView(f"p{n}", 8, -3.0, 0.0) for n in range(9))
    assert text_of(panel_rows(view(panels=many), 80, 1)[0]) == "9 panels, no room for all"


def test_sink(view: Make) -> None:
    engine = replace(view().snapshot.engine, fill_ms=30.6, longest_ms=6.2, drift_ppm=-0.34)
    text = text_of(sink_row(view(engine=engine), 80))
    for part in ("null", "192 kHz", "80 feeds", "late 0", "load 12 %", "ring 32 ms, fill 31"):
        assert part in text
    engine = replace(engine, priority="real-time 20", route="clock", callbacks=77)
    text = text_of(sink_row(view(engine=engine), 200))
    for part in ("gap 6 ms", "drift -0.3 ppm", "real-time 20", "quantum 256", "clock", "77 calls"):
        assert part in text
    engine = replace(engine, late=3, load_pct=91.0, route="blocking writes")
    roles = {span.text: span.role for span in sink_row(view(engine=engine), 200)}
    assert roles["late 3"] == roles["load 91 %"] == roles["blocking writes"] == "attention"


def test_sink_that_is_not_ready_says_what_it_waits_for(view: Make) -> None:
    engine = replace(view().snapshot.engine, busy="sound bell.flac, 3 of 7")
    row = sink_row(view(engine=engine), 80)
    assert "not ready: sound bell.flac, 3 of 7" in text_of(row)
    assert {span.role for span in row if "ready" in span.text} == {"attention"}


def test_notices_oldest_first_with_their_number(view: Make) -> None:
    assert text_of(notice_row(view(notices=("first", "second")), 80)) == "! 1 of 2: first"
    assert text_of(notice_row(view(), 80)) == "no notices"


def test_a_lost_host_comes_before_every_notice(view: Make) -> None:
    text = text_of(notice_row(view({"stale_s": 3.0}, notices=("first",)), 80, gone=True))
    assert text.startswith("HOST GONE")
    assert text.endswith("! 1 of 1: first")
    assert text_of(notice_row(None, 80, gone=True)).startswith("HOST GONE")
    assert text_of(notice_row(None, 80)) == "waiting for the host"
    assert text_of(notice_row(view({"stale_s": 3.0}), 80)).startswith("HOST SILENT for 3.0 s")


def test_leaving_says_that_sound_goes_on(view: Make) -> None:
    text = text_of(notice_row(view({"asks_leave": True}), 80))
    assert "Sound goes on" in text
    assert "again within 3 s" in text


@pytest.mark.parametrize(("width", "rows"), [(80, 2), (120, 2)])
def test_the_legend_names_every_action_that_has_a_key(width: int, rows: int) -> None:
    legend = legend_rows(DEFAULT.legend("desk", True), width)
    assert len(legend) == rows
    text = " ".join(text_of(row) for row in legend)
    for name, action in EVERYTHING.items():
        told = action.keys and not action.on and name not in (HELP.name, *SCREENS)
        assert (f": {action.title}" in text) or not told
    assert "F1..F8: Screens" in text
    assert "0/Ins/F12: Hush" in text
    assert all(length(row) <= width for row in legend)


def test_help_opens_with_the_caution_and_explains_every_key() -> None:
    rows = help_rows(DEFAULT.helps("desk", True), 200, ("one", "two"))
    assert text_of(rows[0]) == CAUTION_LINE
    assert rows[0][0].role == "dim"
    text = "\n".join(text_of(row) for row in rows)
    for action in EVERYTHING.values():
        told = action.keys and not action.on
        assert (f"{action.title}: {action.help}" in text) or not told
    assert "! 1: one" in text
    assert "! 2: two" in text
    assert CAUTION_TEXT in text


def test_every_key_and_mark_is_explained_within_80_cells() -> None:
    rows = help_rows(DEFAULT.helps("desk", True), 80)
    text = "\n".join(text_of(row) for row in rows)
    assert "Leave:" in text
    assert "[!] barred" in text
    assert "( ) CLEAR  (-) NEAR  (=) CAPPING  (X) TRIPPED  (?) BLIND" in text
    assert all(length(row) <= 80 for row in rows)


def test_the_caution_fits_and_promises_nothing() -> None:
    assert len(CAUTION_LINE) <= 80
    lines = CAUTION_TEXT.splitlines()
    assert 6 <= len(lines) <= 8
    assert all(len(line) <= 80 for line in lines)
    assert "safe" not in (CAUTION_LINE + CAUTION_TEXT).lower()
