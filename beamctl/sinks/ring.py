"""A ring of frames with one writer (Python) and one reader (the compiled callback)."""

from __future__ import annotations

import numpy as np

from beamctl.sinks import callback as compiled
from beamctl.sinks.sink import Block


class Ring:
    """Holds `frames` × `channels` float32. `memory` must outlive every callback that reads it."""

    def __init__(self, frames: int, channels: int) -> None:
        self.frames = frames
        floats = frames * channels
        self.memory = np.zeros(compiled.HEADER_WORDS + (floats + 1) // 2, np.int64)
        self._words = self.memory[: compiled.HEADER_WORDS]
        self._samples = self.memory[compiled.HEADER_WORDS :].view(np.float32)
        self._samples.fill(0.0)  # touches every page, so that the callback never waits for one
        self._words[compiled.FRAMES] = frames
        self._words[compiled.CHANNELS] = channels

    @property
    def room(self) -> int:
        """Frames that may be pushed now."""
        return self.frames - int(self._words[compiled.WRITTEN] - self._words[compiled.READ])

    @property
    def callbacks(self) -> int:
        """How often the device has asked."""
        return int(self._words[compiled.CALLBACKS])

    @property
    def empty(self) -> int:
        """How often it asked for more than there was."""
        return int(self._words[compiled.EMPTY])

    @property
    def block(self) -> int:
        """The most frames it asked for at once."""
        return int(self._words[compiled.BLOCK])

    @property
    def longest_s(self) -> float:
        """The longest time between two callbacks, by the device's clock."""
        return int(self._words[compiled.LONGEST_NS]) / 1e9

    def push(self, block: Block) -> None:
        """Append (n, channels) float32, C-contiguous; n ≤ room. The first full ring flows."""
        if block.shape[1] != self._words[compiled.CHANNELS] or len(block) > self.room:
            raise ValueError(f"a block of {block.shape} does not fit {self.room} frames of room")
        compiled.push(self._words, self._samples, block)
        if self.room == 0:
            self._words[compiled.FLOWING] = 1
