"""Laws: how programme becomes the carrier's envelope. Pointwise, every rest envelope is 0.5.

With x the programme, x̂ its Hilbert transform, |x + j x̂| ≤ 1, and m the depth, 2 e is

    dsb    1 + m x                              second harmonic = m in the far field
    root   √(1 + m x)                           squares to 1 + m x: no harmonics
    ssb    1 + m (x + j x̂)                      squares to 1 + 2 m x + m² for one tone
    mam    (1 + m x + j (1 - m² x² / 2)) / (1 + j)   quadrature pair, first order

since the air gives back the second time derivative of |e|² (Berktay, J. Sound Vib. 2 (1965) 435).
The rest envelope is real and the same for all, so that laws cross-fade without a step.
"""

from __future__ import annotations

from math import sqrt

from numba.extending import register_jitable

LAW_NAMES = ("dsb", "root", "ssb", "mam")
DSB, ROOT, SSB, MAM = range(4)
REST = 0.5


@register_jitable
def envelope(law: int, depth: float, x: float, hilbert_x: float) -> tuple[float, float]:
    """In-phase and quadrature envelope of one sample; plain arithmetic, compiled by the engine."""
    mx = depth * x
    if law == DSB:
        return 0.5 + 0.5 * mx, 0.0
    if law == ROOT:
        return 0.5 * sqrt(max(0.0, 1.0 + mx)), 0.0
    if law == SSB:
        return 0.5 + 0.5 * mx, 0.5 * depth * hilbert_x
    # (a + j b) / (1 + j) = ((a + b) + j (b - a)) / 2
    a, b = 1.0 + mx, 1.0 - 0.5 * mx * mx
    return 0.25 * (a + b), 0.25 * (b - a)
