"""What each seat gets of what the feeds carry: rms pressure from feed phasors, never too low.

Coherent within a panel: its feeds add as complex pressures. Over panels, and over the direct path
and first reflections, magnitudes add, since positions are not known to a wavelength. Of the places
in a head the worst counts, on each path for itself.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.elements import resonance
from beamctl.acoustics.exposure import Band
from beamctl.acoustics.geometry import meets_rectangle
from beamctl.acoustics.transfer import Emitters, image, transfer
from beamctl.guard.points import HEAD_RADIUS_M, head_points, listeners
from beamctl.show.emission import emitters_of
from beamctl.show.house import Surface
from beamctl.show.show import Show

Array = NDArray[np.float64]
Phasors = NDArray[np.complex128]


class Path(NamedTuple):
    """One way from a panel to its listeners: direct, or by one surface.

    emitters  the panel, or its mirror image
    places_m  (R, 3) places in heads that this path reaches
    rise      (R,) factor for what lies between places
    starts    (L',) first row of each listener that it reaches
    who       (L',) those listeners
    """

    emitters: Emitters
    places_m: Array
    rise: Array
    starts: NDArray[np.int64]
    who: NDArray[np.int64]


class Field:
    """Pressures of one show's panels at its seats and crew points, (L,) in the house's order."""

    def __init__(self, show: Show, air: Air | None = None) -> None:
        self.listeners = listeners(show.house)
        self.panels = tuple(show.rig.panel)
        self.spread_s: dict[str, float] = {}  # between first and last cell to sound at a listener
        self._feeds = {name: cells.feeds for name, cells in show.cells.items()}
        self._resonances: dict[str, tuple[float, float]] = {}
        self._air = air or Air(**show.house.air.model_dump())
        self._paths: dict[str, list[Path]] = {}
        self._matrices: dict[tuple[str, float], NDArray[np.complex64]] = {}
        self._most: dict[tuple[str, float], Array] = {}
        self._bounds: dict[tuple[str, Band], NDArray[np.float32]] = {}
        for name, panel in show.rig.panel.items():
            emitters = emitters_of(panel, show.cells[name], self._air)
            speed_m_s = sound_speed_m_s(self._air)
            self._resonances[name] = emitters.resonance_hz, emitters.q
            width = speed_m_s / (panel.carrier_hz * aperture_m(emitters))
            paths = [self._path(emitters, width, None)]
            for surface in show.house.surface.values():
                edges = surface.corner_m, surface.along_m, surface.up_m
                mirrored = image(emitters, *edges, surface.reflection)
                paths.append(self._path(mirrored, width, surface))
            self._paths[name] = paths
            self.spread_s[name] = max(_spread_m(path) for path in paths) / speed_m_s

    def answer(self, panel: str, frequency_hz: Array) -> Array:
        """Size (...) of the cells' answer, 1 at their resonance, which `power_pa2` has in it."""
        return np.abs(resonance(frequency_hz, *self._resonances[panel]))

    def power_pa2(
        self, panel: str, frequency_hz: float, vectors: Phasors | NDArray[np.complex64]
    ) -> Array:
        """Mean square pressure (L, S) in Pa² of a panel driven with S sets of feed phasors.

        vectors  (F, S, K): the K vectors of a set sound independently, their powers add. A unit
                 phasor is a full-scale sine on a feed.
        """
        feeds, sets, count = vectors.shape
        flat = vectors.reshape(feeds, sets * count).astype(np.complex64, copy=False)
        pressure = self.at_places(panel, frequency_hz, flat)
        square = pressure.real**2 + pressure.imag**2
        return self.heard_pa2(panel, square.reshape(sets, count, square.shape[1]).sum(axis=1))

    def at_places(
        self, panel: str, frequency_hz: float, vectors: NDArray[np.complex64]
    ) -> NDArray[np.complex64]:
        """Complex pressure (K, R) of vectors (F, K) at the places of all paths, for `heard_pa2`."""
        return np.ascontiguousarray(vectors.T) @ self._matrix(panel, frequency_hz)

    def most_pa2(self, panel: str, frequency_hz: float) -> Array:
        """Mean square pressure (L,) that no pattern of unit drive passes, whatever its phases.

        Unit drive: the squares of the feeds' phasors sum to 1 (Cauchy-Schwarz).
        """
        key = panel, frequency_hz
        if key not in self._most:
            matrix = self._matrix(*key)
            power = np.sum(matrix.real**2 + matrix.imag**2, axis=0)
            self._most[key] = self.heard_pa2(panel, power[np.newaxis])[:, 0]
        return self._most[key]

    def bound_pa2(self, panel: str, band: Band, rms: Array) -> Array:
        """Mean square pressure (L,) that feeds of `rms` (F,) in a band never pass, by the triangle.

        Re full-scale sines. Every feed counts with the loudest of the band's edges and middle, and
        with the most that its cells answer to anywhere in the band.
        """
        return np.asarray((self._bound(panel, band) @ rms.astype(np.float32)) ** 2, np.float64)

    def heard_pa2(self, panel: str, power: NDArray[np.float32]) -> Array:
        """Mean squares (L, S) of those (S, R) at places: worst in a head, paths by magnitude."""
        total = np.zeros((len(self.listeners), len(power)))
        row = 0
        for path in self._paths[panel]:
            there = power[:, row : row + len(path.places_m)]
            worst = np.maximum.reduceat(there, path.starts, axis=1)
            total[path.who] += np.sqrt(worst, dtype=np.float64).T
            row += len(path.places_m)
        return total**2

    # -- inside ----------------------------------------------------------------------------------

    def _path(self, emitters: Emitters, width: float, surface: Surface | None) -> Path:
        source_m = emitters.at_m.mean(axis=0)
        places, rises, starts, who = [], [], [], []
        rows = 0
        reach_m = 0.5 * float(np.max(np.ptp(emitters.at_m, axis=0))) + HEAD_RADIUS_M
        for number, listener in enumerate(self.listeners):
            ear_m = np.array(listener.at_m)
            if surface is not None and not _meets(source_m, ear_m, surface, reach_m):
                continue
            points, rise = head_points(ear_m, source_m, width)
            places.append(points)
            rises.append(rise)
            starts.append(rows)
            who.append(number)
            rows += len(points)
        return Path(
            emitters,
            np.concatenate(places) if places else np.zeros((0, 3)),
            np.concatenate(rises) if rises else np.zeros(0),
            np.array(starts, np.int64),
            np.array(who, np.int64),
        )

    def _matrix(self, panel: str, frequency_hz: float) -> NDArray[np.complex64]:
        """Pressure per feed phasor (F, R) at the places of all paths, one path after the other."""
        key = panel, frequency_hz
        if key not in self._matrices:
            lots = [
                transfer(path.places_m, path.emitters, self._air, frequency_hz).T * path.rise
                for path in self._paths[panel]
            ]
            whole = np.concatenate(lots, axis=1, dtype=np.complex64)
            self._matrices[key] = np.ascontiguousarray(whole)  # few vectors at many places
        return self._matrices[key]

    def _bound(self, panel: str, band: Band) -> NDArray[np.float32]:
        key = panel, band
        if key not in self._bounds:
            found = np.zeros((len(self.listeners), self._feeds[panel]))
            nearest_hz = np.clip(self._resonances[panel][0], band.low_hz, band.high_hz)
            answer = self.answer(panel, np.asarray(nearest_hz))
            for path in self._paths[panel]:
                ears_m = path.places_m[path.starts]
                size = answer * np.max(
                    [
                        np.abs(transfer(ears_m, path.emitters._replace(q=0.0), self._air, hz))
                        for hz in (band.low_hz, band.mid_hz, band.high_hz)
                    ],
                    axis=0,
                )
                away_m = np.linalg.norm(ears_m - path.emitters.at_m.mean(axis=0), axis=-1)
                nearer = away_m / np.maximum(away_m - HEAD_RADIUS_M, 0.5 * away_m)
                found[path.who] += size * nearer[:, np.newaxis]
            self._bounds[key] = found.astype(np.float32)
        return self._bounds[key]


def aperture_m(emitters: Emitters) -> float:
    """Extent of the live cells, a cell's width included."""
    live = emitters.at_m[emitters.strength_pa_m != 0.0]
    apart = np.linalg.norm(live - live.mean(axis=0), axis=1) if len(live) else np.zeros(1)
    return 2.0 * float(np.max(apart)) + max(emitters.diameter_m, 1e-3)


def _spread_m(path: Path) -> float:
    """The most that cells differ in their distance to an ear of this path; 0 without one."""
    ears_m = path.places_m[path.starts]
    nearest, farthest = np.full(len(ears_m), np.inf), np.zeros(len(ears_m))
    for cell_m in path.emitters.at_m:
        distance_m = np.linalg.norm(ears_m - cell_m, axis=1)
        np.minimum(nearest, distance_m, out=nearest)
        np.maximum(farthest, distance_m, out=farthest)
    return float(np.max(farthest - nearest, initial=0.0))


def _meets(source_m: Array, ear_m: Array, surface: Surface, reach_m: float) -> bool:
    """True when a line from any cell's image to any place in a head could meet the surface."""
    along, up = np.array(surface.along_m), np.array(surface.up_m)
    wide, high = float(np.linalg.norm(along)), float(np.linalg.norm(up))
    more_along, more_up = along * reach_m / wide, up * reach_m / high
    corner = np.array(surface.corner_m) - more_along - more_up
    return meets_rectangle(source_m, ear_m, corner, along + 2.0 * more_along, up + 2.0 * more_up)
