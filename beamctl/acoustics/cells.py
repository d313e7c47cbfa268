"""Cell maps: where the cells of a panel sit and which feed each hangs on (the loom)."""

from __future__ import annotations

from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

Loom = Literal["each", "columns", "rows"]

SAME_M = 1e-5  # cells closer than this along an axis share a column or a row


class CellMap(NamedTuple):
    """The cells of one panel, in its own axes (right, out, up), origin at the panel's centre.

    at_m       (N, 3) positions; out is 0 for a flat panel
    feed       (N,) feed of each cell, counted from 0 within the panel
    polarity   (N,) +1 or -1, as wired; the drive is turned over to cancel a -1
    phase_deg  (N,) measured phase lead of the cell; the drive is turned back by it
    dead       (N,) True for a cell that makes no sound
    trim_db    (F,) gain of each feed, 0 or less

    Cells on one feed share polarity, phase and trim.
    """

    at_m: NDArray[np.float64]
    feed: NDArray[np.int64]
    polarity: NDArray[np.float64]
    phase_deg: NDArray[np.float64]
    dead: NDArray[np.bool_]
    trim_db: NDArray[np.float64]

    @property
    def feeds(self) -> int:
        """How many feeds the panel takes."""
        return len(self.trim_db)


def grid_positions(columns: int, rows: int, pitch_m: float) -> NDArray[np.float64]:
    """Cells (columns * rows, 3) of a grid, panel axes, metres, centred.

    Counted from the upper left as seen from behind, along the row, then down.
    """
    row, column = np.divmod(np.arange(columns * rows), columns)
    right = (column - (columns - 1) / 2) * pitch_m
    up = ((rows - 1) / 2 - row) * pitch_m
    return np.stack((right, np.zeros_like(right), up), axis=-1)


def hex_positions(rings: int, pitch_m: float) -> NDArray[np.float64]:
    """Cells (3 rings (rings + 1) + 1, 3) in rings around one, panel axes, metres.

    Neighbours sit one pitch apart, rows lie flat; counted like a grid, row by row from the top.
    """
    line = [np.arange(2 * rings + 1 - abs(row)) for row in range(-rings, rings + 1)]
    right = np.concatenate([(n - (len(n) - 1) / 2) * pitch_m for n in line])
    down = np.repeat(np.arange(-rings, rings + 1), [len(n) for n in line])
    up = -down * (pitch_m * np.sqrt(0.75))
    return np.stack((right, np.zeros_like(right), up), axis=-1)


def loom(at_m: NDArray[np.float64], kind: Loom) -> NDArray[np.int64]:
    """Feed of each cell, (N,), counted from 0, for cells `at_m` (N, 3).

    "each" gives every cell its own feed in the cells' order; "columns" one feed to the cells that
    share a place along right, counted from the left; "rows" along up, counted from the top.
    """
    if kind == "each":
        return np.arange(len(at_m))
    along = at_m[:, 0] if kind == "columns" else -at_m[:, 2]
    order = np.argsort(along, kind="stable")
    fresh = np.diff(along[order], prepend=along[order[:1]]) > SAME_M
    feed = np.empty(len(at_m), dtype=np.int64)
    feed[order] = np.cumsum(fresh)
    return feed


def cell_map(at_m: NDArray[np.float64], feed: NDArray[np.int64]) -> CellMap:
    """The map of a panel whose cells, at `at_m` (N, 3) on `feed` (N,), are all good and alike."""
    count = len(at_m)
    return CellMap(
        at_m=at_m,
        feed=feed,
        polarity=np.ones(count),
        phase_deg=np.zeros(count),
        dead=np.zeros(count, dtype=np.bool_),
        trim_db=np.zeros(int(feed.max()) + 1),
    )


def steerable(cells: CellMap, wavelength_m: float) -> tuple[bool, bool]:
    """Whether the loom can steer in azimuth and in elevation.

    It can along an axis in which the feeds' centres take at least two values, and in which no
    feed's cells span a wavelength or more: a longer feed answers with its own fixed narrow beam.
    Dead cells do not count.
    """
    at_m, feed = cells.at_m[~cells.dead], cells.feed[~cells.dead]
    groups = [at_m[feed == f] for f in np.unique(feed)]
    if not groups:
        return False, False
    span = np.max([np.ptp(group, axis=0) for group in groups], axis=0)
    spread = np.ptp([group.mean(axis=0) for group in groups], axis=0)
    steered = (spread > SAME_M) & (span < wavelength_m)
    return bool(steered[0]), bool(steered[2])
