"""Tables and their fields in rows."""

from __future__ import annotations

import pytest
from desk.conftest import NIGHT_TRAM
from hypothesis import given
from hypothesis import strategies as st

from beamctl.desk.format import Row, length
from beamctl.desk.rows.tables import (
    SMALLEST_PICTURE,
    field_at,
    field_rows,
    list_rows,
    shares,
    table_at,
    top,
)
from beamctl.desk.tables.tables import cap_tables, house_tables, rig_tables, wire_tables

HOUSE, RIG = house_tables(NIGHT_TRAM), rig_tables(NIGHT_TRAM)
CAPS, WIRE = cap_tables(NIGHT_TRAM), wire_tables(NIGHT_TRAM)


def lines_of(rows: list[Row]) -> list[str]:
    return ["".join(span.text for span in row).rstrip() for row in rows]


@given(
    tables=st.sampled_from([HOUSE, RIG, CAPS, WIRE]),
    width=st.integers(0, 220),
    height=st.integers(0, 60),
    at=st.integers(0, 5),
    line=st.none() | st.integers(0, 16),
    pictured=st.booleans(),
)
def test_everything_fits_any_room(tables, width, height, at, line, pictured) -> None:
    at = min(at, len(tables) - 1)
    line = None if line is None else min(line, len(tables[at].lines) - 1)
    cells = shares(tables, width, line is not None, pictured)
    listed = list_rows(tables, at, cells.tables, height)
    fields = field_rows(tables[at], line, cells.fields, height)
    assert len(listed) == len(fields) == height
    joined = cells.joined(listed, fields, [], width)
    assert len(joined) <= height
    assert all(length(row) <= width for row in joined)


@pytest.mark.parametrize("tables", [HOUSE, RIG, CAPS])
def test_all_three_stand_side_by_side_where_there_is_room(tables) -> None:
    cells = shares(tables, 120, False, True)
    assert cells.picture >= SMALLEST_PICTURE
    assert cells.fields
    assert bool(cells.tables) == (len(tables) > 1)


def test_in_little_room_picture_and_fields_take_turns() -> None:
    assert shares(RIG, 80, False, True).fields == 0
    assert shares(RIG, 80, True, True).picture == 0
    assert shares(WIRE, 80, False, False).fields > 60
    assert shares(CAPS, 80, True, True).picture >= SMALLEST_PICTURE


def test_a_field_tells_what_stands_there_and_what_it_wants_where_the_cursor_is() -> None:
    rows = lines_of(field_rows(RIG[0], 3, 70, 24))
    assert rows[0] == "panel prow  rig.toml"
    assert rows[1] == "  at_m                 0 0 3"
    assert rows[4] == "> roll_deg             0  by default"
    assert rows[6] == "  grid                 8 columns, 8 rows, 10 mm"
    assert rows[7] == "  hex                  --"
    assert "expects a number from -180 to 180, in degrees; may be left out" in rows
    assert not any("expects" in row for row in lines_of(field_rows(RIG[0], None, 60, 24)))


def test_names_to_pick_from_are_counted() -> None:
    assert "expects one of 16 names; may be left out" in lines_of(field_rows(CAPS[0], 0, 60, 24))


def test_an_empty_table_says_so() -> None:
    (_, allow) = wire_tables(NIGHT_TRAM)
    rows = lines_of(field_rows(type(allow)("allow", "wire.toml", ("allow",), ()), None, 40, 5))
    assert rows[1] == "  nothing yet"


def test_the_cursors_row_is_always_among_those_that_show() -> None:
    for at in range(17):
        rows = lines_of(field_rows(RIG[0], at, 60, 10))
        assert sum(row.startswith(">") for row in rows) == 1
    assert [top(at, 10, 4) for at in (0, 5, 9)] == [0, 3, 6]


def test_a_row_that_is_pointed_at_leads_to_its_table_or_line() -> None:
    for at in (0, 8, 16):
        rows = lines_of(field_rows(RIG[0], at, 60, 10))
        y = next(y for y, row in enumerate(rows) if row.startswith(">"))
        assert field_at(y, RIG[0], at, 60, 10) == at
    assert field_at(0, RIG[0], None, 60, 24) is None
    assert field_at(22, RIG[0], None, 60, 24) is None
    assert table_at(2, 0, len(HOUSE), 24) == 2
    assert table_at(20, 0, len(HOUSE), 24) == len(HOUSE) - 1


def test_a_click_falls_into_the_part_that_it_hit() -> None:
    cells = shares(HOUSE, 120, False, True)
    assert cells.part_at(0) == "tables"
    assert cells.part_at(cells.tables + 2) == "fields"
    assert cells.part_at(119) == "picture"
