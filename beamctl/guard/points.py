"""Who is listened for: every seat and crew point, and the places inside a head around each."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.show.house import House

HEAD_RADIUS_M = 0.25
SPACING = 0.3  # of places in a head, in widths of the beam there (wavelength over aperture)
RINGS = 12  # at most, of places around a head's middle


class Listener(NamedTuple):
    """One seat or crew point; `at_m` is between the ears, room axes."""

    name: str  # "stalls B4"
    seat: str
    block: str
    crew: bool
    at_m: tuple[float, float, float]


def listeners(house: House) -> tuple[Listener, ...]:
    """Every seat and crew point of the house, in its order."""
    return tuple(
        Listener(f"{name} {seat}", seat, name, block.class_ == "crew", at_m)
        for name, block in house.block.items()
        for seat, at_m in block.seat_points().items()
    )


def head_points(
    ear_m: NDArray[np.float64], source_m: NDArray[np.float64], width_per_m: float
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Places (K, 3) in one head that a beam from `source_m` could peak at, and their rise (K,).

    width_per_m  wavelength over aperture: the beam's width at a distance of 1 m

    The middle first, then a hexagonal lattice over the head's front half sphere as seen from the
    source. `rise` is the pressure that a peak midway between lattice places has over theirs: with
    it no beam that passes between them is missed (main lobe of a line source, sin x / x); of side
    lobes, which turn faster, up to 1 dB can be.
    """
    way = ear_m - source_m
    distance_m = float(np.linalg.norm(way))
    toward = way / distance_m if distance_m > 0.0 else np.array((0.0, 1.0, 0.0))
    width_m = width_per_m * max(distance_m, HEAD_RADIUS_M)
    spacing_m = max(SPACING * width_m, HEAD_RADIUS_M / RINGS)
    offsets = _lattice(spacing_m)
    depth_m = np.sqrt(np.maximum(HEAD_RADIUS_M**2 - np.sum(offsets**2, axis=-1), 0.0))
    front = ear_m + offsets @ _across(toward) - depth_m[:, np.newaxis] * toward
    gap_m = min(spacing_m / np.sqrt(3.0), HEAD_RADIUS_M)
    rise = 1.0 / max(float(np.sinc(min(gap_m / width_m, 0.6))), 0.5)
    places = np.concatenate((ear_m[np.newaxis], front))
    return places, np.concatenate(([1.0], np.full(len(front), rise)))


def _lattice(spacing_m: float) -> NDArray[np.float64]:
    """Offsets (K, 2) of a hexagonal lattice, pulled in so that it covers the head to its edge.

    No place within the head's radius is farther than spacing / √3 from one of them.
    """
    reach_m = HEAD_RADIUS_M + spacing_m / np.sqrt(3.0)
    count = int(2.0 * reach_m / np.sqrt(3.0) / spacing_m)
    i, j = np.meshgrid(*[np.arange(-2 * count, 2 * count + 1)] * 2, indexing="ij")
    offsets = spacing_m * np.stack((i + 0.5 * j, np.sqrt(0.75) * j), axis=-1).reshape(-1, 2)
    apart_m = np.linalg.norm(offsets, axis=-1)
    near = apart_m <= reach_m
    inward = HEAD_RADIUS_M / np.maximum(apart_m[near], HEAD_RADIUS_M)
    return np.asarray(offsets[near] * inward[:, np.newaxis])


def _across(unit: NDArray[np.float64]) -> NDArray[np.float64]:
    """Two unit vectors (2, 3) across a direction."""
    helper = np.eye(3)[int(np.argmin(np.abs(unit)))]
    first = np.cross(unit, helper)
    first /= np.linalg.norm(first)
    return np.stack((first, np.cross(unit, first)))
