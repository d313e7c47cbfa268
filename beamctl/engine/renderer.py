"""Records in, feed samples out: the one renderer, for a device as for a file.

It knows no clock and no device. Records carry absolute samples; `render` works on from where it
stands, in blocks of any length, and takes each record in exactly at its sample.
"""

from __future__ import annotations

import heapq
from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.air import Air
from beamctl.engine.buffers import SEGMENT
from beamctl.engine.panel import Panel, interleave
from beamctl.show import glides
from beamctl.show.records import SOUNDING, Record
from beamctl.show.show import Show

AIMING = frozenset(("aim", "reach", "freeze", "thaw"))


class Renderer:
    """Renders every feed of a show, as it goes to the final stage.

    sounds  prepared analytic signals by panel (their band is its carrier's) and sound name,
            (frames, 2) float32 at half the device rate
    """

    def __init__(
        self,
        show: Show,
        sounds: Mapping[str, Mapping[str, NDArray[np.float32]]],
        start: int = 0,
    ) -> None:
        self.position = start
        self.rate_hz = show.rig.rate_hz
        self.channels = show.channels
        self._sounds = sounds
        air = Air(**show.house.air.model_dump())
        self._beams: dict[str, tuple[Panel, int]] = {}
        self.panels: dict[str, Panel] = {}
        self._first: dict[str, int] = {}
        for name, spec in show.rig.panel.items():
            beams = [b for b in show.sheet.beam if show.panel_of(b) == name]
            panel = Panel(spec, show.cells[name], air, self.rate_hz, len(beams))
            self.panels[name] = panel
            self._first[name] = spec.first_feed - 1
            self._beams |= {b: (panel, i) for i, b in enumerate(beams)}
        self._waiting: list[tuple[int, int, Record]] = []
        self._count = 0

    def put(self, record: Record) -> None:
        """Take a record for its sample, now or later; one that tells no sound is passed over.

        Raises ValueError when its sample has been rendered already.
        """
        if record.what not in SOUNDING:
            return
        if record.sample < self.position:
            raise ValueError(f"sample {record.sample} is past, at {self.position}")
        heapq.heappush(self._waiting, (record.sample, self._count, record))
        self._count += 1

    def render(self, out: NDArray[np.float32]) -> None:
        """Fill `out` (n, channels) float32 with the next n samples of every channel."""
        done = 0
        while done < len(out):
            self._take_records()
            offset = self.position % SEGMENT
            n = min(len(out) - done, SEGMENT - offset)
            if self._waiting:
                n = min(n, self._waiting[0][0] - self.position)
            self._step(out[done : done + n], offset)
            done += n

    def meter(self, block: NDArray[np.float32]) -> list[tuple[float, float]]:
        """Per panel: feed peak of `block`, just rendered, and the segment's lowest shared gain."""
        told = []
        for name, panel in self.panels.items():
            first, feeds = self._first[name], panel.buffers.out.shape[0]
            if panel.idle:
                told.append((0.0, 1.0))
                continue
            peak = float(np.abs(block[:, first : first + feeds]).max())
            told.append((peak, float(panel.buffers.total.min())))
        return told

    def _take_records(self) -> None:
        offset = self.position % SEGMENT
        if offset == 0:
            for panel in self.panels.values():
                panel.begin_segment(self.position)
        while self._waiting and self._waiting[0][0] == self.position:
            self._apply(heapq.heappop(self._waiting)[2], offset)

    def _apply(self, record: Record, offset: int) -> None:
        panel, index = self._beams[record.beam]
        state = panel.states[index]
        state.apply(record)
        if record.what in AIMING:
            panel.touch(index, offset)
        if state.level[glides.TO] > 0.0:
            panel.wake(index)

    def _step(self, out: NDArray[np.float32], offset: int) -> None:
        n = len(out)
        segment = self.position - offset
        out[:] = 0.0
        for name, panel in self.panels.items():
            if not panel.idle:
                panel.step(segment, offset, offset + n, self._sounds[name])
                interleave(out, self._first[name], panel.buffers.out, offset)
        self.position += n
