"""Panels from CSV files."""

from __future__ import annotations

import numpy as np
import pytest

from beamctl.acoustics.cells import CellMap, Loom
from beamctl.files.panel_csv import COLUMNS, read_cells
from beamctl.files.problems import Problem

HEADER = ",".join(COLUMNS)
PAIR = ["0,0,1,1,0,0,0", "10,0,2,-1,-1.5,30,1"]


def read(lines: list[str], wiring: Loom | None = None) -> tuple[CellMap | None, list[str]]:
    found: list[Problem] = []
    cells = read_cells("p.csv", "\n".join(lines), wiring, found.append)
    return cells, [str(problem) for problem in found]


def test_every_column_reaches_the_cell_map() -> None:
    cells, problems = read([HEADER, *PAIR])
    assert problems == []
    assert cells is not None
    np.testing.assert_allclose(cells.at_m, [[0, 0, 0], [0.01, 0, 0]])
    assert cells.feed.tolist() == [0, 1]
    assert cells.polarity.tolist() == [1, -1]
    assert cells.trim_db.tolist() == [0, -1.5]
    assert cells.phase_deg.tolist() == [0, 30]
    assert cells.dead.tolist() == [False, True]


def test_columns_may_stand_in_any_order_and_rows_apart() -> None:
    turned = [",".join(reversed(line.split(","))) for line in (HEADER, *PAIR)]
    cells, problems = read([turned[0], "", *turned[1:], ""])
    straight, _ = read([HEADER, *PAIR])
    assert problems == []
    assert cells is not None and straight is not None
    for one, other in zip(cells, straight, strict=True):
        np.testing.assert_array_equal(one, other)


def test_a_loom_of_the_rig_overrides_the_feeds_of_the_file() -> None:
    lines = [f"{x},{z},1,1,0,0,0" for z in (5, -5) for x in (-5, 5)]
    feeds = {}
    for wiring in ("each", "columns", "rows", None):
        cells, problems = read([HEADER, *lines], wiring)  # type: ignore[arg-type]
        assert problems == []
        assert cells is not None
        feeds[wiring] = cells.feed.tolist()
    assert feeds == {
        "each": [0, 1, 2, 3],
        "columns": [0, 1, 0, 1],
        "rows": [0, 0, 1, 1],
        None: [0, 0, 0, 0],
    }


BAD = [
    ("nan,0,1,1,0,0,0", 'p.csv:3 x_mm: "nan", expected a number from -10000 to 10000'),
    ("1,inf,1,1,0,0,0", 'p.csv:3 z_mm: "inf", expected a number'),
    ("1,two,1,1,0,0,0", 'p.csv:3 z_mm: "two", expected a number'),
    ("1,0,1.5,1,0,0,0", 'p.csv:3 feed: "1.5", expected a whole number from 1'),
    ("1,0,0,1,0,0,0", 'p.csv:3 feed: "0", expected a whole number from 1'),
    ("1,0,3,1,0,0,0", "p.csv:3 feed: 3, but no cell is on feed 2"),
    ("1,0,2,0,0,0,0", 'p.csv:3 polarity: "0", expected 1 or -1'),
    ("1,0,2,1,0.5,0,0", 'p.csv:3 trim_db: "0.5", expected a number from -90 to 0, in decibels'),
    ("1,0,2,1,0,0,yes", 'p.csv:3 dead: "yes", expected 0 or 1'),
    ("0.01,0,2,1,0,0,0", "p.csv:3 x_mm, z_mm: the place of the cell in line 2"),
    ("1,0,1,-1,0,0,0", "p.csv:3 polarity: -1, expected 1 as in line 2 on the same feed 1"),
    ("1,0,1,1,-2,0,0", "p.csv:3 trim_db: -2, expected 0 as in line 2 on the same feed 1"),
    ("1,0,1,1,0,9,0", "p.csv:3 phase_deg: 9, expected 0 as in line 2 on the same feed 1"),
    ("1,0,2,1,0,0", "p.csv:3: 6 values, expected 7"),
    ('1,0,2,1,0,0,"0', "p.csv:3: not CSV: unexpected end of data"),
]


@pytest.mark.parametrize(("line", "start"), BAD)
def test_a_bad_cell_is_told_with_its_line(line: str, start: str) -> None:
    cells, problems = read([HEADER, PAIR[0], line])
    assert cells is None
    assert len(problems) == 1
    assert problems[0].startswith(start)


@pytest.mark.parametrize(
    ("header", "part"),
    [
        ("x_mm,z_mm", "missing feed, polarity, trim_db, phase_deg, dead"),
        (HEADER + ",gain", 'unknown or repeated "gain"'),
        (HEADER.replace("z_mm", "x_mm"), 'missing z_mm; unknown or repeated "x_mm"'),
        (HEADER.replace(",", ";"), "missing x_mm"),
    ],
)
def test_a_wrong_first_line_is_one_message(header: str, part: str) -> None:
    _, problems = read([header, *PAIR])
    assert len(problems) == 1
    assert problems[0].startswith("p.csv:1: columns: ")
    assert part in problems[0]


@pytest.mark.parametrize("lines", [[], ["0,0,1,1,0,0,1"]])
def test_a_panel_needs_a_cell_that_sounds(lines: list[str]) -> None:
    _, problems = read([HEADER, *lines])
    assert problems == ["p.csv:1: no cell that sounds, expected one or more with dead = 0"]


def test_too_many_cells_are_refused() -> None:
    _, problems = read([HEADER, *(f"{i % 90},{i // 90},1,1,0,0,0" for i in range(4097))])
    assert problems == ["p.csv:4098: more than 4096 cells"]
