"""How a value moves: glides of level, depth and reach, and travels of aim, by absolute sample.

Every function here is plain scalar arithmetic on a row of float64, so that the player evaluates it
as it stands and the engine compiles the same source (`register_jitable` marks it, no more): what
the desk shows is what the panels do.

A value never jumps in slope either. A glide that takes over from a moving one keeps the old slope
and lets it die away (`carry`), because a step in the slope of a carrier is a click once the air
has squared it.

Rows:
    scalar  [start, n, from, to, slope, carry_n]
    travel  [start, n, kind, from xyz, to xyz, slope xyz, carry_n, ease]; kind ARC: unit vectors,
            along the great circle; kind LINE: points in metres, straight, at constant speed
    reach   scalar row + [from_follows, to_follows]; a side that follows uses 1/distance of a LINE
"""

from __future__ import annotations

from math import acos, cos, pi, sin, sqrt
from typing import Any

import numpy as np
from numba.extending import register_jitable
from numpy.typing import NDArray

Row = NDArray[np.float64]

START, N, FROM, TO, SLOPE, CARRY_N = range(6)
FROM_FOLLOWS, TO_FOLLOWS = 6, 7
SCALAR_SIZE, REACH_SIZE, TRAVEL_SIZE = 6, 8, 14

KIND, AT, GOAL, DRIFT, DRIFT_N, EASE = 2, 3, 6, 9, 12, 13
ARC, LINE = 0.0, 1.0


@register_jitable
def raised_cosine(u: float) -> float:
    """0 to 1 as u goes from 0 to 1, flat at both ends."""
    if u <= 0.0:
        return 0.0
    if u >= 1.0:
        return 1.0
    return 0.5 - 0.5 * cos(pi * u)


@register_jitable
def carry(t: float, n: float) -> float:
    """Displacement left by an old slope of 1, `t` samples on: slope 1 at 0, gone after n."""
    if t >= n or t <= 0.0:
        return 0.0
    rest = 1.0 - t / n
    return t * rest * rest


@register_jitable
def eased_travel(u: float, ease: float) -> float:
    """Share of the way at share u of the time: constant speed, eased over `ease` at each end."""
    if u <= 0.0:
        return 0.0
    if u >= 1.0:
        return 1.0
    speed = 1.0 / (1.0 - ease)
    if u < ease:
        return 0.5 * speed * (u - ease / pi * sin(pi * u / ease))
    if u > 1.0 - ease:
        v = 1.0 - u
        return 1.0 - 0.5 * speed * (v - ease / pi * sin(pi * v / ease))
    return speed * (u - 0.5 * ease)


@register_jitable
def scalar_at(row: Any, sample: float) -> float:
    """Value of a scalar row at an absolute sample."""
    t = sample - row[0]
    u = t / row[1] if row[1] > 0.0 else 1.0
    share = raised_cosine(u)
    value = row[2] + (row[3] - row[2]) * share if share < 1.0 else row[3]
    return value + row[4] * carry(t, row[5])  # type: ignore[no-any-return]


@register_jitable
def take_over(row: Any, sample: float, n: float, goal: float, shortest: float) -> None:
    """Send a scalar row from wherever it is to `goal` over n samples, keeping its slope at first.

    An old slope dies away over `shortest` samples, or less where it would carry the value below
    zero: k s (1 - s)² ≤ cos²(π s / 2) for k ≤ (π/2)².
    """
    value = scalar_at(row, sample)
    slope = scalar_at(row, sample + 1.0) - value
    if abs(slope) < 1e-15:
        slope = 0.0
    over = shortest
    if slope < 0.0:
        over = min(shortest, 2.4 * value / -slope)
    row[0], row[1], row[2], row[3], row[4] = sample, n, value, goal, slope
    row[5] = over if slope != 0.0 else 0.0


@register_jitable
def is_settled(row: Any, sample: float) -> bool:
    """True when a scalar row no longer changes at or after `sample`."""
    t = sample - row[0]
    return (t >= row[1] or row[2] == row[3]) and (t >= row[5] or row[4] == 0.0)  # type: ignore[no-any-return]


@register_jitable
def travel_at(row: Any, sample: float) -> tuple[float, float, float, float]:
    """Unit direction (right, out, up) and distance in metres (0 for ARC) of a travel row."""
    t = sample - row[0]
    u = eased_travel(t / row[1], row[13]) if row[1] > 0.0 else 1.0
    ax, ay, az, bx, by, bz = row[3], row[4], row[5], row[6], row[7], row[8]
    fa, fb = 1.0 - u, u
    if row[2] == 0.0:
        angle = acos(min(1.0, max(-1.0, ax * bx + ay * by + az * bz)))
        if angle > 1e-9:
            fa, fb = sin((1.0 - u) * angle) / sin(angle), sin(u * angle) / sin(angle)
    x, y, z = fa * ax + fb * bx, fa * ay + fb * by, fa * az + fb * bz
    size = sqrt(x * x + y * y + z * z)
    distance = size if row[2] != 0.0 else 0.0
    drift = carry(t, row[12])
    x, y, z = x / size + drift * row[9], y / size + drift * row[10], z / size + drift * row[11]
    size = sqrt(x * x + y * y + z * z)
    return x / size, y / size, z / size, distance


@register_jitable
def travel_settled(row: Any, sample: float) -> bool:
    """True when a travel row no longer changes at or after `sample`."""
    t = sample - row[0]
    return t >= row[1] and t >= row[12]  # type: ignore[no-any-return]


@register_jitable
def reach_settled(row: Any, sample: float) -> bool:
    """True when a reach row changes no more by itself; one that follows still moves with the aim.

    Its FROM and TO say nothing where a side follows, so equal ones do not make it settled.
    """
    t = sample - row[0]
    return t >= row[1] and (t >= row[5] or row[4] == 0.0)  # type: ignore[no-any-return]


@register_jitable
def reach_at(row: Any, sample: float, distance_m: float) -> float:
    """Focus in 1/metres (0 is far) of a reach row, for a beam whose target is `distance_m` off."""
    near = 1.0 / distance_m if distance_m > 0.0 else 0.0
    t = sample - row[0]
    u = raised_cosine(t / row[1] if row[1] > 0.0 else 1.0)
    a = near if row[6] != 0.0 else row[2]
    b = near if row[7] != 0.0 else row[3]
    value = a + (b - a) * u + row[4] * carry(t, row[5])
    return value if value > 0.0 else 0.0
