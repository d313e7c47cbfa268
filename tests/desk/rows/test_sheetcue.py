"""One cue in full."""

from __future__ import annotations

from dataclasses import replace

from desk.conftest import NIGHT_TRAM

from beamctl.desk.format import length
from beamctl.desk.rows.sheetcue import Found, cue_lines, top_of
from beamctl.desk.sheet.place import ACT_FIELDS, CUE_FIELDS, Place
from beamctl.show.sheet import Cue
from beamctl.snapshot import CueLevel

WALKS = NIGHT_TRAM.sheet.cue[2]
LONG = Cue(ref="9", title="long", note="on the word " * 30)
READ, NONE = Place(), Found()
LEVEL = CueLevel("3", "stalls B4", 40_000.0, 103.2, 100.0, 4.2, "whisper", -30.2)


def told(cue: Cue, place: Place = READ, found: Found = NONE, lifted=()) -> list[str]:
    lines = cue_lines(cue, place, found, lifted, 76)
    return ["".join(span.text for span in line.row).rstrip() for line in lines]


def test_a_cue_is_told_in_full() -> None:
    assert told(WALKS) == [
        "  ref       3",
        "  title     the whisper walks along row A",
        "  note      --",
        "  then      --",
        "  guard     nothing is found yet, or nothing sounds",
        "",
        "  at 0.0 s whisper plays whisper.flac at seat A1, -27.0 dB, rises in 0.1 s",
        "  at 0.4 s whisper goes to seat A8 in 4.0 s",
    ]


def test_a_cue_without_acts_says_so() -> None:
    assert told(LONG)[-1].strip() == "no act yet: New act begins one"


def test_the_act_under_the_cursor_is_opened_into_its_fields() -> None:
    rows = told(WALKS, Place(2).at_act(1))
    first = rows.index("> at 0.4 s whisper goes to seat A8 in 4.0 s")
    fields = rows[first + 1 :]
    assert [row.split()[0] for row in fields] == list(ACT_FIELDS)
    assert fields[0] == "    at_s      0.4             a number from 0 to 86400, in seconds"
    assert fields[2] == "    sound     --              a sound file of the show"
    assert fields[4].startswith("    target    seat A8         seat B4, spot NAME")


def test_the_cursor_is_read_without_colour_on_every_stop() -> None:
    stops = [Place(2, line) for line in range(len(CUE_FIELDS) + len(WALKS.act))]
    stops += [Place(2).at_act(1, key) for key in ACT_FIELDS]
    for place in stops:
        marked = [row for row in told(WALKS, place) if row.lstrip().startswith(">")]
        assert len(marked) == 1, place
        assert place.key in marked[0]


def test_the_guard_says_what_is_left_and_a_barred_cue_why_and_what_fits() -> None:
    left = told(WALKS, found=Found(replace(LEVEL, level_db=96.2)))
    assert left[4].startswith("  guard     3.8 dB left at stalls B4: 96.2 of 100 dB")
    why = "over its cap at stalls B4 by 3.2 dB; whisper at trim -30.2 dB fits"
    over = told(WALKS, found=Found(LEVEL, why))
    assert over[4].startswith("  barred    over its cap at stalls B4 by 3.2 dB")
    looked = told(WALKS, found=Found(replace(LEVEL, level_db=96.2), "being looked at"))
    assert [row[2:8] for row in looked[4:7]] == ["guard ", "      ", "barred"]


def test_remarks_of_the_reader_stand_with_the_cue() -> None:
    rows = told(WALKS, found=Found(remarks=("act 1 seat: 40 degrees of steering",)))
    assert rows[5] == "  remark    act 1 seat: 40 degrees of steering"


def test_lifted_acts_are_marked() -> None:
    assert told(WALKS, lifted={1})[-1].startswith(" ^at 0.4 s")


def test_a_long_note_is_wrapped_and_nothing_is_too_wide() -> None:
    for width in (20, 44, 76):
        lines = cue_lines(LONG, Place(0, 2), Found(LEVEL, "x " * 90), (), width)
        assert all(length(line.row) <= width for line in lines)
        note = [line for line in lines if line.line == CUE_FIELDS.index("note")]
        assert len(note) > 3
    said = " ".join("".join(span.text for span in line.row[1:]) for line in note)
    assert said.split() == LONG.note.split()


def test_clicks_lead_back_to_the_cursor_that_drew_them() -> None:
    lines = cue_lines(WALKS, Place(2).at_act(0), Found(), (), 76)
    fields = {(line.line, line.field) for line in lines if line.field is not None}
    assert fields == {(len(CUE_FIELDS), n) for n in range(len(ACT_FIELDS))}
    assert {line.line for line in lines} == {None, *range(len(CUE_FIELDS) + 2)}


def test_the_window_keeps_in_what_the_cursor_is_on() -> None:
    def top(place: Place, before: int, height: int) -> int:
        return top_of(cue_lines(WALKS, place, Found(), (), 76), place, before, height)

    act = Place(2).at_act(1)
    assert top(Place(2), 9, 5) == 0
    assert top(act, 0, 30) == 0
    assert top(act, 0, 16) == 4  # its sentence and all of its fields, to the last row
    assert top(act, 0, 8) == 6  # the row above, its sentence, as many fields as fit
    field = Place(2).at_act(1, "depth")  # row 16, its sentence is row 7
    assert top(field, 0, 12) == 6
    assert top(field, 9, 12) == 7
    assert top(field, 0, 5) == 13
    assert top(field, 19, 30) == 0  # nothing is left blank below
