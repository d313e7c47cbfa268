"""The guard in step with a chain that has no clock: what `render` runs.

The same watch as live, told of every step as it enters and as it leaves. What it grants becomes
records, so that a journal of the render gives the same samples again without it.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from threadpoolctl import threadpool_limits

from beamctl.engine.chain import FOREVER, Chain
from beamctl.guard.watch import Watch
from beamctl.host.priority import RING_MS_REAL_TIME
from beamctl.show.records import Record
from beamctl.show.show import Show


def ring_n(show: Show) -> int:
    """Samples between entering and leaving, as with the ring of a live engine."""
    return round((show.rig.ring_ms or RING_MS_REAL_TIME) * show.rig.rate_hz / 1000.0)


class Stepped:
    """Holds one chain; `tap` belongs to it, and `settle` is called after every block that left.

    records  what was granted, and the trip when there was one
    held_db  by panel, the most that it was held down
    """

    def __init__(self, show: Show, watch: Watch | None = None) -> None:
        threadpool_limits(1)  # small matrix products beside a renderer
        self.watch = watch or Watch(show, ring_n(show))
        self.records: list[Record] = []
        self.held_db: dict[str, float] = {}
        self._chain: Chain | None = None
        self._waiting = np.zeros((0, show.channels), np.float32)
        self._left = 0
        self._granted: list[float] = []

    def watch_over(self, chain: Chain) -> None:
        """The chain that it holds; nothing has been rendered yet."""
        self._chain, self._left = chain, chain.position
        self.watch.begin()

    def tap(self, _first: int, block: NDArray[np.float32]) -> None:
        """Take in what enters the ring, and grant what may leave."""
        self._waiting = np.concatenate((self._waiting, block))
        step_n = self.watch.step_n
        while len(self._waiting) >= step_n:
            ceilings = [float(c) for c in self.watch.take(self._waiting[:step_n])]
            self._waiting = self._waiting[step_n:]
            for panel, db in self.watch.held_db().items():
                self.held_db[panel] = max(db, self.held_db.get(panel, 0.0))
            self._grant(ceilings)

    def settle(self) -> None:
        """Count what has left; a trip shuts the gate, and it stays shut."""
        assert self._chain is not None
        step_n = self.watch.step_n
        while self._chain.position >= self._left + step_n:
            self.watch.left(self._chain.outlet.gains_left(self._left, step_n))
            self._left += step_n
            if self.watch.trip and not any(r.what == "trip" for r in self.records):
                self._trip()

    def _grant(self, ceilings: list[float]) -> None:
        assert self._chain is not None
        if ceilings != self._granted:
            self._granted = ceilings
            self._chain.outlet.grant(FOREVER, ceilings)
            args = {"ceilings": ceilings}
            self.records.append(Record(self._chain.position, "grant", args=args))

    def _trip(self) -> None:
        assert self._chain is not None
        sample, n = self._chain.position, int(self._chain.ramp_n)
        self._chain.outlet.hush()
        self.records.append(Record(sample, "trip", who="guard", args={"reason": self.watch.trip}))
        gate = {"open": 0, "n": n, "why": "hushed"}
        self.records.append(Record(sample, "gate", args=gate))
