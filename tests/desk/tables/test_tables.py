"""Tables of the show's files as a screen lists them, and the cursor among them."""

from __future__ import annotations

from dataclasses import replace

import pytest
from desk.conftest import NIGHT_TRAM

from beamctl.desk.tables.place import TablePlace
from beamctl.desk.tables.tables import (
    Line,
    Table,
    cap_tables,
    change,
    house_tables,
    rig_tables,
    wire_tables,
)
from beamctl.show.edits import Edit, Set
from beamctl.show.rig import Hexagon

HOUSE = house_tables(NIGHT_TRAM)
TITLES = [
    *("air", "spot conductor", "spot buffer", "block benches", "block footplate"),
    "surface back_wall",
]


def line_of(table: Table, key: str) -> Line:
    return next(line for line in table.lines if line.key == key)


def test_every_table_of_the_house_is_listed_with_its_place() -> None:
    assert [table.title for table in HOUSE] == TITLES
    benches = HOUSE[3]
    assert (benches.file, benches.place, benches.named) == (
        "house.toml",
        ("block", "benches"),
        True,
    )
    assert line_of(benches, "class").now == "seats"
    assert not HOUSE[0].named


def test_the_panels_come_first_and_then_what_holds_for_all_of_them() -> None:
    prow, lantern, rates = rig_tables(NIGHT_TRAM)
    assert (prow.title, lantern.title, rates.place) == ("panel prow", "panel lantern", ())
    assert not line_of(prow, "roll_deg").given
    assert line_of(rates, "rate_hz").now == 192_000


def test_caps_pick_their_tables_of_exposure_from_those_there_are() -> None:
    (caps,) = cap_tables(NIGHT_TRAM)
    assert "irpa-1984-public" in line_of(caps, "seats_table").choices
    assert "signed" not in [line.key for line in caps.lines]


def test_the_wire_lists_who_may_speak() -> None:
    settings, allow = wire_tables(NIGHT_TRAM)
    assert line_of(settings, "listen").now == "127.0.0.1:61740"
    assert [(line.key, line.now) for line in allow.lines] == [
        ("127.0.0.1", ("read", "trigger", "aim", "hush"))
    ]
    change_of = change(allow, allow.lines[0], None)
    assert change_of.steps == (Set("wire.toml", ("allow",), "127.0.0.1", None),)


def test_a_change_says_in_words_what_it_does() -> None:
    edit = change(HOUSE[3], line_of(HOUSE[3], "seats"), 12)
    assert edit == Edit(
        "block benches seats 12", (Set("house.toml", ("block", "benches"), "seats", 12),)
    )


def test_another_shape_of_a_panel_takes_the_place_of_the_one_it_had() -> None:
    prow = rig_tables(NIGHT_TRAM)[0]
    place = ("panel", "prow")
    hexagon = {"rings": 3, "pitch_mm": 10.0}
    assert change(prow, line_of(prow, "hex"), hexagon) == Edit(
        "panel prow hex 3 rings, 10 mm",
        (Set("rig.toml", place, "hex", hexagon), Set("rig.toml", place, "grid", None)),
    )
    assert len(change(prow, line_of(prow, "grid"), {"columns": 4}).steps) == 1
    bare = replace(line_of(prow, "hex"), now=Hexagon(rings=3, pitch_mm=10.0))
    assert change(prow, bare, None).steps == (Set("rig.toml", place, "hex", None),)


# -- the cursor --------------------------------------------------------------------------------


def test_the_cursor_walks_tables_then_lines_and_stops_at_both_ends() -> None:
    place = TablePlace().within(HOUSE)
    assert place.moved(-1, HOUSE).at == 0
    assert place.moved(2, HOUSE).table(HOUSE).title == "spot buffer"
    assert place.moved(99, HOUSE).title == "surface back_wall"
    inside = place.moved(3, HOUSE).inside(HOUSE)
    assert inside.field(HOUSE) == HOUSE[3].lines[0]
    assert inside.moved(99, HOUSE).field(HOUSE) == HOUSE[3].lines[-1]
    assert inside.moved(-1, HOUSE).line == 0
    assert inside.outside(HOUSE).field(HOUSE) is None


def test_the_cursor_keeps_to_its_table_and_waits_for_one_that_is_to_come() -> None:
    place = TablePlace(3, "block benches", 2)
    assert place.within(HOUSE[2:]).at == 1
    assert place.within(HOUSE[4:]).at == 1  # gone: the nearest that is left
    coming = TablePlace(0, "spot fresh")
    assert coming.within(HOUSE).within((*HOUSE, replace(HOUSE[1], title="spot fresh"))).at == 6


@pytest.mark.parametrize("line", [None, 0, 9])
def test_a_table_alone_has_its_cursor_on_a_line_and_an_empty_one_on_none(line: int | None) -> None:
    (caps,) = cap_tables(NIGHT_TRAM)
    assert TablePlace(0, "caps", line).within((caps,)).line == min(line or 0, len(caps.lines) - 1)
    assert TablePlace(0, "caps", line).within((replace(caps, lines=()),)).line is None
