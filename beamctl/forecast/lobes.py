"""Second beams: the other directions in which nearly all cells of a panel arrive in phase.

Ordinary cells stand more than half a wavelength apart, so a beam that is steered one way comes out
another way as well, weaker or stronger by what one cell does there. They are found as the real
field's own maxima, whatever the loom, the dead cells and the focus; a side lobe, where most cells
cancel, is none.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import maximum_filter, minimum_filter

from beamctl.acoustics.geometry import angles_deg, to_room
from beamctl.acoustics.pattern import FAR_M
from beamctl.acoustics.transfer import transfer
from beamctl.forecast.panel import Phasors, ReadyPanel
from beamctl.guard.travels import Place

AGREE = 0.5  # of what the cells would make all in phase; a uniform panel's side lobes have 0.22
LEAST_DB = -20.0  # re the first beam; weaker ones are no concern
LEAST_BEND = 1e-30  # of a maximum that is level all round
PER_LOBE = 2.0  # grid points from a lobe's peak to its first null
LEAST_STEPS = 4  # from straight on to the side, for a panel of one row or column
MOST = 4  # second beams that are told, the loudest first

Array = NDArray[np.float64]


class Lobe(NamedTuple):
    """One direction (panel axes, degrees), its unit vector, and its level re the first beam."""

    azimuth_deg: float
    elevation_deg: float
    unit: Array
    over_first_db: float


class Lobes:
    """Looks all round the front of one panel, at one distance at a time."""

    def __init__(self, panel: ReadyPanel) -> None:
        self._panel = panel
        at_m = panel.cells.at_m[~panel.cells.dead]
        extent_m = np.ptp(at_m, axis=0)[[0, 2]]
        self._lobe = panel.wavelength_m / (extent_m + panel.wavelength_m)
        steps = np.maximum(np.ceil(PER_LOBE / self._lobe), LEAST_STEPS).astype(int)
        axes = [np.arange(-n, n + 1) / n for n in steps]
        self._steps = np.array([axis[1] - axis[0] for axis in axes])
        self._cosines = np.stack(np.meshgrid(*axes, indexing="ij"), axis=-1)
        self._front = np.sum(self._cosines**2, axis=-1) < 1.0
        self._inner = minimum_filter(
            self._front, size=3, mode="constant"
        )  # a maximum is seen whole
        self._per_m, self._most = -1.0, 1.0
        self._cells: NDArray[np.complex64] = np.zeros((0, 0), np.complex64)
        self._sizes: NDArray[np.float32] = np.zeros((0, 0), np.float32)

    def first(self, drive: Phasors, place: Place) -> Lobe:
        """The beam itself."""
        return self._lobe_at(self._panel.main_peak(drive, place), 0.0)

    def second(self, drive: Phasors, place: Place, first: Lobe) -> tuple[Lobe, ...]:
        """The second beams, loudest first."""
        self._look(place[3])
        reference = float(self._levels(drive, first.unit[np.newaxis], place[3])[0])
        units: list[Array] = []
        for unit in _unit(self._maxima(drive, reference)):
            if all(self._apart(unit, u) for u in (first.unit, *units)):
                units.append(unit)
        if not units:
            return ()
        ratios = self._levels(drive, np.stack(units[:MOST]), place[3]) / reference
        lobes = map(self._lobe_at, units, 20.0 * np.log10(ratios))
        return tuple(sorted(lobes, key=lambda lobe: -lobe.over_first_db))

    def _maxima(self, drive: Phasors, reference: float) -> Array:
        """Cosines (K, 2) of the maxima in which the cells agree, loudest first."""
        each = drive[self._panel.cells.feed].astype(np.complex64)
        pressure, most = np.zeros(self._front.shape), np.ones(self._front.shape)
        pressure[self._front] = np.abs(self._cells @ each)
        most[self._front] = self._sizes @ np.abs(each)
        least = reference / self._most * 10.0 ** (LEAST_DB / 20.0)
        peaks = (pressure >= maximum_filter(pressure, size=3)) & (pressure > AGREE * most)
        places = np.argwhere(peaks & (pressure > least) & self._inner)
        places = places[np.argsort(-pressure[tuple(places.T)])]
        return self._cosines[tuple(places.T)] + self._steps * _tops(pressure**2, places)

    def _apart(self, one: Array, other: Array) -> bool:
        """Whether two directions lie on different lobes."""
        return bool(np.any(np.abs(one - other)[[0, 2]] >= self._lobe))

    def _look(self, per_m: float) -> None:
        """Work out what every cell makes at the distance of the focus, unless that is at hand."""
        if per_m == self._per_m:
            return
        panel = self._panel
        count = len(panel.cells.feed)
        alone = panel.emitters._replace(feed=np.arange(count), feeds=count)
        units = _unit(self._cosines[self._front])
        points_m = to_room(panel.frame, _radius_m(per_m) * units)
        found = transfer(points_m, alone, panel.air, panel.spec.carrier_hz)
        self._most = float(np.abs(found).max()) or 1.0  # far off, no single precision would hold it
        self._cells = (found / self._most).astype(np.complex64)
        self._sizes, self._per_m = np.abs(self._cells), per_m

    def _levels(self, drive: Phasors, units: Array, per_m: float) -> Array:
        """Pressures in the directions (K, 3), on the sphere through the focus."""
        panel = self._panel
        points_m = to_room(panel.frame, _radius_m(per_m) * units)
        hz = panel.spec.carrier_hz
        return np.abs(transfer(points_m, panel.emitters, panel.air, hz) @ drive)

    @staticmethod
    def _lobe_at(unit: Array, over_first_db: float) -> Lobe:
        azimuth, elevation = angles_deg(unit)
        return Lobe(float(azimuth), float(elevation), unit, float(over_first_db))


def _radius_m(per_m: float) -> float:
    return 1.0 / per_m if per_m > 0.0 else FAR_M


def _unit(cosines: Array) -> Array:
    """Unit directions (..., 3) in front of the panel from their right and up parts (..., 2)."""
    out = np.sqrt(np.maximum(0.0, 1.0 - np.sum(cosines**2, axis=-1)))
    return np.stack((cosines[..., 0], out, cosines[..., 1]), axis=-1)


def _tops(power: Array, places: NDArray[np.int64]) -> Array:
    """How far (K, 2), in steps, the tops of parabolas lie from the maxima (K, 2) of a grid."""
    around = np.pad(power, 1)
    found = np.zeros(places.shape)
    for axis in range(2):
        side = np.eye(2, dtype=np.int64)[axis]
        low, middle, high = (around[tuple((places + 1 + n * side).T)] for n in (-1, 0, 1))
        found[:, axis] = 0.5 * (high - low) / np.maximum(2.0 * middle - low - high, LEAST_BEND)
    return np.clip(found, -0.5, 0.5)
