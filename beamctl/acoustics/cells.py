"""Cell maps: where the cells of a panel sit and which feed each hangs on (the loom)."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray


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
