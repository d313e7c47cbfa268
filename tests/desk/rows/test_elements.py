"""The cells of a panel as a map."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from beamctl.acoustics.cells import CellMap, cell_map, grid_positions, hex_positions, loom
from beamctl.desk.format import Row, length
from beamctl.desk.rows.elements import element_rows


def panel(columns: int, rows: int, kind: str = "each") -> CellMap:
    at_m = grid_positions(columns, rows, 0.01)
    return cell_map(at_m, loom(at_m, kind))


def texts(rows: list[Row]) -> list[str]:
    return ["".join(span.text for span in row).rstrip() for row in rows]


def test_cells_stand_as_they_are_counted_from_the_upper_left_from_behind() -> None:
    assert texts(element_rows(panel(3, 2), 9, 40, 10))[:2] == ["9  10 11", "12 13 14"]


def test_cells_on_one_feed_have_its_number() -> None:
    assert texts(element_rows(panel(3, 2, "columns"), 65, 40, 10))[:2] == ["65 66 67", "65 66 67"]
    assert texts(element_rows(panel(3, 2, "rows"), 1, 40, 10))[:2] == ["1 1 1", "2 2 2"]


def test_what_is_reversed_or_dead_is_marked_and_stands_out() -> None:
    cells = panel(3, 2)
    cells.polarity[1] = -1.0
    cells.dead[5] = True
    rows = element_rows(cells, 9, 40, 10)
    assert texts(rows)[:2] == ["9   10- 11", "12  13  14x"]
    assert [span for row in rows for span in row if span.role == "attention"] == [
        ("10-", "attention"),
        ("14x", "attention"),
    ]


def test_rings_lie_between_one_another() -> None:
    at_m = hex_positions(1, 0.01)
    rows = texts(element_rows(cell_map(at_m, loom(at_m, "each")), 1, 40, 10))[:3]
    assert rows == [" 1 2", "3 4 5", " 6 7"]


def test_many_cells_are_signs_and_rows_without_room_are_counted() -> None:
    rows = texts(element_rows(panel(32, 32), 1, 64, 8))
    assert rows[0] == "o " * 31 + "o"
    assert rows[-2] == "and 26 rows of cells more"
    assert rows[-1].startswith("o a cell")
    assert texts(element_rows(panel(64, 2), 1, 64, 8))[0] == "o" * 64


@given(
    columns=st.integers(1, 64),
    rows=st.integers(1, 64),
    width=st.integers(1, 100),
    height=st.integers(0, 70),
    seed=st.integers(0, 9),
)
def test_any_panel_fits_any_room(columns, rows, width, height, seed) -> None:
    cells = panel(columns, rows)
    rng = np.random.default_rng(seed)
    cells.dead[:] = rng.random(len(cells.dead)) < 0.1
    drawn = element_rows(cells, 1, width, height)
    assert len(drawn) <= height
    assert all(length(row) <= width for row in drawn)
