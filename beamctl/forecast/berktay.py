"""What the air makes of a law at a depth, in the ideal far field, for one tone.

The audible pressure goes with the second time derivative of the squared envelope (Berktay, J. Sound
Vib. 2 (1965) 435). Cells, equaliser, band and nearness of the panel are left out.
"""

from __future__ import annotations

from functools import lru_cache
from typing import NamedTuple

import numpy as np

from beamctl.show.sheet import Law
from beamctl.signal.laws import LAW_NAMES, REST, envelope

POINTS = 256  # of one period: the squares of all laws but the root's own rounding end far below
HIGHEST = 19  # harmonic that is counted


class Heard(NamedTuple):
    """One full tone by one law.

    distortion       harmonics re the tone, by the root of their squares
    programme_db     the tone's level re that of `dsb` at full depth, at the same carrier
    carrier_rise_db  mean square of the ultrasound re the resting carrier, which a seat gets
    """

    distortion: float
    programme_db: float
    carrier_rise_db: float


@lru_cache(maxsize=512)
def heard(law: Law, depth: float) -> Heard:
    """One tone at a depth from 0 to 1; at depth 0 nothing is heard, and nothing is distorted."""
    turns = np.exp(2j * np.pi * np.arange(POINTS) / POINTS)
    number = LAW_NAMES.index(law)
    parts = [envelope(number, depth, x.real, x.imag) for x in turns]
    square = np.sum(np.square(parts), axis=1) / REST**2
    tones = np.abs(np.fft.rfft(square))[: HIGHEST + 1] * 2.0 / POINTS
    tones *= np.arange(HIGHEST + 1) ** 2  # two derivatives
    rise_db = float(10.0 * np.log10(square.mean()))
    if tones[1] <= 0.0:
        return Heard(0.0, -np.inf, rise_db)
    distortion = float(np.linalg.norm(tones[2:]) / tones[1])
    return Heard(distortion, float(20.0 * np.log10(tones[1] / 2.0)), rise_db)
