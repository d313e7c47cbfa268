"""The carrier's pressure over places of the room, worked out once and then asked for every aim.

As the guard adds: coherent within a panel; direct path and first reflections by magnitude.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.geometry import PARALLEL
from beamctl.acoustics.transfer import REFERENCE_PA, Emitters, image, transfer
from beamctl.forecast.panel import ReadyPanel
from beamctl.show.house import House, Surface

Array = NDArray[np.float64]
Phasors = NDArray[np.complex128]
LOWEST_PA = 1e-12


class FieldMap:
    """What each feed of one panel makes at points (P, 3) of the room, by every path."""

    def __init__(self, panel: ReadyPanel, house: House, points_m: Array) -> None:
        self._points = len(points_m)
        everywhere = np.arange(len(points_m))
        self._paths = [(everywhere, self._path(panel, panel.emitters, points_m))]
        for surface in house.surface.values():
            edges = surface.corner_m, surface.along_m, surface.up_m
            mirrored = image(panel.emitters, *edges, surface.reflection)
            lit = np.flatnonzero(_lit(mirrored.at_m.mean(axis=0), points_m, surface))
            self._paths.append((lit, self._path(panel, mirrored, points_m[lit])))

    def pressure_pa(self, drive: Phasors) -> Array:
        """Rms pressure (P,) for feeds driven with phasors (F,), a unit being a full-scale sine."""
        found = np.zeros(self._points)
        for lit, matrix in self._paths:
            found[lit] += np.abs(drive.astype(np.complex64) @ matrix)
        return found

    @staticmethod
    def _path(panel: ReadyPanel, emitters: Emitters, points_m: Array) -> NDArray[np.complex64]:
        """Pressure per feed (F, P): few vectors at many places."""
        found = transfer(points_m, emitters, panel.air, panel.spec.carrier_hz)
        return np.ascontiguousarray(found.T, dtype=np.complex64)


def level_db(pressure_pa: Array) -> Array:
    """Levels in dB re 20 µPa; silence is far below anything, not an error."""
    return np.asarray(20.0 * np.log10(np.maximum(pressure_pa, LOWEST_PA) / REFERENCE_PA))


def _lit(source_m: Array, points_m: Array, surface: Surface) -> NDArray[np.bool_]:
    """(P,) whether the straight line from a mirror image to each point passes its surface."""
    along, up = np.array(surface.along_m), np.array(surface.up_m)
    normal = np.cross(along, up)
    way = points_m - source_m
    off, rate = (np.array(surface.corner_m) - source_m) @ normal, way @ normal
    meets = np.abs(rate) > PARALLEL * np.linalg.norm(normal)
    share = np.divide(off, rate, out=np.full(len(points_m), -1.0), where=meets)
    there = source_m + share[:, np.newaxis] * way - np.array(surface.corner_m)
    inside = (share >= 0.0) & (share <= 1.0)
    for side in (along, up):
        part = there @ side / (side @ side)
        inside &= (part >= 0.0) & (part <= 1.0)
    return np.asarray(inside)
