"""Room metres and cells of the terminal: the ground plan from above, the section from the side.

True to scale: a cell counts as twice as high as it is wide.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

HIGH = 2.0  # widths of a cell, from one row to the next
MARGIN_M = 0.4
FINEST_M = 0.02  # width of a cell, at least
X, Y, Z = range(3)

Cell = tuple[int, int]  # column from the left, row from the top


@dataclass(frozen=True, slots=True)
class Projection:
    """What part of a plane `width` by `height` cells show.

    across, up        the house axis that goes right, and the one that goes up: X, Y or Z
    left_m, bottom_m  where the lower left corner of the picture is, along them
    column_m          width of a cell
    """

    across: int
    up: int
    left_m: float
    bottom_m: float
    column_m: float
    width: int
    height: int

    @property
    def row_m(self) -> float:
        """Height of a cell."""
        return HIGH * self.column_m

    def cell(self, point_m: ArrayLike) -> Cell:
        """The cell that shows a point (3,) of the room; it may lie outside the picture."""
        point = np.asarray(point_m, np.float64)
        column = np.floor((point[self.across] - self.left_m) / self.column_m)
        up = np.floor((point[self.up] - self.bottom_m) / self.row_m)
        return int(column), self.height - 1 - int(up)

    def shows(self, cell: Cell) -> bool:
        """Whether a cell lies in the picture."""
        return 0 <= cell[0] < self.width and 0 <= cell[1] < self.height

    def between(self, a_m: ArrayLike, b_m: ArrayLike) -> list[Cell]:
        """The cells in the picture that a straight line passes, from a (3,) to b (3,)."""
        a, b = np.asarray(a_m, np.float64), np.asarray(b_m, np.float64)
        (c, r), (d, s) = self.cell(a), self.cell(b)
        steps = max(abs(d - c), abs(s - r), 1)
        on_line = (self.cell(a + (b - a) * n / steps) for n in range(steps + 1))
        return [cell for cell in dict.fromkeys(on_line) if self.shows(cell)]

    def points_m(self, at_m: float, stacked: int = 1) -> NDArray[np.float64]:
        """Room points (height, stacked, width, 3) of the cells, from the top row down.

        at_m     where the plane lies on the axis that is looked along
        stacked  points in each cell, one above the other
        """
        rows = self.height * stacked
        across = self.left_m + (np.arange(self.width) + 0.5) * self.column_m
        up = self.bottom_m + (rows - 0.5 - np.arange(rows)) * self.row_m / stacked
        found = np.full((rows, self.width, 3), at_m)
        found[..., self.across] = across
        found[..., self.up] = up[:, np.newaxis]
        return found.reshape(self.height, stacked, self.width, 3)


def fitted(points_m: ArrayLike, across: int, up: int, width: int, height: int) -> Projection:
    """The projection of `width` by `height` cells that just holds points (P, 3) and a margin.

    Where the picture has room to spare, they stand in its middle, or on its lower edge when that
    edge is the floor.
    """
    points = np.asarray(points_m, np.float64)
    low, high = points.min(axis=0) - MARGIN_M, points.max(axis=0) + MARGIN_M
    if up == Z:
        low[Z] = min(0.0, float(points[:, Z].min()))
    span = high - low
    width, height = max(width, 1), max(height, 1)
    column_m = max(span[across] / width, span[up] / (HIGH * height), FINEST_M)
    spare_across = column_m * width - span[across]
    spare_up = 0.0 if up == Z else HIGH * column_m * height - span[up]
    return Projection(
        across,
        up,
        float(low[across] - 0.5 * spare_across),
        float(low[up] - 0.5 * spare_up),
        float(column_m),
        width,
        height,
    )
