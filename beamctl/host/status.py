"""The engine's status block: a small memory-mapped file that the engine writes and the host reads.

Plain aligned numbers, each written by one process only, so that a reader sees an old or a new value
and never waits. It outlives both processes' crashes and holds nothing that must survive.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
from numpy.typing import NDArray

FIELDS = ("rendered", "load_ppm", "beat_ns")
PANELS = 64  # more than a rig has


class Status:
    """`create` in the host, `attach` in the engine."""

    def __init__(self, counts: NDArray[np.int64], meters: NDArray[np.float64]) -> None:
        self._counts = counts
        self.meters = meters  # (64, 2): per panel, peak re full scale and lowest shared gain

    @classmethod
    def create(cls, path: Path) -> Status:
        """A fresh block of zeros at `path`."""
        path.unlink(missing_ok=True)
        path.write_bytes(bytes(8 * (len(FIELDS) + 2 * PANELS)))
        return cls.attach(path)

    @classmethod
    def attach(cls, path: Path) -> Status:
        """The block at `path`."""
        counts = np.memmap(path, np.int64, "r+", 0, (len(FIELDS),))
        meters = np.memmap(path, np.float64, "r+", 8 * len(FIELDS), (PANELS, 2))
        return cls(np.asarray(counts), np.asarray(meters))

    def __getitem__(self, name: str) -> int:
        return int(self._counts[FIELDS.index(name)])

    def __setitem__(self, name: str, value: int) -> None:
        self._counts[FIELDS.index(name)] = value
