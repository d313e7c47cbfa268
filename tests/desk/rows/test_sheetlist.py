"""The cues of the Sheet, one row each."""

from __future__ import annotations

from itertools import combinations

import pytest
from desk.conftest import SNAPSHOT

from beamctl.desk.format import Row
from beamctl.desk.rows.cues import MARKS
from beamctl.desk.rows.sheetlist import Signs, kept_in, list_row, list_rows, no_cue_rows
from beamctl.show.sheet import Cue

CUES = tuple(Cue(ref=str(n), title=f"cue {n}") for n in range(1, 2001))
PLAIN = Signs(at=0)


def text_of(row: Row) -> str:
    return "".join(span.text for span in row)


def line(cue: Cue, signs: Signs = PLAIN, at: bool = False, width: int = 60, **seen) -> str:
    fields = {name: getattr(SNAPSHOT, name) for name in SNAPSHOT.__slots__} | seen
    return text_of(list_row(cue, type(SNAPSHOT)(**fields), signs, at, width))


def test_a_row_says_all_there_is_to_say() -> None:
    cue = Cue(ref="12.5", title="whisper crosses row B", then="13", then_at_s=9.0)
    signs = Signs(0, lifted={"12.5"}, edited={"12.5"}, in_words=True)
    text = line(cue, signs, at=True)
    assert text.startswith(">^[=] 12.5   whisper crosses row B  ")
    assert text.endswith("  then 13  edited")
    assert len(text) == 60


def test_in_write_an_edited_cue_has_a_mark_only() -> None:
    cue = Cue(ref="14", title="coins")
    assert line(cue, Signs(0, edited={"14"})).endswith(" *")
    assert line(cue).rstrip().endswith("coins")


def test_the_cursor_and_every_state_are_read_without_colour() -> None:
    cue = Cue(ref="14", title="coins")
    assert line(cue, at=True)[0] == ">"
    assert line(cue)[0] == " "
    texts = {
        state: line(cue, standby="14" if state == "standing by" else "", states={"14": state})
        for state in MARKS
    }
    for one, other in combinations(texts, 2):
        assert texts[one] != texts[other]


@pytest.mark.parametrize("width", [0, 5, 20])
def test_a_narrow_row_keeps_its_width(width: int) -> None:
    cue = Cue(ref="12.25.75AB", title="t" * 99, then="13", then_at_s=1.0)
    assert len(line(cue, Signs(0, edited={cue.ref}), width=width)) <= width


def test_only_the_rows_that_show_are_made() -> None:
    rows = list_rows(CUES, SNAPSHOT, Signs(1500), 1490, 60, 20)
    assert len(rows) == 20
    assert text_of(rows[10]).startswith("> [ ] 1501")
    short = list_rows(CUES[:3], SNAPSHOT, PLAIN, 0, 60, 5)
    assert [bool(row) for row in short] == [True, True, True, False, False]
    assert list_rows(CUES, SNAPSHOT, PLAIN, 0, 60, 0) == []


@pytest.mark.parametrize(
    ("top", "first", "last", "height", "now"),
    [
        (0, 4, 6, 10, 0),  # in already
        (0, 11, 13, 10, 4),  # below
        (20, 4, 6, 10, 4),  # above
        (0, 7, 30, 10, 7),  # too much to show: its beginning
        (5, 0, 0, 10, 0),
        (0, -1, -1, 10, 0),
    ],
)
def test_a_window_moves_as_little_as_it_must(top, first, last, height, now) -> None:
    assert kept_in(top, first, last, height) == now


def test_an_empty_sheet_says_what_to_do() -> None:
    assert text_of(no_cue_rows(60, "c")[0]).strip() == "no cue yet: c writes the first"
