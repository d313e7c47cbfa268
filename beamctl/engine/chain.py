"""Renderer, ring and final stage in one process without a clock: what `render` and `replay` run.

The same code as live, in the same order. What a device decides live (when the gate opened or shut,
when the ring ran dry) comes here as records, each taken in exactly at its frame.
"""

from __future__ import annotations

import heapq
import math
from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import NDArray

from beamctl.engine import layout as at
from beamctl.engine.outlet import Outlet, Wire
from beamctl.engine.renderer import Renderer
from beamctl.show.beamstate import MIN_GLIDE_S
from beamctl.show.records import FINAL, Record
from beamctl.show.show import Show

STEP = 1024
FOREVER = 1 << 62


def wires_of(show: Show) -> list[Wire]:
    """The panels' channels and ratings, in the order of the rig."""
    return [
        Wire(panel.first_feed - 1, show.cells[name].feeds, panel.full_drive)
        for name, panel in show.rig.panel.items()
    ]


def full_drives(show: Show) -> list[float]:
    """Ceilings that hold nothing: every feed of a panel at full scale."""
    return [math.sqrt(wire.feeds) for wire in wires_of(show)]


def ramp_n(show: Show) -> int:
    """Frames of the ramp to silence: the shortest there is."""
    return round(MIN_GLIDE_S * show.rig.rate_hz)


class Chain:
    """Feeds as they leave the final stage, from `start` on.

    ahead  frames that the renderer runs in front, so that the final stage sees peaks coming; with 0
           records may come at any frame that has not been rendered, and ceilings are not foreseen
    tap    is given the first frame's number and every block that enters the ring
    """

    def __init__(
        self,
        show: Show,
        sounds: Mapping[str, Mapping[str, NDArray[np.float32]]],
        start: int = 0,
        ahead: int = at.LOOKAHEAD + at.CHUNK,
        tap: Callable[[int, NDArray[np.float32]], None] | None = None,
    ) -> None:
        self._tap = tap
        self.ramp_n = ramp_n(show)
        self.renderer = Renderer(show, sounds, start)
        self.channels = show.channels
        self._ahead = ahead
        frames = 2 * STEP + ahead
        self.outlet = Outlet.create(None, frames, show.channels, wires_of(show), self.ramp_n, start)
        self.outlet.grant(FOREVER, full_drives(show))
        self.outlet.host_lives(FOREVER)
        self.outlet.flow()
        self._block = np.zeros((STEP, show.channels), np.float32)
        self._waiting: list[tuple[int, int, Record]] = []
        self._count = 0

    @property
    def position(self) -> int:
        """The frame that leaves next."""
        return self.outlet.count(at.READ)

    def put(self, record: Record) -> None:
        """Take a record for its frame; ValueError when that is past."""
        if record.what not in FINAL:
            self.renderer.put(record)
            return
        if record.sample < self.position:
            raise ValueError(f"sample {record.sample} is past, at {self.position}")
        heapq.heappush(self._waiting, (record.sample, self._count, record))
        self._count += 1

    def render(self, out: NDArray[np.float32]) -> None:
        """Fill `out` (n, channels) float32, C-contiguous, with the next n frames."""
        done = 0
        while done < len(out):
            while self._waiting and self._waiting[0][0] == self.position:
                self._apply(heapq.heappop(self._waiting)[2])
            n = min(len(out) - done, STEP)
            if self._waiting:
                n = min(n, self._waiting[0][0] - self.position)
            self._render_ahead(self.position + n + self._ahead)
            self.outlet.pull(out[done : done + n])
            done += n

    def _apply(self, record: Record) -> None:
        if record.what == "dry":
            self.outlet.run_dry()
        elif record.what == "short":
            self.outlet.see_to(int(record.args["seen"]))
        elif record.what == "grant":
            self.outlet.grant(FOREVER, record.args["ceilings"])
        elif record.args["open"]:
            self.outlet.ask_open(int(record.args["n"]))
        else:
            self.outlet.hush()

    def _render_ahead(self, until: int) -> None:
        while (n := min(STEP, until - self.renderer.position)) > 0:
            first = self.renderer.position
            self.renderer.render(self._block[:n])
            if self._tap is not None:
                self._tap(first, self._block[:n])
            self.outlet.push(self._block[:n])
