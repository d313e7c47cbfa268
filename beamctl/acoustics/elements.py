"""What one cell does by itself: its directivity and its resonance."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import j1

ON_AXIS = 1e-8  # below this 2 J1(x)/x is 1 to the last digit


def piston(x: ArrayLike) -> NDArray[np.float64]:
    """Directivity (...) of a circular piston in a baffle: 2 J1(x)/x, and 1 at x = 0.

    x = k a sin(theta) for wavenumber k, radius a and angle theta off the axis
    (Kinsler et al., Fundamentals of Acoustics; Beranek & Mellow, Acoustics, ch. 13).
    """
    x = np.asarray(x, dtype=np.float64)
    found = np.ones_like(x)
    np.divide(2.0 * j1(x), x, out=found, where=np.abs(x) > ON_AXIS)
    return found


def resonance(frequency_hz: ArrayLike, resonance_hz: float, q: float) -> NDArray[np.complex128]:
    """Complex response (...) of a single resonance, 1 at `resonance_hz`, for exp(+jwt).

    1 / (1 + jQ (f/f0 - f0/f)), the velocity of a driven simple resonator (Kinsler et al., ch. 1).
    """
    f = np.asarray(frequency_hz, dtype=np.float64)
    return np.asarray(1.0 / (1.0 + 1j * q * (f / resonance_hz - resonance_hz / f)))
