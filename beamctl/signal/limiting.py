"""Gains that hold an analytic signal within 1, and its ends to silence."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import minimum_filter1d

CEILING = 1.0 - 2.0**-18
"""A hair under 1: more than float32 rounding of both parts can add (2**-23), 0.00003 dB."""


def limiter_gain(
    magnitude: NDArray[np.float64], rate_hz: float, lookahead_s: float
) -> NDArray[np.float64]:
    """(n,) smooth gain under which (n,) magnitudes stay below 1, in float32 too.

    The gain each sample needs is held as a running minimum over half the look-ahead either way
    and averaged under a Hann window of the same length. Every value that enters the average at a
    sample is then no larger than what that sample needs, so neither is the average: the bound
    holds by construction, with no clipping behind it. The gain falls during `lookahead_s` ahead
    of a peak and recovers as long after it.
    """
    needed = CEILING / np.maximum(magnitude, CEILING)
    if needed.min(initial=1.0) == 1.0:
        return needed
    reach = max(1, round(lookahead_s * rate_hz / 2.0))
    held = np.pad(minimum_filter1d(needed, 2 * reach + 1, mode="nearest"), reach, mode="edge")
    window = np.hanning(2 * reach + 3)[1:-1]
    return np.convolve(held, window / window.sum(), mode="valid")


def edge_gain(length: int, rate_hz: float, edge_s: float) -> NDArray[np.float64]:
    """(length,) raised-cosine edges around ones, so that nothing begins or ends with a step.

    A signal shorter than two edges gets edges of half its length.
    """
    edge = min(round(edge_s * rate_hz), length // 2)
    gain = np.ones(length)
    gain[:edge] = np.sin(0.5 * np.pi * (np.arange(edge) + 0.5) / max(edge, 1)) ** 2
    gain[length - edge :] = gain[:edge][::-1]
    return gain
