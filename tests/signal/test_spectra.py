"""Band powers of modulated carriers: against Fourier series and Welch's method."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.signal import fftconvolve, welch
from support.oracle import law_series
from support.rigs import analytic_tone, silence

from beamctl.acoustics.bands import BANDS, band_at
from beamctl.signal import laws
from beamctl.signal.conditioning import Preparation, condition
from beamctl.signal.equaliser import envelope_fir
from beamctl.signal.spectra import Element, Meter, law_envelope

RATE_HZ = 192_000
EDGES_HZ = np.array([(band.low_hz, band.high_hz) for band in BANDS])
FLAT = Element(40e3, 40e3, 1e-3, False)


def band(hz: float) -> int:
    found = band_at(hz)
    assert found is not None
    return BANDS.index(found)


def meter(element: Element = FLAT, averaging_s: float = 1.0) -> Meter:
    return Meter(element, RATE_HZ, EDGES_HZ, averaging_s)


def noise(seconds: float, seed: int = 3) -> np.ndarray:
    """A prepared programme of white noise."""
    settings = Preparation.at(40e3, RATE_HZ)
    rng = np.random.default_rng(seed)
    return condition(rng.normal(0.0, 0.2, round(seconds * RATE_HZ / 2)), settings)


def filtered(programme: np.ndarray, law: str, depth: float, element: Element) -> np.ndarray:
    """The envelope after its filter at half the device rate, from the published laws."""
    x, h = programme[:, 0].astype(float), programme[:, 1].astype(float)
    envelope = {
        "dsb": 1.0 + depth * x + 0j,
        "root": np.sqrt(np.maximum(0.0, 1.0 + depth * x)) + 0j,
        "ssb": 1.0 + depth * (x + 1j * h),
        "mam": (1.0 + depth * x + 1j * (1.0 - 0.5 * (depth * x) ** 2)) / (1.0 + 1j),
    }[law]
    taps = envelope_fir(element.carrier_hz, element.resonance_hz, element.q, RATE_HZ)
    return fftconvolve(0.5 * envelope, taps, mode="valid")


@pytest.mark.parametrize("law", laws.LAW_NAMES)
@pytest.mark.parametrize(("tone_hz", "depth"), [(1_000, 0.8), (5_000, 0.6), (7_000, 0.9)])
def test_a_tone_s_lines_fall_into_their_bands(law: str, tone_hz: int, depth: float) -> None:
    found = meter().powers(analytic_tone(tone_hz, 2.0), law, depth)
    series = np.abs(law_series(law, depth)) ** 2 / 0.25
    harmonics = np.fft.fftfreq(len(series), 1 / len(series))
    expected = np.zeros(len(BANDS))
    for power, harmonic in zip(series, harmonics, strict=True):
        if abs(harmonic * tone_hz) < 16_000:
            expected[band(40e3 + harmonic * tone_hz)] += power
    expected[band(40e3)] = max(1.0, expected[band(40e3)])
    strong = expected > 1e-6
    np.testing.assert_allclose(found[strong], expected[strong], rtol=0.01)
    assert np.all(found[~strong] < 1e-5)


@pytest.mark.parametrize("law", laws.LAW_NAMES)
def test_noise_agrees_with_welch(law: str) -> None:
    element = Element(40e3, 41e3, 12.0, False)
    programme = noise(6.0)
    found = meter(element, 6.0).powers(programme, law, 0.9)
    signal = filtered(programme, law, 0.9, element)
    hz, density = welch(
        signal, RATE_HZ / 2, "hann", 8192, return_onesided=False, detrend=False, scaling="spectrum"
    )
    power = density / 1.5 / 0.25  # a Hann window spreads a line over 1.5 bins
    for number, (low_hz, high_hz) in enumerate(EDGES_HZ):
        expected = power[(low_hz <= 40e3 + hz) & (40e3 + hz < high_hz)].sum()
        if expected > 1e-7:
            assert found[number] == pytest.approx(expected, rel=0.03)


def test_an_unmeasured_cell_s_equaliser_counts_in_full_and_a_measured_one_s_is_undone() -> None:
    tone_hz, depth, q = 2_000, 0.8, 25.0
    bare = meter(Element(40e3, 40e3, q, False)).powers(analytic_tone(tone_hz, 1.0), "dsb", depth)
    lift = [1 + (q * (f / 40e3 - 40e3 / f)) ** 2 for f in (38e3, 42e3)]
    assert bare[band(40e3)] == pytest.approx(1 + depth**2 / 4 * sum(lift), rel=0.01)
    undone = meter(Element(40e3, 40e3, q, True)).powers(analytic_tone(tone_hz, 1.0), "dsb", depth)
    assert undone[band(40e3)] == pytest.approx(1 + depth**2 / 2, rel=0.005)


def test_the_loudest_window_counts_however_the_sound_is_looped() -> None:
    pause, tone = silence(2.0), analytic_tone(1_000, 0.5)
    late = np.concatenate((pause, tone))
    around = np.concatenate((tone[len(tone) // 2 :], pause, tone[: len(tone) // 2]))
    full = 0.8**2 / 2
    for programme in (late, around):
        for averaging_s, share in ((0.25, 1.0), (0.5, 1.0), (1.0, 0.5), (50.0, 0.2)):
            power = meter(averaging_s=averaging_s).powers(programme, "dsb", 0.8)[band(40e3)]
            assert power - 1.0 == pytest.approx(full * share, rel=0.06)


def test_a_sound_shorter_than_the_averaging_is_not_thinned_out() -> None:
    found = meter(averaging_s=1.0).powers(analytic_tone(1_000, 0.01), "dsb", 1.0)
    assert found[band(40e3)] == pytest.approx(1.5, rel=1e-3)


def test_the_carrier_s_band_never_holds_less_than_the_carrier_at_rest() -> None:
    assert meter().powers(analytic_tone(7_000, 1.0), "root", 1.0)[band(40e3)] == 1.0
    assert meter().powers(silence(0.5), "mam", 1.0)[band(40e3)] == pytest.approx(1.0)


def test_what_an_envelope_may_not_hold_reaches_no_band() -> None:
    """The filter keeps a 25 kHz carrier out of the 20 kHz band, whatever the programme asks."""
    element = Element(25e3, 25e3, 1e-3, False)
    inside = meter(element).powers(analytic_tone(2_000, 1.0), "dsb", 1.0)
    outside = meter(element).powers(analytic_tone(3_000, 1.0), "dsb", 1.0)
    assert inside[band(25e3)] == pytest.approx(1.5, rel=0.01)
    assert outside[band(25e3)] == pytest.approx(1.0, rel=0.01)
    assert outside[band(20e3)] < 1e-8


@pytest.mark.parametrize("law", range(4), ids=laws.LAW_NAMES)
def test_envelopes_of_arrays_are_those_of_samples(law: int) -> None:
    x, h = noise(0.1).T
    whole = law_envelope(laws.LAW_NAMES[law], 0.9, x, h)
    for i in range(0, len(x), 97):
        real, imag = laws.envelope(law, 0.9, float(x[i]), float(h[i]))
        assert abs(whole[i] - (real + 1j * imag)) < 1e-6
