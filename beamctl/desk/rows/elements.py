"""The cells of one panel as a map: which feed each hangs on, which is reversed, which is dead.

As seen from behind the panel, looking out: right on the screen is right in the beam.
"""

from __future__ import annotations

from itertools import groupby
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.cells import CellMap, loom
from beamctl.desk.format import Role, Row, Span, fit, wrap

GOOD, REVERSED, DEAD = "o", "-", "x"
SEEN = "seen from behind"
_ROLES: dict[str, Role] = {REVERSED: "attention", DEAD: "attention"}


class Places(NamedTuple):
    """Where each cell stands in the picture, (N,) each, and how wide its text may be."""

    across: NDArray[np.int64]
    down: NDArray[np.int64]
    wide: int


def element_rows(cells: CellMap, first_feed: int, width: int, height: int) -> list[Row]:
    """At most `height` rows: every cell by its feed's number, or by one sign where they are many.

    Rows of cells that find no room are counted.
    """
    signs = [_sign(cells, n) for n in range(len(cells.feed))]
    marked = any(sign != GOOD for sign in signs)
    feeds = [str(first_feed + int(feed)) for feed in cells.feed]
    numbered = _places(cells, max(map(len, feeds)) + 1 + marked)
    fits = int(numbered.across.max()) + numbered.wide - 1 <= width
    spread = _places(cells, 2)
    places = numbered if fits else spread if int(spread.across.max()) < width else _places(cells, 1)
    texts = [f + s.replace(GOOD, "") for f, s in zip(feeds, signs, strict=True)] if fits else signs
    below = [(Span(line),) for line in wrap(_key(fits), width, 3)]
    rows = _drawn(places, texts, signs, width)
    room = max(height - len(below), 0)
    if len(rows) > room:
        more = len(rows) - max(room - 1, 0)
        rows = [*rows[: max(room - 1, 0)], fit((Span(f"and {more} rows of cells more"),), width)]
    return [*rows, *below][: max(height, 0)]


def _drawn(places: Places, texts: list[str], signs: list[str], width: int) -> list[Row]:
    """One row for every row of cells; what is reversed or dead stands out."""
    lines: list[dict[int, tuple[str, Role]]] = [{} for _ in range(int(places.down.max()) + 1)]
    for across, down, text, sign in zip(places.across, places.down, texts, signs, strict=True):
        role = _ROLES.get(sign, "dim")
        lines[down] |= {int(across) + n: (letter, role) for n, letter in enumerate(text)}
    return [_row(line, width) for line in lines]


def _row(line: dict[int, tuple[str, Role]], width: int) -> Row:
    cells = [line.get(x, (" ", "dim")) for x in range(min(max(line) + 1, width))]
    runs = groupby(cells, key=lambda cell: cell[1])
    return tuple(Span("".join(letter for letter, _ in run), role) for role, run in runs)


def _places(cells: CellMap, wide: int) -> Places:
    """A cell in each place that its text of `wide` signs needs, neighbours just apart."""
    column, row = loom(cells.at_m, "columns"), loom(cells.at_m, "rows")
    order = np.lexsort((column, row))
    gaps = np.diff(column[order])[np.diff(row[order]) == 0]
    nearest = int(gaps.min()) if len(gaps) else 1
    return Places(column * -(-wide // nearest), row, wide)


def _sign(cells: CellMap, number: int) -> str:
    if cells.dead[number]:
        return DEAD
    return REVERSED if cells.polarity[number] < 0 else GOOD


def _key(numbered: bool) -> str:
    what = "feeds by number" if numbered else f"{GOOD} a cell"
    return f"{what}  {REVERSED} reversed  {DEAD} dead; {SEEN}"
