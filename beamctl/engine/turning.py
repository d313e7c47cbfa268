"""Compiled: cosine and sine of a phase given in turns, in a form the compiler can widen.

The library's own cosine and sine cost about 10 ns each and cannot run side by side in one wide
register. Here the turn is brought to |x| <= 1/2 and the half angle πx is taken by its Taylor
series to x¹⁵, whose rest is (π/2)¹⁶/16! = 7e-11, then doubled: cos 2a = 1 - 2 sin² a,
sin 2a = 2 sin a cos a.
"""

from __future__ import annotations

from math import factorial, floor, pi

from beamctl.engine.compiled import compiled
from beamctl.engine.fused import fma

C1, C2, C3, C4, C5, C6, C7 = ((-1.0) ** k * pi ** (2 * k) / factorial(2 * k) for k in range(1, 8))
S0, S1, S2, S3, S4, S5, S6, S7 = (
    (-1.0) ** k * pi ** (2 * k + 1) / factorial(2 * k + 1) for k in range(8)
)


@compiled
def turn(turns):
    """(cos 2π turns, sin 2π turns)."""
    x = turns - floor(turns + 0.5)
    y = x * x
    c = fma(y, fma(y, fma(y, fma(y, fma(y, fma(y, C7, C6), C5), C4), C3), C2), C1)
    c = fma(y, c, 1.0)
    s = fma(y, fma(y, fma(y, fma(y, fma(y, fma(y, S7, S6), S5), S4), S3), S2), S1)
    s = x * fma(y, s, S0)
    return 1.0 - 2.0 * s * s, 2.0 * s * c
