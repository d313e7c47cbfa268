"""A picture of the room in signs: what is put first keeps its cell."""

from __future__ import annotations

from itertools import groupby

from numpy.typing import ArrayLike

from beamctl.desk.format import Role, Row, Span, clean
from beamctl.desk.projection import Cell, Projection

Sign = tuple[str, Role]


class Canvas:
    """Signs and names over a ground that fills the rest."""

    def __init__(self, projection: Projection) -> None:
        self.projection = projection
        self._signs: dict[Cell, Sign] = {}
        self._names: list[tuple[Cell, str, Role]] = []

    def put(self, point_m: ArrayLike, sign: str, role: Role = "dim", name: str = "") -> None:
        """A sign at a point (3,) of the room, with its name beside it where there is room."""
        cell = self.projection.cell(point_m)
        if self.projection.shows(cell) and self._signs.setdefault(cell, (sign, role)) and name:
            self._names.append((cell, clean(name), role))

    def line(self, a_m: ArrayLike, b_m: ArrayLike, sign: str = "", role: Role = "dim") -> None:
        """A straight line; without a sign it is drawn by its slope on the screen."""
        cells = self.projection.between(a_m, b_m)
        if cells and not sign:
            sign = _slope(cells[0], cells[-1])
        for cell in cells:
            self._signs.setdefault(cell, (sign, role))

    def rows(self, ground: list[str] | None = None, role: Role = "dim") -> list[Row]:
        """`height` rows; `ground` are as many texts of `width` cells for what nothing was put on."""
        width, height = self.projection.width, self.projection.height
        signs = self._signs | {
            cell: sign for name in self._names for cell, sign in self._written(*name)
        }
        found = []
        for y in range(height):
            below = ground[y] if ground else " " * width
            line = [signs.get((x, y), (below[x], role)) for x in range(width)]
            runs = groupby(line, key=lambda sign: sign[1])
            found.append(tuple(Span("".join(s for s, _ in run), r) for r, run in runs))
        return found

    def _written(self, cell: Cell, name: str, role: Role) -> list[tuple[Cell, Sign]]:
        """The signs of a name right of its cell or left of it; none where there is no room."""
        column, row = cell
        for first in (column + 2, column - 1 - len(name)):
            taken = [(x, row) for x in range(first - 1, first + len(name) + 1) if x != column]
            if first >= 0 and first + len(name) <= self.projection.width:
                if any(there in self._signs for there in taken):
                    continue
                written = [((first + n, row), (sign, role)) for n, sign in enumerate(name)]
                self._signs.update(written)
                return written
        return []


def _slope(a: Cell, b: Cell) -> str:
    """The sign that looks most like a line from a to b; rows are twice as high as columns wide."""
    across, up = abs(b[0] - a[0]), 2 * abs(b[1] - a[1])
    if across > 2 * up:
        return "-"
    if up > 2 * across:
        return "|"
    return "/" if (b[0] - a[0]) * (b[1] - a[1]) < 0 else "\\"
