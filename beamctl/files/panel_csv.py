"""A panel's cells from a CSV file, as they were wired and measured.

The first line names the columns x_mm, z_mm, feed, polarity, trim_db, phase_deg and dead, in any
order; every other line is one cell. x is to the right and z up as seen from behind the panel, from
its centre. Feeds count from 1 within the panel. The feed column holds only with `loom = "csv"`;
the looms "each", "columns" and "rows" say themselves which cells share a feed.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Callable
from io import StringIO
from typing import NamedTuple

import numpy as np

from beamctl.acoustics.cells import CellMap, Loom, loom
from beamctl.files.problems import Problem, shown

MOST_CELLS = 4096  # as many as the largest grid
SAME_MM = 0.1  # cells that agree when rounded to this are one place written twice
Report = Callable[[int, str, str], None]  # line, key, what


class Cell(NamedTuple):
    """One line of the file; the columns are its fields after `line`."""

    line: int
    x_mm: float
    z_mm: float
    feed: float
    polarity: float
    trim_db: float
    phase_deg: float
    dead: float


COLUMNS = Cell._fields[1:]
SHARED = ("polarity", "trim_db", "phase_deg")  # one value for all cells of a feed
RULES: dict[str, tuple[Callable[[float], bool], str]] = {
    "x_mm": (lambda v: abs(v) <= 10_000, "a number from -10000 to 10000, in millimetres"),
    "z_mm": (lambda v: abs(v) <= 10_000, "a number from -10000 to 10000, in millimetres"),
    "feed": (lambda v: v % 1 == 0 and 1 <= v <= MOST_CELLS, "a whole number from 1"),
    "polarity": (lambda v: v in (1, -1), "1 or -1"),
    "trim_db": (lambda v: -90 <= v <= 0, "a number from -90 to 0, in decibels"),
    "phase_deg": (lambda v: abs(v) <= 360, "a number from -360 to 360, in degrees"),
    "dead": (lambda v: v in (0, 1), "0 or 1"),
}


def read_cells(
    file: str, text: str, wiring: Loom | None, report: Callable[[Problem], None]
) -> CellMap | None:
    """The cell map of a CSV text, or None when it has a problem.

    `wiring` is the rig's loom; None keeps the feed numbers of the file.
    """
    found: list[Problem] = []

    def tell(line: int, key: str, what: str) -> None:
        found.append(Problem(file, line, key, what))

    cells = _cells(text, tell)
    if not found:
        _check_places(cells, tell)
        if wiring is None:
            _check_gaps(cells, tell)
    if not found:
        cells = _wired(cells, wiring)
        _check_shared(cells, tell)
    for problem in found:
        report(problem)
    return None if found else _map(cells)


def _cells(text: str, tell: Report) -> list[Cell]:
    """The cells of all lines that can be read."""
    reader = csv.reader(StringIO(text, newline=""), strict=True)
    cells: list[Cell] = []
    try:
        names = [name.strip() for name in next(reader, [])]
        if sorted(names) != sorted(COLUMNS):
            tell(1, "", _header(names))
            return []
        for row in reader:
            if row and (cell := _cell(reader.line_num, names, row, tell)):
                cells.append(cell)
    except csv.Error as error:
        tell(reader.line_num, "", f"not CSV: {error}")
    if len(cells) > MOST_CELLS:
        tell(cells[MOST_CELLS].line, "", f"more than {MOST_CELLS} cells")
    elif all(cell.dead for cell in cells):
        tell(1, "", "no cell that sounds, expected one or more with dead = 0")
    return cells


def _header(names: list[str]) -> str:
    missing = [name for name in COLUMNS if name not in names]
    odd = [name for i, name in enumerate(names) if name not in COLUMNS or name in names[:i]]
    parts = [f"missing {', '.join(missing)}"] * bool(missing)
    parts += [f"unknown or repeated {', '.join(map(shown, odd[:7]))}"] * bool(odd)
    return f"columns: {'; '.join(parts)}; expected a first line {','.join(COLUMNS)}"


def _cell(line: int, names: list[str], row: list[str], tell: Report) -> Cell | None:
    if len(row) != len(names):
        tell(line, "", f"{len(row)} values, expected {len(names)}")
        return None
    values: dict[str, float] = {}
    for name, text in zip(names, row, strict=True):
        holds, wanted = RULES[name]
        value = _number(text)
        if math.isfinite(value) and holds(value):
            values[name] = value
        else:
            tell(line, name, f"{shown(text)}, expected {wanted}")
    return Cell(line, **values) if len(values) == len(names) else None


def _number(text: str) -> float:
    try:
        return float(text)
    except ValueError:
        return math.nan


def _check_places(cells: list[Cell], tell: Report) -> None:
    taken: dict[tuple[int, int], int] = {}
    for cell in cells:
        place = round(cell.x_mm / SAME_MM), round(cell.z_mm / SAME_MM)
        line = taken.setdefault(place, cell.line)
        if line != cell.line:
            tell(cell.line, "x_mm, z_mm", f"the place of the cell in line {line}")


def _check_gaps(cells: list[Cell], tell: Report) -> None:
    used = {int(cell.feed) for cell in cells}
    gaps = [str(feed) for feed in range(1, max(used)) if feed not in used]
    if gaps:
        last = max(cells, key=lambda cell: cell.feed)
        named = ", ".join(gaps[:8]) + (" …" if len(gaps) > 8 else "")
        tell(last.line, "feed", f"{last.feed:.0f}, but no cell is on feed {named}")


def _wired(cells: list[Cell], wiring: Loom | None) -> list[Cell]:
    """The cells on the feeds that the rig's loom gives them."""
    if wiring is None:
        return cells
    feeds = loom(_places_m(cells), wiring).tolist()
    return [cell._replace(feed=feed + 1) for cell, feed in zip(cells, feeds, strict=True)]


def _check_shared(cells: list[Cell], tell: Report) -> None:
    """Cells on one feed get one drive: they cannot ask for different ones."""
    first: dict[float, Cell] = {}
    for cell in cells:
        head = first.setdefault(cell.feed, cell)
        for name in SHARED:
            here, there = getattr(cell, name), getattr(head, name)
            if here != there:
                place = f"line {head.line} on the same feed {cell.feed:.0f}"
                tell(cell.line, name, f"{here:g}, expected {there:g} as in {place}")


def _places_m(cells: list[Cell]) -> np.ndarray[tuple[int, int], np.dtype[np.float64]]:
    """(N, 3) positions in panel axes (right, out, up), metres."""
    return np.array([(cell.x_mm, 0.0, cell.z_mm) for cell in cells]) / 1000.0


def _map(cells: list[Cell]) -> CellMap:
    trims = {int(cell.feed): cell.trim_db for cell in cells}
    return CellMap(
        at_m=_places_m(cells),
        feed=np.array([int(cell.feed) - 1 for cell in cells]),
        polarity=np.array([cell.polarity for cell in cells]),
        phase_deg=np.array([cell.phase_deg for cell in cells]),
        dead=np.array([cell.dead == 1 for cell in cells]),
        trim_db=np.array([trims[feed] for feed in sorted(trims)]),
    )
