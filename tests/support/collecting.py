"""An outlet that remembers what it gave, and when by the clock of the test."""

from __future__ import annotations

import time
from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Samples = NDArray[np.float32]


class Collecting:
    """Gives noise, full scale and beyond, that never repeats; frames count as by a device."""

    def __init__(
        self,
        channels: int,
        frames: int = 4096,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        self.memory = np.zeros(8, np.int64)
        self.channels = channels
        self.frames = frames
        self.callbacks = 0
        self.block = 0
        self.given: list[Samples] = []
        self.at_s: list[float] = []
        self._rng = np.random.default_rng(7)
        self._clock = clock

    def pull(self, out: Samples, now_ns: int) -> None:
        """Fill `out`, as the engine's outlet does."""
        self.at_s.append(self._clock())
        out[:] = self._rng.normal(size=out.shape)
        self.given.append(out.copy())
        self.block = max(self.block, len(out))
        self.callbacks += 1

    @property
    def everything(self) -> Samples:
        """All frames that were given, (n, channels)."""
        return np.concatenate(self.given)
