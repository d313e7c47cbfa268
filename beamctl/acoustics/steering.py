"""Delays that point and focus a panel, and the carrier phasors its feeds get for them.

Every cell's wave must reach the focus with the others, so a cell nearer the focus fires later: its
delay is a constant of the panel plus (|f| - |f - r_n|)/c, with focus f and cell r_n both measured
from the panel's centre. For a focus at infinity that is r_n·d/c, a plane wave toward d. The delays
are those of Ahrens, Analytic Methods of Sound Field Synthesis (2012), as in sfs-python's `td.wfs`.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.cells import CellMap

SLOWEST_AIR_M_S = 300.0  # below sound in any air of acoustics/air.py, so that no delay is negative


def path_lead_m(
    dot_m: NDArray[np.float64],
    square_m2: NDArray[np.float64],
    per_m: float | NDArray[np.float64],
) -> NDArray[np.float64]:
    """|f| - |f - r| in metres for f = d / per_m: how much shorter the cell's way is.

    dot_m      d·r, with d the unit direction of the focus
    square_m2  r·r
    per_m      1 / |f|, 0 for a focus at infinity

    With s = |d - per_m r| the difference is (1 - s)/per_m = (1 - s²)/(per_m (1 + s)); written out,
    per_m cancels, so one expression without a branch is exact near and far. Takes arrays that
    broadcast, or scalars when compiled by numba. `abs` catches only the rounding at f = r.
    """
    apart = np.sqrt(abs(1.0 - 2.0 * per_m * dot_m + per_m * per_m * square_m2))
    return (2.0 * dot_m - per_m * square_m2) / (1.0 + apart)


def base_delay_s(at_m: NDArray[np.float64]) -> float:
    """Delay in seconds of the centre of a panel with cells `at_m` (N, 3): a constant of the panel.

    The farthest cell's distance over the slowest air: every delay is >= 0 for every aim, and
    moving a beam never shifts time.
    """
    return float(np.sqrt(np.max(np.sum(at_m**2, axis=-1)))) / SLOWEST_AIR_M_S


def cell_delays_s(
    at_m: NDArray[np.float64],
    direction: NDArray[np.float64],
    per_m: float,
    sound_speed_m_s: float,
    base_s: float,
) -> NDArray[np.float64]:
    """Delay of every cell in seconds, (N,), for a beam to `direction` (3,), focused at 1/`per_m`.

    `at_m` (N, 3) and the unit `direction` are in panel axes. The cell nearest the aim fires last.
    """
    lead_m = path_lead_m(at_m @ direction, np.sum(at_m**2, axis=-1), per_m)
    return base_s + lead_m / sound_speed_m_s


def feed_drive(
    cells: CellMap, delays_s: NDArray[np.float64], carrier_hz: float
) -> NDArray[np.complex128]:
    """Carrier phasor of every feed, (F,) complex, in full scales per unit of beam gain.

    The mean over the feed's live cells of what each would want: its delay `delays_s` (N,) as a
    phase, its polarity turned over and its phase lead turned back; then the feed's trim.
    A feed without a live cell gets 0.
    """
    turn = 2.0 * np.pi * carrier_hz * delays_s + np.deg2rad(cells.phase_deg)
    wanted = cells.polarity * np.exp(-1j * turn)
    mean = _feed_mean(cells, wanted.real, 0.0) + 1j * _feed_mean(cells, wanted.imag, 0.0)
    return np.asarray(mean * 10.0 ** (cells.trim_db / 20.0), dtype=np.complex128)


def feed_delays_s(cells: CellMap, delays_s: NDArray[np.float64]) -> NDArray[np.float64]:
    """Envelope delay of every feed in seconds, (F,): the mean over its live cells' `delays_s` (N,).

    A feed without a live cell gets the panel's base delay.
    """
    return _feed_mean(cells, delays_s, base_delay_s(cells.at_m))


def _feed_mean(
    cells: CellMap, values: NDArray[np.float64], otherwise: float
) -> NDArray[np.float64]:
    """Mean of `values` (N,) over each feed's live cells, (F,); `otherwise` where none lives."""
    live = ~cells.dead
    count = np.bincount(cells.feed[live], minlength=cells.feeds)
    total = np.bincount(cells.feed[live], weights=values[live], minlength=cells.feeds)
    return np.where(count > 0, total / np.maximum(count, 1), otherwise)
