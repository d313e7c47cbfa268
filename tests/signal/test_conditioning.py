"""Conditioning against scipy's filters and Hilbert transform, and against the far-field law."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import signal

from beamctl.signal.conditioning import (
    Preparation,
    band_gain,
    condition,
    highpass_gain,
    level_gain,
    pre_equaliser_gain,
    shape,
    shaped_analytic,
)

SETTINGS = Preparation.at(40_000.0, 192_000.0)
RATE_HZ = SETTINGS.rate_hz
MIDDLE = slice(9_600, -9_600)


def tone(frequency_hz: float, seconds: float = 1.0, peak: float = 0.3) -> np.ndarray:
    return peak * np.sin(2.0 * np.pi * frequency_hz * np.arange(seconds * RATE_HZ) / RATE_HZ)


def magnitude(pairs: np.ndarray) -> np.ndarray:
    return np.hypot(pairs[:, 0].astype(np.float64), pairs[:, 1].astype(np.float64))


def decibels(ratio: np.ndarray | float) -> np.ndarray:
    return 20.0 * np.log10(ratio)


def test_settings_follow_the_carrier() -> None:
    assert (SETTINGS.rate_hz, SETTINGS.pass_hz, SETTINGS.stop_hz) == (96_000.0, 16_000.0, 17_600.0)


def test_highpass_is_two_butterworth_sections() -> None:
    frequency_hz = np.geomspace(50.0, 10_000.0, 200)
    section = signal.butter(2, 300.0, "highpass", fs=RATE_HZ, output="sos")
    _, response = signal.sosfreqz(section, frequency_hz, fs=RATE_HZ)
    expected = decibels(np.abs(response) ** 2)
    # The sections are warped by the bilinear transform, hardly: the corner is 0.3 % of the rate.
    np.testing.assert_allclose(decibels(highpass_gain(frequency_hz, 300.0)), expected, atol=0.01)


def test_pre_equaliser_is_a_bounded_double_integrator() -> None:
    at_hz = np.array([1.0, 100.0, 1_000.0, 2_000.0, 16_000.0])
    gain_db = decibels(pre_equaliser_gain(at_hz, 500.0, 4_000.0))
    assert gain_db[0] == pytest.approx(decibels(64.0), abs=0.01)  # 36.1 dB of range
    assert gain_db[1] == pytest.approx(gain_db[0], abs=0.01)
    assert gain_db[2] - gain_db[3] == pytest.approx(12.04, abs=0.1)
    assert gain_db[4] == pytest.approx(0.0, abs=0.01)


@pytest.mark.parametrize("frequency_hz", [750.0, 1_000.0, 1_500.0, 2_500.0])
def test_shape_levels_the_far_field_between_the_corners(frequency_hz: float) -> None:
    """Demodulate by the law itself: second difference of the squared envelope (Berktay 1965)."""

    def heard(at_hz: float) -> float:
        envelope = 1.0 + 1e-4 * shaped_analytic(tone(at_hz), SETTINGS).real
        pressure = signal.lfilter([1.0, -2.0, 1.0], 1.0, envelope**2)[MIDDLE] * RATE_HZ**2
        return float(np.sqrt(2.0) * np.std(pressure))

    highpass = highpass_gain(np.array([frequency_hz, 1_200.0]), SETTINGS.highpass_hz)
    difference_db = decibels(heard(frequency_hz) / heard(1_200.0)) - decibels(
        highpass[0] / highpass[1]
    )
    assert abs(difference_db) < 0.5


def test_band_gain_is_flat_then_nothing() -> None:
    gain = band_gain(
        np.array([0.0, 15_999.0, 16_000.0, 16_800.0, 17_600.0, 40_000.0]), 16e3, 17.6e3
    )
    np.testing.assert_allclose(gain, [1.0, 1.0, 1.0, 0.5, 0.0, 0.0], atol=1e-12)
    assert gain[4] == 0.0


def test_analytic_signal_agrees_with_scipy() -> None:
    """Sections forward and backward, a firwin2 of the pre-equaliser, then a whole-file Hilbert."""
    samples = np.random.default_rng(7).standard_normal(round(6.0 * RATE_HZ))  # three blocks
    section = signal.butter(2, 300.0, "highpass", fs=RATE_HZ, output="sos")
    expected = signal.sosfiltfilt(section, samples)
    grid_hz = np.linspace(0.0, RATE_HZ / 2.0, 16_385)
    rest = pre_equaliser_gain(grid_hz, 500.0, 4_000.0) * band_gain(grid_hz, 16e3, 17.6e3)
    fir = signal.firwin2(8_191, grid_hz, rest, fs=RATE_HZ)
    expected = signal.hilbert(signal.oaconvolve(expected, fir, mode="same"))
    found = shaped_analytic(samples, SETTINGS)
    error = np.abs(found - expected)[MIDDLE].max() / np.abs(expected).max()
    assert decibels(error) < -60.0  # limited by the warp of the sections at their corner


def test_blocks_leave_no_seam() -> None:
    samples = np.random.default_rng(8).standard_normal(round(6.0 * RATE_HZ))
    length = 1 << 21
    frequency_hz = np.fft.fftfreq(length, 1.0 / RATE_HZ)
    one_sided = np.where(frequency_hz > 0.0, 2.0 * shape(np.abs(frequency_hz), SETTINGS), 0.0)
    whole = np.fft.ifft(np.fft.fft(samples, length) * one_sided)[: len(samples)]
    error = np.abs(shaped_analytic(samples, SETTINGS) - whole).max() / np.abs(whole).max()
    assert decibels(error) < -160.0


@pytest.mark.parametrize("frequency_hz", [320.0, 1_000.0, 5_000.0, 15_000.0])
@pytest.mark.parametrize("peak", [0.01, 1.0])
def test_a_steady_tone_has_magnitude_one(frequency_hz: float, peak: float) -> None:
    found = magnitude(condition(tone(frequency_hz, peak=peak), SETTINGS))
    assert np.abs(decibels(found[MIDDLE])).max() < 0.5
    assert found.max() <= 1.0


def test_silence_between_sounds_does_not_raise_the_level() -> None:
    samples = np.concatenate([np.zeros(400_000), tone(1_000.0)])
    found = magnitude(condition(samples, SETTINGS))
    assert np.abs(decibels(found[400_000:][MIDDLE])).max() < 0.5


@pytest.mark.parametrize(
    "samples",
    [
        np.zeros(5_000),
        np.random.default_rng(0).uniform(-9e-5, 9e-5, 5_000),  # a converter's last bit
        tone(20_000.0) * np.hanning(round(RATE_HZ)),  # nothing inside the band
    ],
)
def test_silence_stays_silence(samples: np.ndarray) -> None:
    found = condition(samples, SETTINGS)
    assert found.shape == (len(samples), 2)
    assert not found.any()


@settings(max_examples=25)
@given(st.integers(1, 3_000), st.integers(0, 2**32 - 1), st.floats(1e-3, 1e3))
def test_any_sound_stays_within_one(length: int, seed: int, peak: float) -> None:
    rng = np.random.default_rng(seed)
    samples = peak * rng.standard_normal(length) ** 3  # spiky
    found = condition(samples, SETTINGS)
    assert found.dtype == np.float32
    assert found.shape == (length, 2)
    assert np.all(magnitude(found) <= 1.0)


def test_level_is_the_active_percentile() -> None:
    active = np.linspace(0.5, 1.0, 1_001)
    quiet = np.full(5_000, 1e-3)
    assert level_gain(np.concatenate([quiet, active])) == pytest.approx(1.0 / 0.995)


def test_nothing_is_left_beyond_the_stop_edge() -> None:
    samples = np.random.default_rng(9).standard_normal(round(4.0 * RATE_HZ))
    pairs = condition(samples, SETTINGS)
    assert magnitude(pairs).max() > 0.99  # the limiter worked, and is part of what is measured
    analytic = pairs[:, 0] + 1j * pairs[:, 1].astype(np.float64)
    frequency_hz, power = signal.welch(
        analytic, RATE_HZ, "blackmanharris", 8_192, return_onesided=False, detrend=False
    )
    outside = power[np.abs(frequency_hz) >= SETTINGS.stop_hz]
    flat_top = power[(frequency_hz > 6_000.0) & (frequency_hz < 15_000.0)].mean()
    assert 10.0 * np.log10(outside.max() / flat_top) < -60.0
    assert 10.0 * np.log10(outside.max() / power.max()) < -80.0


def test_files_begin_and_end_without_a_step() -> None:
    found = magnitude(condition(tone(1_000.0) + 0.2, SETTINGS))
    assert found[0] < 1e-5
    assert found[-1] < 1e-5
    assert np.abs(np.diff(found)).max() < 0.02
