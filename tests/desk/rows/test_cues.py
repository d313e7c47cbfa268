"""The sheet as rows."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from itertools import combinations

import pytest

from beamctl.desk.format import View, length
from beamctl.desk.rows.cues import MARKS, cue_row, sheet_rows, shown
from beamctl.snapshot import CueText, SheetView

Make = Callable[..., View]
MANY = SheetView(1, "Long", tuple(CueText(str(n), f"cue {n}") for n in range(1, 501)))


def line(view: View, ref: str, width: int = 80) -> str:
    cue = next(cue for cue in view.sheet.cues if cue.ref == ref)
    return "".join(span.text for span in cue_row(cue, view.snapshot, width))


@pytest.mark.parametrize(
    ("ref", "mark", "words"),
    [
        ("11", "[~] 11 ", "tailing, 2.1 left"),
        ("12", "[#] 12 ", "running, 1:14 left"),
        ("12.5", "[=] 12.5 ", "stand by, then 13"),
        ("13", "[!] 13 ", "barred, follows in 3.2"),
        ("14", "[ ] 14 ", "aisle"),
    ],
)
def test_rows(view: Make, ref: str, mark: str, words: str) -> None:
    text = line(view(), ref)
    assert text.startswith(mark)
    assert text.rstrip().endswith(words)


def test_every_state_differs_in_mark_and_word_without_colour(view: Make) -> None:
    texts = {}
    for state in MARKS:
        stands = state == "standing by"
        seen = view(standby="14" if stands else "", states={"14": state}, left_s={}, follow={})
        texts[state] = line(seen, "14")
    for a, b in combinations(texts, 2):
        assert texts[a][:3] != texts[b][:3], (a, b)
        assert texts[a][4:] != texts[b][4:], (a, b)


def test_a_cue_may_run_and_stand_by(view: Make) -> None:
    text = line(view(standby="12"), "12")
    assert text.startswith("[=]")
    assert text.endswith("stand by, running, 1:14 left")


def test_a_barred_cue_that_stands_by_keeps_its_mark(view: Make) -> None:
    text = line(view(standby="13", follow={}), "13")
    assert text.startswith("[!]")
    assert text.endswith("stand by, barred")


def test_an_unheard_of_state_is_shown_not_hidden(view: Make) -> None:
    text = line(view(states={"14": "frozen"}), "14")
    assert text.startswith("[?]")
    assert text.endswith("frozen")


def test_no_time_is_made_up(view: Make) -> None:
    assert line(view(left_s={}), "12").endswith(" running")


def test_a_long_title_gives_way_to_the_state(view: Make) -> None:
    base = view()
    cue = CueText("12", "t" * 200)
    row = "".join(span.text for span in cue_row(cue, base.snapshot, 60))
    assert len(row) == 60
    assert row.endswith("..  running, 1:14 left")


@pytest.mark.parametrize("height", [0, 1, 2, 5, 6, 9, 30])
@pytest.mark.parametrize("width", [10, 80, 120])
def test_size_is_kept(view: Make, width: int, height: int) -> None:
    rows = sheet_rows(view(), width, height)
    assert len(rows) == height
    assert all(length(row) <= width for row in rows)


def test_heading(view: Make) -> None:
    heading = "".join(span.text for span in sheet_rows(view(), 80, 6)[0])
    assert heading.startswith("Night Tram")
    assert heading.endswith("cue 3 of 8, running 11 12")


def test_the_note_follows_the_cue_standing_by(view: Make) -> None:
    texts = ["".join(span.text for span in row) for row in sheet_rows(view(), 80, 12)]
    at = next(n for n, text in enumerate(texts) if text.startswith("[=]"))
    assert texts[at + 1].strip() == "on the word 'terminus'"


@pytest.mark.parametrize("standby", ["1", "2", "250", "499", "500"])
@pytest.mark.parametrize("rows", [1, 2, 5, 20])
def test_the_cue_standing_by_and_the_next_are_in_view(view: Make, standby: str, rows: int) -> None:
    seen = shown(view({"sheet": MANY}, standby=standby, states={}), rows)
    assert len(seen) == rows
    assert int(standby) - 1 in seen
    assert rows < 5 or standby == "500" or int(standby) in seen


def test_sounding_cues_far_away_come_into_view(view: Make) -> None:
    states = {"3": "running", "480": "tailing"}
    seen = shown(view({"sheet": MANY}, standby="250", states=states), 6)
    assert seen == sorted(seen)
    assert len(seen) == 6
    assert {2, 479, 249, 250} <= set(seen)


def test_many_sounding_cues_leave_half_of_the_window(view: Make) -> None:
    states = {str(n): "running" for n in range(1, 100)}
    seen = shown(view({"sheet": MANY}, standby="250", states=states), 10)
    assert len(seen) == 10
    assert sum(index >= 240 for index in seen) >= 5


def test_no_cues_and_no_standby(view: Make) -> None:
    empty = replace(MANY, cues=())
    assert len(sheet_rows(view({"sheet": empty}, standby=""), 80, 5)) == 5
    assert shown(view({"sheet": MANY}, standby="", newest="", states={}), 4) == [0, 1, 2, 3]


WHY = (
    "over its cap at stalls B4 by 3.2 dB (40 kHz band, 103.2 against 100) 4.2 s after GO; bell at "
)
WHY += "trim -25.2 dB fits"


@pytest.mark.parametrize("height", [5, 8, 20])
def test_why_a_cue_is_barred_stands_in_full_below_it_while_it_stands_by(
    view: Make, height: int
) -> None:
    rows = sheet_rows(view(standby="13", barred={"13": WHY}), 80, height)
    texts = ["".join(span.text for span in row) for row in rows]
    at = next(n for n, text in enumerate(texts) if text.startswith("[!] 13"))
    assert " ".join(" ".join(texts[at + 1 : at + 3]).split()) == WHY
    assert len(rows) == height


def test_why_other_cues_are_barred_stands_below_them_where_there_is_room(view: Make) -> None:
    seen = view(barred={"13": "short why"})
    roomy = ["".join(span.text for span in row).strip() for row in sheet_rows(seen, 80, 14)]
    assert roomy[roomy.index("short why") - 1].startswith("[!] 13")
    tight = ["".join(span.text for span in row).strip() for row in sheet_rows(seen, 80, 5)]
    assert "short why" not in tight
    running = view(states={"13": "running"}, barred={"13": "short why"})
    assert "short why" not in str(sheet_rows(running, 80, 14))
