"""Where a ray from a panel goes in the room: past whom, off which surface, to what end.

One reflection is followed, as the guard follows one. A surface that nobody declared stops nothing.
"""

from __future__ import annotations

from itertools import pairwise
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.geometry import mirror_direction
from beamctl.guard.points import HEAD_RADIUS_M, listeners
from beamctl.show.house import Surface
from beamctl.show.show import Show

HALF_POWER = 0.443  # of wavelength over aperture, from a beam's axis to half its power
SHORTEST_M = 1e-6  # a ray that leaves a surface does not meet it again
BEYOND = 2.0  # times the way to the farthest thing declared: there a ray is let go

Array = NDArray[np.float64]
Point = tuple[float, float, float]


class Landing(NamedTuple):
    """The way (2 to 4 points, room axes, metres) of a ray from the panel to where it lands.

    off  the surface it came off, "" when it came straight
    at   "stalls B4", "spot buffer", the surface it ends at, "the floor"; "" when it meets nothing
    """

    way_m: tuple[Point, ...]
    off: str
    at: str


class Room:
    """A show's room, looked through for many rays."""

    def __init__(self, show: Show) -> None:
        house = show.house
        people = listeners(house)
        self._names = [*(who.name for who in people), *(f"spot {name}" for name in house.spot)]
        at_m = [*(who.at_m for who in people), *(spot.at_m for spot in house.spot.values())]
        self._at_m = np.array(at_m, np.float64).reshape(-1, 3)
        self._surfaces = house.surface
        sides = [(s.corner_m, s.along_m, s.up_m) for s in house.surface.values()]
        corner, along, up = np.array(sides, np.float64).reshape(-1, 3, 3).transpose(1, 0, 2)
        self._corners_m, self._normals = corner, np.cross(along, up)
        self._edges = along / _square(along), up / _square(up)  # at right angles
        self._all_m = places_m(show)
        self.floor_m = min(0.0, float(self._all_m[:, 2].min()))

    def landing(self, start_m: Array, direction: Array, width_per_m: float = 0.0) -> Landing:
        """Where a ray lands: with whoever it passes nearest, else where it ends.

        direction    (3,) unit, room axes
        width_per_m  wavelength over aperture; nobody farther off its axis than half power, and a
                     head more, is said to be met
        """
        ways, off, end = self._trace(start_m, direction)
        met = self._met(ways, width_per_m)
        if met is None:
            return Landing(tuple(map(_point, ways)), off, end)
        leg, name, at_m = met
        way = (*ways[: leg + 1], at_m)
        return Landing(tuple(map(_point, way)), off if leg else "", name)

    def _trace(self, start_m: Array, direction: Array) -> tuple[list[Array], str, str]:
        """Ends of the legs, the surface between two of them, and what is met last."""
        here, way = np.asarray(start_m, np.float64), np.asarray(direction, np.float64)
        far_m = BEYOND * float(np.linalg.norm(self._all_m - here, axis=1).max())
        ways, off = [here], ""
        while True:
            ahead_m, name = self._next(here, way, far_m)
            here = here + ahead_m * way
            ways.append(here)
            if off or name not in self._surfaces:
                return ways, off, name
            surface = self._surfaces[name]
            off, way = name, mirror_direction(way, surface.along_m, surface.up_m)

    def _next(self, here: Array, way: Array, far_m: float) -> tuple[float, str]:
        """How far it is to what the ray meets next, and what that is."""
        found = [(far_m, "")]
        if way[2] < 0.0 and (down_m := (self.floor_m - here[2]) / way[2]) > SHORTEST_M:
            found.append((down_m, "the floor"))
        found += zip(self._ahead_m(here, way).tolist(), self._surfaces, strict=True)
        return min(found)

    def _ahead_m(self, here: Array, way: Array) -> Array:
        """How far ahead the ray meets each surface; infinity where it does not."""
        rate = self._normals @ way
        away = np.sum((self._corners_m - here) * self._normals, axis=1)
        ahead = np.divide(away, rate, out=np.full(len(rate), np.inf), where=rate != 0.0)
        meets = np.isfinite(ahead) & (ahead > SHORTEST_M)
        there = here + np.where(meets, ahead, 0.0)[:, np.newaxis] * way - self._corners_m
        for edge in self._edges:
            part = np.sum(there * edge, axis=1)
            meets &= (part >= 0.0) & (part <= 1.0)
        return np.where(meets, ahead, np.inf)

    def _met(self, ways: list[Array], width_per_m: float) -> tuple[int, str, Array] | None:
        """The one nearest to the ray's axis: on which leg, who, and where the ray passes."""
        best: tuple[float, int, str, Array] | None = None
        gone_m = 0.0
        for leg, (a, b) in enumerate(pairwise(ways)):
            span_m = float(np.linalg.norm(b - a))
            unit = (b - a) / max(span_m, SHORTEST_M)
            along = np.clip((self._at_m - a) @ unit, 0.0, span_m)
            on_axis = a + along[:, np.newaxis] * unit
            apart = np.linalg.norm(self._at_m - on_axis, axis=1)
            reach = HEAD_RADIUS_M + HALF_POWER * width_per_m * (gone_m + along)
            for n in np.flatnonzero(apart <= reach):
                if best is None or apart[n] < best[0]:
                    best = float(apart[n]), leg, self._names[n], on_axis[n]
            gone_m += span_m
        return None if best is None else best[1:]


def places_m(show: Show) -> Array:
    """Every place (P, 3) that the show declares: panels, seats, crew points, spots, corners."""
    house = show.house
    found = [panel.at_m for panel in show.rig.panel.values()]
    found += [who.at_m for who in listeners(house)]
    found += [spot.at_m for spot in house.spot.values()]
    corners = [corners_m(surface) for surface in house.surface.values()]
    return np.concatenate((np.array(found, np.float64), *corners))


def corners_m(surface: Surface) -> Array:
    """The corners (4, 3) of a surface, round its edge."""
    corner, along, up = (np.array(v) for v in (surface.corner_m, surface.along_m, surface.up_m))
    return np.stack((corner, corner + along, corner + along + up, corner + up))


def _square(sides: Array) -> Array:
    """Squared lengths (S, 1) of sides (S, 3)."""
    return np.asarray(np.sum(sides**2, axis=1, keepdims=True))


def _point(at_m: Array) -> Point:
    x, y, z = at_m.tolist()
    return x, y, z
