"""A rig that hangs otherwise than its files say, and what a microphone measures of it.

A field sum of its own: point sources in free air, a constant speed and absorption, no directivity.
Feeds and cells count from 0 here.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from beamctl.acoustics.cells import CellMap

SPEED_M_S = 331.3 * np.sqrt(1.0 + 20.0 / 273.15)
ABSORPTION_DB_M = 1.3
CLOSE_M = 0.004  # how near a detector is held to the cells
NOISE_DB = 1.0  # every level is off by up to this


@dataclass
class FakeRig:
    """A panel in its own axes (right, out, up), its cells at 5 V, with faults put in."""

    cells: CellMap
    carrier_hz: float = 40e3
    dead: set[int] = field(default_factory=set)  # feeds
    reversed: set[int] = field(default_factory=set)
    gain_db: dict[int, float] = field(default_factory=dict)
    plugged: dict[int, int] = field(default_factory=dict)  # feed → feed whose cells it drives
    cell_db: float = 115.0  # of one cell at 0.3 m with 10 V

    def swap(self, a: int, b: int) -> None:
        """Plug two feeds into one another's place."""
        self.plugged |= {a: b, b: a}

    def pressure(self, phasors: Sequence[tuple[int, complex]], at_m: Sequence[float]) -> complex:
        """Rms pressure at a point with these feeds sounding, each a share of full scale."""
        total = 0j
        for feed, phasor in phasors:
            if feed in self.dead:
                continue
            sign = -1.0 if feed in self.reversed else 1.0
            size = sign * 10.0 ** (self.gain_db.get(feed, 0.0) / 20.0)
            for cell in np.flatnonzero(self.cells.feed == self.plugged.get(feed, feed)):
                if self.cells.dead[cell]:
                    continue
                far_m = float(np.linalg.norm(np.subtract(at_m, self.cells.at_m[cell])))
                lead = self.cells.polarity[cell] * np.exp(
                    1j * np.radians(self.cells.phase_deg[cell])
                )
                lost = 10.0 ** (-ABSORPTION_DB_M * far_m / 20.0)
                cycles = self.carrier_hz * far_m / SPEED_M_S
                strength = 20e-6 * 10.0 ** (self.cell_db / 20.0) * 0.3 * 0.5
                total += (
                    phasor * size * lead * strength * lost * np.exp(-2j * np.pi * cycles) / far_m
                )
        return complex(total)

    def level_db(
        self,
        phasors: Sequence[tuple[int, complex]],
        at_m: Sequence[float],
        rng: np.random.Generator,
    ) -> float:
        """What a meter shows there: 25 dB of its own noise with it, and an error of up to 1 dB."""
        power = abs(self.pressure(phasors, at_m)) ** 2 + (20e-6 * 10.0 ** (25.0 / 20.0)) ** 2
        return 10.0 * np.log10(power / 20e-6**2) + rng.uniform(-NOISE_DB, NOISE_DB)

    def loudest_at(self, feed: int) -> int | None:
        """The feed at whose cells a detector finds this one loudest; None: nowhere."""
        found = {}
        for cell in np.flatnonzero(~self.cells.dead):
            point = self.cells.at_m[cell] + (0.0, CLOSE_M, 0.0)
            size = abs(self.pressure([(feed, 1.0)], point))
            at = int(self.cells.feed[cell])
            found[at] = max(found.get(at, 0.0), size)
        best = max(found, key=lambda at: found[at])
        return best if found[best] > 0.0 else None

    def measure(
        self, phasors: np.ndarray, mic_m: float, reference: int, rng: np.random.Generator
    ) -> list[tuple[int, int | None, float, float | None]]:
        """By live feed: feed, heard at, level alone, and level with the reference.

        phasors  (F,) what each feed is driven with
        """
        point = (0.0, mic_m, 0.0)
        rows = []
        for feed in np.unique(self.cells.feed[~self.cells.dead]).tolist():
            alone = [(feed, phasors[feed])]
            both = [*alone, (reference, phasors[reference])]
            together = None if feed == reference else self.level_db(both, point, rng)
            rows.append((feed, self.loudest_at(feed), self.level_db(alone, point, rng), together))
        return rows
