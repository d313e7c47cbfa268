"""Where a panel's beam really peaks: the field's own maximum, not the aim that was asked for."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.geometry import Frame, to_panel, to_room
from beamctl.acoustics.transfer import Emitters, transfer

FAR_M = 1000.0  # far for any panel here, and near enough that absorption leaves numbers to compare
COARSE = np.stack(np.meshgrid(*[np.linspace(-0.5, 0.5, 7)] * 2, indexing="ij"), -1).reshape(-1, 2)
STENCIL = np.stack(np.meshgrid(*[np.arange(-1.0, 2.0)] * 2, indexing="ij"), -1).reshape(-1, 2)
FINEST = 1e-4  # of a direction cosine; the parabola places the peak far inside it
LEVEL = 1e-9  # relative differences of power below this are no slope
MAX_STEPS = 200

Power = Callable[[NDArray[np.float64]], NDArray[np.float64]]


def predicted_peak(
    emitters: Emitters,
    frame: Frame,
    drive: NDArray[np.complex128],
    near: NDArray[np.float64],
    air: Air,
    frequency_hz: float,
    range_m: float | None = None,
) -> NDArray[np.float64]:
    """Unit direction (3,), panel axes, of the beam's peak nearest the asked direction `near` (3,).

    drive    (F,) complex phasors of the feeds, as `steering.feed_drive`
    range_m  radius of the sphere about the panel's centre that is searched; None is the far field

    Cell directivity and loom pull the peak off the asked aim. The search starts within half a
    lobe of `near` and climbs, so it stays on the main lobe as long as `near` lies on it: in an
    axis that the loom cannot steer, ask for 0. Good to 0.02 degree for aims up to 80 degrees.
    """
    lobe = _lobe_width(emitters, frame, frequency_hz, sound_speed_m_s(air))
    radius_m = FAR_M if range_m is None else range_m

    def power(cosines: NDArray[np.float64]) -> NDArray[np.float64]:
        inside = np.sum(cosines**2, axis=-1) < 1.0
        points_m = to_room(frame, radius_m * _directions(cosines))
        pressure = transfer(points_m, emitters, air, frequency_hz) @ drive
        return np.where(inside, np.abs(pressure), 0.0) ** 2

    asked = np.asarray(near)[[0, 2]] / np.linalg.norm(near)
    start, _ = _uphill(power, asked + COARSE * lobe)
    return _directions(_climb(power, start, 0.1 * lobe))


def _climb(
    power: Power, start: NDArray[np.float64], step: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Direction cosines (2,) of the maximum of `power` uphill from `start` (2,).

    Walks to the best of a 3 by 3 stencil; when that is its middle, places the vertex of a parabola
    along each axis and narrows the stencil.
    """
    here = start
    for _ in range(MAX_STEPS):
        best, around = _uphill(power, here + STENCIL * step)
        if np.any(best != here):
            here = best
            continue
        here = here + step * (_vertex(*around[[1, 4, 7]]), _vertex(*around[[3, 4, 5]]))
        if np.max(step) < FINEST:
            break
        step = step / 3.0
    return here


def _uphill(
    power: Power, tried: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """The strongest of the `tried` (M, 2), the middle one when level; and every power (M,)."""
    powers = power(tried)
    best, middle = int(np.argmax(powers)), len(tried) // 2
    rises = powers[best] > powers[middle] * (1.0 + LEVEL)
    return tried[best if rises else middle], powers


def _vertex(low: float, middle: float, high: float) -> float:
    """Place of a parabola's top through values at -1, 0, 1; 0 where they are level."""
    bend = 2.0 * middle - low - high
    if bend <= LEVEL * middle:
        return 0.0
    return float(np.clip(0.5 * (high - low) / bend, -1.0, 1.0))


def _directions(cosines: NDArray[np.float64]) -> NDArray[np.float64]:
    """Unit directions (..., 3) in front of the panel from their right and up parts (..., 2)."""
    out = np.sqrt(np.maximum(0.0, 1.0 - np.sum(cosines**2, axis=-1)))
    return np.stack((cosines[..., 0], out, cosines[..., 1]), axis=-1)


def _lobe_width(
    emitters: Emitters, frame: Frame, frequency_hz: float, sound_speed_m_s: float
) -> NDArray[np.float64]:
    """Wavelength over aperture in right and up, (2,): from a lobe's peak to its first null."""
    wavelength_m = sound_speed_m_s / frequency_hz
    extent_m = np.ptp(to_panel(frame, emitters.at_m), axis=0)[[0, 2]]
    return np.asarray(wavelength_m / (extent_m + wavelength_m), dtype=np.float64)
