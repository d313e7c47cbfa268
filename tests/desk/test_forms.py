"""Fields of the show's tables, as they are read to a person and typed by one."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest
from pydantic import BaseModel

from beamctl.desk.box import Box
from beamctl.desk.forms import (
    UNSET,
    field_box,
    field_of,
    fields,
    is_written,
    read,
    value_of,
    written,
)
from beamctl.show.house import AirSpec, Block, House, Spot, Surface
from beamctl.show.limits import Guard, Wire
from beamctl.show.rig import Grid, Hexagon, PanelSpec, Rig
from beamctl.show.sheet import Act, BeamSpec, Cue

ALL = (Act, AirSpec, BeamSpec, Block, Cue, Guard, House, PanelSpec, Rig, Spot, Surface, Wire)

PANEL = PanelSpec(
    at_m=(0.0, 0.0, 3.0),
    grid=Grid(columns=8, rows=8, pitch_mm=10.0),
    volts_at_full_scale=5.0,
    max_volts=7.0,
    level_db_30cm_10v=115.0,
    cell_mm=9.0,
    resonance_hz=40_000.0,
    q=20.0,
)
STALLS = Block(
    **{"class": "seats"},
    first_m=(0.0, 4.0, 1.2),
    rows=("A", "Row B"),
    row_step_m=(0.0, 0.9, 0.1),
    seats=6,
    seat_step_m=(0.55, 0.0, 0.0),
)


def test_a_field_says_what_it_expects_what_may_be_picked_and_whether_it_may_go() -> None:
    depth, law, reach = (field_of(Act, key) for key in ("depth", "law", "reach"))
    assert (depth.expects, depth.choices, depth.optional) == ("a number from 0 to 1", (), True)
    assert (law.expects, law.closed) == ("dsb, root, ssb or mam", True)
    assert (reach.choices, reach.closed) == (("far", "aim"), False)
    assert field_of(Act, "loop").choices == ("true", "false")
    assert not field_of(Act, "beam").optional
    assert field_of(Spot, "at_m").expects == "x across, y from the stage, z up, in metres"
    assert field_of(PanelSpec, "grid").expects == "3 numbers: columns, rows, pitch_mm"
    assert field_of(PanelSpec, "roll_deg").default == 0.0


def test_tables_within_a_table_are_no_fields_of_it() -> None:
    assert [field.key for field in fields(Rig)] == ["rate_hz", "quantum", "ring_ms"]
    assert fields(House) == ()
    assert next(field.key for field in fields(Block)) == "class"
    assert "allow" not in [field.key for field in fields(Wire)]
    assert "signed" not in [field.key for field in fields(Guard)]
    assert "act" not in [field.key for field in fields(Cue)]


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (0.7, "0.7"),
        (101.325, "101.325"),
        (192_000, "192000"),
        ((0.0, -1.925, 3.0), "0 -1.925 3"),
        (("A", "B", "C"), "A B C"),
        (("A", "Row B"), "A, Row B"),
        (Grid(columns=8, rows=8, pitch_mm=10.0), "8 columns, 8 rows, 10 mm"),
        ({"rings": 3, "pitch_mm": 10.0}, "3 rings, 10 mm"),
        (Hexagon(rings=3, pitch_mm=16.5), "3 rings, 16.5 mm"),
        (True, "true"),
        ("ssb", "ssb"),
        (None, UNSET),
        ("", UNSET),
    ],
)
def test_values_are_written_as_a_person_types_them(value: Any, text: str) -> None:
    assert written(value) == text


@pytest.mark.parametrize(
    ("model", "key", "text", "value"),
    [
        (Act, "depth", "0.7", 0.7),
        (Act, "at_s", "3", 3.0),
        (Act, "reach", "aim", "aim"),
        (Act, "reach", "6.6", 6.6),
        (Act, "loop", "false", False),
        (Act, "seat", "12", "12"),
        (Act, "law", "", None),
        (Act, "law", UNSET, None),
        (Cue, "title", "no, not 12", "no, not 12"),
        (Cue, "ref", "12A", "12A"),
        (Spot, "at_m", "0, 0,3", [0.0, 0.0, 3.0]),
        (Block, "class", "crew", "crew"),
        (Block, "rows", "1 2", ["1", "2"]),
        (Block, "rows", "3", ["3"]),
        (Block, "rows", "A, Row B", ["A", "Row B"]),
        (PanelSpec, "grid", "8x8 10", {"columns": 8, "rows": 8, "pitch_mm": 10.0}),
        (PanelSpec, "hex", "3 rings, 16.5 mm", {"rings": 3, "pitch_mm": 16.5}),
    ],
)
def test_what_is_typed_is_read(model: type[BaseModel], key: str, text: str, value: Any) -> None:
    assert read(model, key, text) == value
    assert type(read(model, key, text)) is type(value)


@pytest.mark.parametrize(
    ("model", "key", "text", "said"),
    [
        (Act, "depth", "1.2", "1.2: expected a number from 0 to 1"),
        (Act, "depth", "nan", "nan: expected a number from 0 to 1"),
        (Act, "reach", "-6", "-6: expected a number above 0 or far or aim"),
        (Block, "seats", "8.5", "8.5: expected a whole number from 1 to 500"),
        (Block, "class", "sofa", "sofa: expected seats or crew"),
        (Spot, "at_m", "0 0", "0 0: expected x across, y from the stage, z up, in metres"),
        (
            Spot,
            "at_m",
            "",
            "it cannot be left out: expected x across, y from the stage, z up, in metres",
        ),
        (PanelSpec, "grid", "8 8", "8 8: expected 3 numbers: columns, rows, pitch_mm"),
        (Wire, "listen", "here", 'here: expected "ADDRESS:PORT" with a port from 1 to 65535'),
        (Cue, "ref", "x", 'x: expected a cue reference such as "12", "12.5" or "12A"'),
    ],
)
def test_what_will_not_do_is_said_in_one_line(
    model: type[BaseModel], key: str, text: str, said: str
) -> None:
    with pytest.raises(ValueError) as failure:
        read(model, key, text)
    assert str(failure.value) == said


@pytest.mark.parametrize("table", [PANEL, STALLS, AirSpec(), Guard(format=1), Wire(format=1)])
def test_what_is_written_reads_back_as_the_same(table: BaseModel) -> None:
    plain = table.model_dump(mode="json", by_alias=True)
    for field in fields(type(table)):
        text = written(value_of(table, field.key))
        if text != UNSET:
            assert read(type(table), field.key, text) == plain[field.key]


def test_a_value_that_holds_by_default_is_told_from_one_that_is_written() -> None:
    assert value_of(PANEL, "roll_deg") == 0.0
    assert not is_written(PANEL, "roll_deg")
    assert is_written(PANEL, "q")
    assert is_written(STALLS, "class")


# -- boxes -------------------------------------------------------------------------------------


class Took(list[Any]):
    """Remembers what it was given; refuses it with `why`."""

    why = ""

    def __call__(self, value: Any) -> str:
        self.append(value)
        return self.why


def typed(box: Box, text: str) -> str:
    """What becomes of `text`, typed into an empty box."""
    box = box.emptied()
    for sign in text:
        box = box.with_sign(sign)
    assert box.use is not None
    return box.use(box.chosen)


def test_a_box_gives_away_what_was_read_and_says_why_it_will_not_do() -> None:
    took = Took()
    box = field_box("DEPTH", field_of(Act, "depth"), 0.7, took)
    assert "Now 0.7." in box.text
    assert typed(box, "0.5") == ""
    assert typed(box, "2") == "2: expected a number from 0 to 1"
    assert typed(box, UNSET) == ""
    took.why = "busy: hush first"
    assert typed(box, "0.6") == "busy: hush first"
    assert took == [0.5, None, 0.6]


@pytest.mark.parametrize(
    ("key", "now"), [("depth", 0.7), ("law", "ssb"), ("law", None), ("point_m", (0.0, 0.0, 3.0))]
)
def test_enter_on_an_untouched_box_changes_nothing(key: str, now: Any) -> None:
    took = Took()
    box = field_box("ONE FIELD", field_of(Act, key), now, took)
    assert box.use is not None
    assert box.use(box.chosen) == ""
    assert took == []


def test_a_text_stands_there_to_be_reworked_and_emptied_it_goes() -> None:
    took = Took()
    box = field_box("NOTE", field_of(Cue, "note"), "after the laugh", took)
    assert box.typed == "after the laugh"
    assert typed(box, "") == ""
    assert took == [None]


def test_names_are_picked_and_nothing_else_is_taken() -> None:
    took = Took()
    box = field_box("SEAT", field_of(Act, "seat"), "B4", took, ("A1", "B4", "B40"))
    assert (box.picked, box.strict, box.choices[-1]) == (1, True, UNSET)
    assert typed(box, "B40") == ""
    assert typed(box, "zz") == "Nothing matches."
    assert typed(replace(box, choices=("A1",)), "a") == ""
    assert took == ["B40", "A1"]


def test_a_word_that_may_stand_beside_a_number_may_be_picked_or_typed() -> None:
    took = Took()
    box = field_box("REACH", field_of(Act, "reach"), 6.6, took)
    assert typed(box, "aim") == ""
    assert typed(box, "4") == ""
    assert took == ["aim", 4.0]
