"""The limiter's bound, and what it leaves alone."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from beamctl.signal.limiting import edge_gain, limiter_gain

RATE_HZ = 96_000.0
LOOKAHEAD_S = 0.005

signals = arrays(
    np.complex128,
    st.integers(0, 1_500),
    elements=st.complex_numbers(max_magnitude=1e6, allow_nan=False, allow_infinity=False),
    fill=st.sampled_from([0j, 0.5 + 0j, 1.0 + 0j, 40j]),
)


def limited(signal: np.ndarray) -> np.ndarray:
    return signal * limiter_gain(np.abs(signal), RATE_HZ, LOOKAHEAD_S)


@given(signals)
def test_magnitude_never_exceeds_one_after_rounding(signal: np.ndarray) -> None:
    pairs = limited(signal).astype(np.complex64).view(np.float32).astype(np.float64)
    assert np.all(pairs[::2] ** 2 + pairs[1::2] ** 2 <= 1.0)


@given(signals)
def test_gain_stays_between_nothing_and_one(signal: np.ndarray) -> None:
    gain = limiter_gain(np.abs(signal), RATE_HZ, LOOKAHEAD_S)
    assert len(gain) == len(signal)
    assert np.all(gain > 0.0)
    assert np.all(gain <= 1.0 + 1e-12)


def test_a_signal_within_one_is_left_alone() -> None:
    signal = 0.999 * np.exp(1j * np.arange(4_000))
    np.testing.assert_array_equal(limited(signal), signal)


def test_one_peak_is_met_smoothly_and_only_nearby() -> None:
    magnitude = np.full(9_600, 0.9)
    magnitude[4_800] = 4.0
    gain = limiter_gain(magnitude, RATE_HZ, LOOKAHEAD_S)
    reach = round(LOOKAHEAD_S * RATE_HZ)
    assert 0.2499 < gain[4_800] < 0.25
    np.testing.assert_allclose(gain[: 4_800 - reach], 1.0, atol=1e-12)
    np.testing.assert_allclose(gain[4_801 + reach :], 1.0, atol=1e-12)
    # A Hann average over 5 ms moves at most twice as fast as the mean slope of that fall.
    assert np.abs(np.diff(gain)).max() < 2.01 * 0.75 / reach


def test_edges_are_raised_cosines() -> None:
    gain = edge_gain(96_000, RATE_HZ, 0.005)
    at = (np.arange(480) + 0.5) / 480
    np.testing.assert_allclose(gain[:480], 0.5 - 0.5 * np.cos(np.pi * at), atol=1e-12)
    np.testing.assert_array_equal(gain, gain[::-1])
    assert np.all(gain[480:-480] == 1.0)
    assert gain[0] < 3e-6


def test_edges_of_short_signals_meet_in_the_middle() -> None:
    for length in range(6):
        gain = edge_gain(length, RATE_HZ, 0.005)
        assert gain.shape == (length,)
        np.testing.assert_array_equal(gain, gain[::-1])
