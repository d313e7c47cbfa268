"""The envelope's filters, measured with scipy's frequency response."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal

from beamctl.signal.band import envelope_band
from beamctl.signal.equaliser import (
    INTERPOLATION_DELAY,
    element_equaliser,
    envelope_fir,
    interpolation_fir,
)

RIGS = [(40e3, 192e3), (40e3, 96e3), (25e3, 192e3), (40e3, 176.4e3), (60e3, 384e3), (38e3, 88.2e3)]
CELLS = [(40e3, 5.0), (40e3, 20.0), (40e3, 50.0), (40e3, 200.0), (41e3, 20.0), (38.5e3, 60.0)]


def response(taps: np.ndarray, offset_hz: np.ndarray, rate_hz: float) -> np.ndarray:
    """Response with the filter's delay of (n - 1) / 2 taken out."""
    _, found = signal.freqz(taps, worN=offset_hz, fs=rate_hz)
    return found * np.exp(2j * np.pi * offset_hz / rate_hz * (len(taps) - 1) / 2)


def cell(frequency_hz: np.ndarray | float, resonance_hz: float, q: float) -> np.ndarray:
    """Series resonance as a rational function of s, independent of the equaliser's own form."""
    w0 = 2.0 * np.pi * resonance_hz
    at = 2.0 * np.pi * np.atleast_1d(frequency_hz)
    _, found = signal.freqs([w0 / q, 0.0], [1.0, w0 / q, w0**2], worN=at)
    return found


@pytest.mark.parametrize(("resonance_hz", "q"), CELLS)
def test_equaliser_undoes_the_cell_up_to_twelve_decibels(resonance_hz: float, q: float) -> None:
    offset_hz = np.linspace(-16e3, 16e3, 2_001)
    gain = element_equaliser(offset_hz, 40e3, resonance_hz, q)
    exact = cell(40e3, resonance_hz, q) / cell(40e3 + offset_hz, resonance_hz, q)
    within = np.abs(exact) <= 10.0 ** (11.98 / 20.0)
    np.testing.assert_allclose(gain[within], exact[within], rtol=1e-9)
    np.testing.assert_allclose(20.0 * np.log10(np.abs(gain[~within])), 11.98, atol=1e-9)
    np.testing.assert_allclose(np.angle(gain / exact), 0.0, atol=1e-9)
    assert element_equaliser(np.zeros(1), 40e3, resonance_hz, q)[0] == pytest.approx(1.0, abs=1e-15)


@pytest.mark.parametrize(("carrier_hz", "rate_hz"), RIGS)
def test_band_limit_passes_and_stops(carrier_hz: float, rate_hz: float) -> None:
    band = envelope_band(carrier_hz, rate_hz)
    taps = envelope_fir(carrier_hz, carrier_hz, 20.0, rate_hz, equalise=False)
    inside = np.linspace(-band.pass_hz, band.pass_hz, 8_001)
    outside = np.linspace(band.stop_hz, rate_hz / 2.0 - band.stop_hz, 16_001)
    assert np.abs(response(taps, inside, rate_hz / 2.0) - 1.0).max() <= 1e-4
    assert np.abs(response(taps, outside, rate_hz / 2.0)).max() <= 1e-4


@pytest.mark.parametrize(("carrier_hz", "rate_hz"), RIGS)
@pytest.mark.parametrize("equalise", [False, True])
def test_delay_is_whole_at_both_rates(carrier_hz: float, rate_hz: float, equalise: bool) -> None:
    taps = envelope_fir(carrier_hz, carrier_hz, 20.0, rate_hz, equalise)
    assert (len(taps) - 1) % 4 == 0
    assert taps.sum() == pytest.approx(1.0, abs=1e-12)


def test_size_at_the_usual_rate() -> None:
    assert len(envelope_fir(40e3, 40e3, 20.0, 192e3)) <= 320


@pytest.mark.parametrize(("resonance_hz", "q"), CELLS)
def test_equalised_filter_keeps_its_limits(resonance_hz: float, q: float) -> None:
    taps = envelope_fir(40e3, resonance_hz, q, 192e3)
    everywhere = np.linspace(-48e3, 48e3, 48_001)
    gain = np.abs(response(taps, everywhere, 96e3))
    assert gain.max() <= 10.0 ** (12.0 / 20.0)
    assert gain[np.abs(everywhere) >= 17_600.0].max() <= 1e-4 * gain.max()


@pytest.mark.parametrize(("resonance_hz", "q"), [c for c in CELLS if c[1] <= 50.0])
def test_equalised_filter_follows_the_cell_away_from_the_corner(
    resonance_hz: float, q: float
) -> None:
    """Within 0.5 % wherever the inverse is not limited within the window's own width."""
    offset_hz = np.linspace(-16e3, 16e3, 3_201)
    inverse = np.abs(
        cell(40e3, resonance_hz, q) / cell(np.linspace(22.4e3, 57.6e3, 3_521), resonance_hz, q)
    )
    limited = np.convolve(inverse > 10.0 ** (11.98 / 20.0), np.ones(321), mode="same") > 0.5
    unlimited = np.convolve(inverse <= 10.0 ** (11.98 / 20.0), np.ones(321), mode="same") > 0.5
    smooth = ~(limited & unlimited)[160:-160]
    found = response(envelope_fir(40e3, resonance_hz, q, 192e3), offset_hz, 96e3)
    target = element_equaliser(offset_hz, 40e3, resonance_hz, q)
    error = np.abs(found / target - 1.0)
    assert smooth.mean() > 0.4
    assert error[smooth].max() < 0.005
    assert error.max() < 0.08  # at the corner itself


def test_interpolator_passes_the_band_and_stops_its_images() -> None:
    rate_hz = 192e3
    frequency_hz, found = signal.freqz(interpolation_fir() / 4.0, worN=1 << 15, fs=rate_hz)
    gain = np.abs(found)
    assert np.abs(gain[frequency_hz <= 8e3] - 1.0).max() <= 3e-5
    assert np.abs(gain[frequency_hz <= 16e3] - 1.0).max() <= 3e-4
    images = (np.abs(frequency_hz - 48e3) <= 17.6e3) | (frequency_hz >= 96e3 - 17.6e3)
    assert 20.0 * np.log10(gain[images].max()) <= -85.0


def test_interpolator_leaves_a_resting_envelope_constant() -> None:
    taps = interpolation_fir()
    for branch in range(4):
        assert taps[branch::4].sum() == pytest.approx(1.0, abs=1e-14)


def test_interpolator_delay_is_what_it_says() -> None:
    taps = interpolation_fir()
    assert len(taps) <= 80
    assert len(taps) % 4 == 0
    tone_hz = 5_000.0
    coarse = np.exp(2j * np.pi * tone_hz * np.arange(400) / 48e3)
    found = signal.upfirdn(taps, coarse, up=4)[200:1_200]
    at_s = (np.arange(200, 1_200) - INTERPOLATION_DELAY) / 192e3
    np.testing.assert_allclose(found, np.exp(2j * np.pi * tone_hz * at_s), atol=1e-4)
