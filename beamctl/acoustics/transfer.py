"""The field of a panel: complex pressure at points of the room per unit of each feed.

The product's only field model. Every cell is a small piston that radiates into the half space in
front of it; cells add as complex pressures; time goes as exp(+jwt). Walls enter as mirror-image
panels, one reflection each.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from beamctl.acoustics.air import Air, absorption_db_m, sound_speed_m_s
from beamctl.acoustics.cells import CellMap
from beamctl.acoustics.elements import piston, resonance
from beamctl.acoustics.geometry import Frame, mirror_direction, mirror_point, to_room

REFERENCE_PA = 20e-6
DB_PER_NEPER = 20.0 * np.log10(np.e)
NEAREST_M = 1e-3  # a point closer to a cell hears it as from here: 1/r has no meaning inside it
PAIR_BYTES = 160  # working memory per pair of a point and a cell
WORKING_BYTES = 32 * 2**20


class Emitters(NamedTuple):
    """The cells of one panel, or of one mirror image, as sources in the room.

    at_m           (N, 3) positions, room axes
    facing         (3,) unit direction of every cell's axis, room axes
    feed           (N,) feed of each cell, from 0
    feeds          F, how many feeds the panel takes
    strength_pa_m  (N,) complex: rms pressure times distance on the cell's axis, at its resonance,
                   for a full-scale sine on its feed; polarity and phase lead in it, 0 when dead
    diameter_m     active diameter of a cell; 0 radiates alike into the whole front half space
    resonance_hz   of every cell
    q              of the resonance; 0 answers alike at every frequency
    """

    at_m: NDArray[np.float64]
    facing: NDArray[np.float64]
    feed: NDArray[np.int64]
    feeds: int
    strength_pa_m: NDArray[np.complex128]
    diameter_m: float
    resonance_hz: float
    q: float


def cell_strength_pa_m(level_db_30cm_10v: float, volts: float) -> float:
    """Rms pressure times distance of a cell driven with `volts` rms, from its data sheet's level.

    The level is that of one cell on its axis at 0.3 m with 10 V rms, re 20 µPa. What the air took
    on those 0.3 m (about 0.4 dB at 40 kHz) is not put back.
    """
    return float(REFERENCE_PA * 10.0 ** (level_db_30cm_10v / 20.0) * 0.3 * volts / 10.0)


def panel_emitters(
    cells: CellMap,
    frame: Frame,
    strength_pa_m: float,
    diameter_m: float,
    resonance_hz: float,
    q: float,
) -> Emitters:
    """The cells of a panel as sources where it hangs; `strength_pa_m` as `cell_strength_pa_m`."""
    turned = cells.polarity * np.exp(1j * np.deg2rad(cells.phase_deg))
    return Emitters(
        at_m=to_room(frame, cells.at_m),
        facing=frame.out,
        feed=cells.feed,
        feeds=cells.feeds,
        strength_pa_m=np.where(cells.dead, 0.0, strength_pa_m * turned),
        diameter_m=diameter_m,
        resonance_hz=resonance_hz,
        q=q,
    )


def image(
    emitters: Emitters,
    corner_m: ArrayLike,
    along_m: ArrayLike,
    up_m: ArrayLike,
    reflection: float,
) -> Emitters:
    """The mirror image of a panel in a flat surface that returns `reflection` of the pressure.

    It sounds only at points whose straight line from the image meets the surface: the caller's
    matter, with `geometry.meets_rectangle`.
    """
    return emitters._replace(
        at_m=mirror_point(emitters.at_m, corner_m, along_m, up_m),
        facing=mirror_direction(emitters.facing, along_m, up_m),
        strength_pa_m=emitters.strength_pa_m * reflection,
    )


def transfer(
    points_m: NDArray[np.float64], emitters: Emitters, air: Air, frequency_hz: float
) -> NDArray[np.complex128]:
    """Rms pressure in pascals at points (P, 3) per unit phasor of each feed, (P, F) complex.

    Each cell adds strength · D(theta) · H(f) · exp(-(jk + a) r) / r, where D is the piston's
    directivity (0 behind the panel), H its resonance, a the air's amplitude absorption in Np/m.
    Works through the points in lots, so that working memory stays near 32 MB.
    """
    order = np.argsort(emitters.feed, kind="stable")
    present, starts = np.unique(emitters.feed[order], return_index=True)
    at_m, strength = emitters.at_m[order], emitters.strength_pa_m[order]
    if emitters.q > 0.0:
        strength = strength * resonance(frequency_hz, emitters.resonance_hz, emitters.q)
    wavenumber = 2.0 * np.pi * frequency_hz / sound_speed_m_s(air)
    decay = float(absorption_db_m(frequency_hz, air)) / DB_PER_NEPER
    reach = 0.5 * wavenumber * emitters.diameter_m
    found = np.zeros((len(points_m), emitters.feeds), dtype=np.complex128)
    for lot in _lots(len(points_m), len(at_m)):
        distance_m, cosine = _sight(points_m[lot], at_m, emitters.facing)
        sine = np.sqrt(np.maximum(0.0, 1.0 - cosine**2))
        gain = np.where(cosine >= 0.0, piston(reach * sine), 0.0) / distance_m
        pressure = gain * strength * np.exp(-(1j * wavenumber + decay) * distance_m)
        found[lot, present] = np.add.reduceat(pressure, starts, axis=1)
    return found


def _sight(
    points_m: NDArray[np.float64], at_m: NDArray[np.float64], facing: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Distance and cosine off the cells' axis, both (P, N), from every cell to every point."""
    offset = points_m[:, np.newaxis, :] - at_m
    distance_m = np.maximum(np.linalg.norm(offset, axis=-1), NEAREST_M)
    return distance_m, (offset @ facing) / distance_m


def _lots(points: int, cells: int) -> Iterator[slice]:
    """Slices over the points, each small enough for the working memory."""
    size = max(1, WORKING_BYTES // (PAIR_BYTES * cells))
    return (slice(start, start + size) for start in range(0, points, size))
