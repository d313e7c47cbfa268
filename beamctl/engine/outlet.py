"""The outlet: ring and final stage over one block of shared memory, as Python sees it.

The render thread pushes, a device (through `callback_address`) or a paced thread pulls, the host
grants and asks; each may be another process that attached to the same file.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from beamctl.engine import final
from beamctl.engine import layout as at
from beamctl.show.glides import scalar_at

Block = NDArray[np.float32]


@dataclass(frozen=True, slots=True)
class Wire:
    """Which channels are a panel's, and the most that any of them may carry, re full scale."""

    first: int
    feeds: int
    rating: float


@dataclass(frozen=True, slots=True)
class Event:
    """What the final stage did at a frame: one of layout.EVENT_NAMES, and its figure."""

    sample: int
    name: str
    value: int


class Outlet:
    """One stream's memory; `create` makes it, `attach` joins it."""

    def __init__(self, memory: NDArray[np.int64]) -> None:
        self.memory = memory
        self._floats = memory.view(np.float64)
        self._told = int(memory[at.EVENTS])

    @classmethod
    def create(
        cls,
        path: Path | None,
        frames: int,
        channels: int,
        panels: Sequence[Wire],
        ramp_n: int,
        start: int = 0,
    ) -> Outlet:
        """A fresh outlet, gate closed and nothing granted, in a file or in this process alone.

        Its first frame is number `start`, a multiple of layout.CHUNK. ValueError when a panel's
        feeds are not all among the channels, or there are too many panels.
        """
        if (
            channels > at.MAX_CHANNELS
            or len(panels) > at.MAX_PANELS
            or any(not 0 <= wire.first <= wire.first + wire.feeds <= channels for wire in panels)
        ):
            raise ValueError(f"{len(panels)} panels do not fit {channels} channels")
        frames = max(frames, at.LOOKAHEAD + 2 * at.CHUNK)
        frames = min(frames, at.CHUNK * (at.DEMANDS_KEPT - 2 * at.HOLD))
        size = at.words_needed(frames, channels)
        if path is None:
            memory = np.zeros(size, np.int64)
        else:
            path.unlink(missing_ok=True)
            path.touch(0o600)
            memory = np.asarray(np.memmap(path, np.int64, "r+", 0, (size,)))
            memory[:] = 0  # touches every page, so that the callback never waits for one
        outlet = cls(memory)
        memory[at.FRAMES], memory[at.CHANNELS] = frames, channels
        memory[at.PANELS], memory[at.RAMP_N], memory[at.SIZE] = len(panels), ramp_n, size
        memory[at.WRITTEN], memory[at.READ], memory[at.SCANNED] = start, start, start // at.CHUNK
        memory[at.START] = start
        memory[at.GLIDED : at.GLIDED + len(panels)] = start // at.CHUNK - 2  # neither mark is known
        for i, wire in enumerate(panels):
            memory[at.FIRSTS + i], memory[at.FEEDS + i] = wire.first, wire.feeds
            outlet._floats[at.RATINGS + i] = wire.rating
        return outlet

    @classmethod
    def attach(cls, path: Path) -> Outlet:
        """The outlet at `path`."""
        return cls(np.asarray(np.memmap(path, np.int64, "r+")))

    @property
    def channels(self) -> int:
        """Channels of a frame."""
        return self.count(at.CHANNELS)

    @property
    def frames(self) -> int:
        """Length of the ring."""
        return self.count(at.FRAMES)

    @property
    def callbacks(self) -> int:
        """How often frames were asked for."""
        return self.count(at.CALLBACKS)

    @property
    def block(self) -> int:
        """The most frames asked for at once."""
        return self.count(at.BLOCK)

    @property
    def start(self) -> int:
        """Number of the stream's first frame."""
        return self.count(at.START)

    # -- the render thread ------------------------------------------------------------------------

    @property
    def room(self) -> int:
        """Frames that may be pushed now."""
        return int(self.memory[at.FRAMES] - self.memory[at.WRITTEN] + self.memory[at.READ])

    def push(self, block: Block) -> None:
        """Append (n, channels) float32, C-contiguous, n ≤ room."""
        if block.shape[1] != self.memory[at.CHANNELS] or len(block) > self.room:
            raise ValueError(f"a block of {block.shape} does not fit {self.room} frames of room")
        final.push(self.memory, block)

    # -- whoever plays ----------------------------------------------------------------------------

    def pull(self, out: Block, now_ns: int = 0) -> int:
        """Fill `out` (n, channels), C-contiguous, as a device callback would at `now_ns`.

        Returns how many frames the ring had; what follows them is silence.
        """
        before = self.count(at.READ)
        final.note_time(self.memory, now_ns)
        final.pull(self.memory, out.reshape(-1), len(out))
        return self.count(at.READ) - before

    def flow(self) -> None:
        """Let a ring flow that is not full yet."""
        self.memory[at.FLOWING] = 1

    def see_to(self, chunks: int) -> None:
        """Look at no chunk from this number on, as a ring that held no more; 0 looks at all."""
        self.memory[at.SEEN_TO] = chunks

    def run_dry(self) -> None:
        """Do at the next frame what a ring that ran dry does to the gate."""
        final.went_dry(self.memory, self.count(at.READ))

    # -- whoever grants and asks ------------------------------------------------------------------

    def grant(self, until: int, ceilings: Sequence[float] | None = None) -> None:
        """Let panels sound up to frame `until`, under their ceilings of drive.

        Drive is the root of the summed mean squares of a panel's feeds, re full scale.
        """
        if ceilings is not None:
            number = self.count(at.GRANTS) + 1
            row = at.CEILINGS + (number % at.GRANTS_KEPT) * at.MAX_PANELS
            self._floats[row : row + len(ceilings)] = ceilings
            self.memory[at.GRANTS] = number
        self.memory[at.LEASE_UNTIL] = until

    def granted(self, number: int) -> list[float]:
        """Ceilings of one of the last 256 grants."""
        row = at.CEILINGS + (number % at.GRANTS_KEPT) * at.MAX_PANELS
        return [float(v) for v in self._floats[row : row + self.count(at.PANELS)]]

    def host_lives(self, until: int) -> None:
        """The host answers for what sounds up to frame `until`."""
        self.memory[at.HOST_UNTIL] = until

    def gains_left(self, first: int, count: int) -> NDArray[np.float64]:
        """Gain (panels,) that frames first … first + count left with; both whole chunks.

        The root of the power that left over the power that came: what was loud counts for more.
        """
        chunks = np.arange(first // at.CHUNK, (first + count) // at.CHUNK) % at.DEMANDS_KEPT
        squares, powers = (self._by_chunk(table)[:, chunks] for table in (at.LEFT, at.POWERS))
        weights = powers + 1e-30  # of silence each chunk counts alike
        left = (squares / at.CHUNK * weights).sum(axis=1) / weights.sum(axis=1)
        return np.asarray(np.sqrt(left))

    def _by_chunk(self, table: int) -> NDArray[np.float64]:
        """One of the tables by chunk, (panels, DEMANDS_KEPT)."""
        end = table + self.count(at.PANELS) * at.DEMANDS_KEPT
        return self._floats[table:end].reshape(-1, at.DEMANDS_KEPT)

    def frames_at(self, first: int, count: int) -> Block:
        """A copy (count, channels) of frames that are in the ring."""
        channels, frames = self.channels, self.frames
        ring = self.memory[at.SAMPLES :].view(np.float32)[: frames * channels]
        index = np.arange(first, first + count) % frames
        return ring.reshape(frames, channels)[index]

    def ask_open(self, n: int) -> None:
        """Ask for the gate to open over n frames."""
        self.memory[at.OPEN_N] = n
        self.memory[at.OPEN_ASK] += 1

    def hush(self) -> None:
        """Raise the hush word: the gate closes from the next callback on."""
        self.memory[at.HUSH] += 1

    def events(self) -> list[Event]:
        """What the final stage did since the last call; the oldest are lost if 256 were missed."""
        count = int(self.memory[at.EVENTS])
        first = max(self._told, count - at.EVENTS_KEPT)
        self._told = count
        found = []
        for i in range(first, count):
            place = at.EVENT_AT + (i % at.EVENTS_KEPT) * at.EVENT_WORDS
            sample, kind, value = (int(v) for v in self.memory[place : place + 3])
            found.append(Event(sample, at.EVENT_NAMES[kind], value))
        return found

    def count(self, word: int) -> int:
        """A word of the header, by its name in layout.py."""
        return int(self.memory[word])

    @property
    def gate_gain(self) -> float:
        """Gain of the gate at the frame that is read next."""
        row = self._floats[at.GATE_ROW : at.GATE_ROW + 6]
        return max(0.0, float(scalar_at(row, self.count(at.READ))))


def ring_frames(ring_ms: float, rate_hz: int, quantum: int) -> int:
    """Length of a ring in frames: whole quanta, at least `ring_ms`."""
    return quantum * max(2, math.ceil(ring_ms * rate_hz / 1000.0 / quantum))
