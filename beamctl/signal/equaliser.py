"""The filters of an envelope: band limit, element equaliser, interpolation. Designed at load."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from beamctl.signal.band import envelope_band

GREATEST_GAIN = 10.0 ** ((12.0 - 0.02) / 20.0)
"""+12 dB, less what the filter may add by its ripple and at the carrier of a very sharp cell."""

ATTENUATION_DB = 82.0
"""Kaiser design figure of the band limit; measured, the error stays below -80 dB."""

INTERPOLATION_TAPS = 80
INTERPOLATION_DELAY = 40
"""Of `interpolation_fir`, in samples of the higher rate: 10 of the lower."""


def element_equaliser(
    offset_hz: NDArray[np.float64], carrier_hz: float, resonance_hz: float, q: float
) -> NDArray[np.complex128]:
    """Gain at offsets from the carrier that undoes a cell's resonance: 1 at the carrier, ≤ +12 dB.

    The cell is taken as H(f) = 1 / (1 + jQ(f/f0 - f0/f)) (a series resonance; the usual one-mode
    model of a piezoelectric element). The limit acts on the magnitude only, and hard: below it
    the inverse is exact, above it cell and equaliser together sag in level but keep a flat
    phase, so that both sidebands still add up. The filter's own window rounds the corner.
    `carrier_hz + offset_hz` must be above 0.
    """

    def inverse(frequency_hz: NDArray[np.float64]) -> NDArray[np.complex128]:
        detuning = q * (frequency_hz / resonance_hz - resonance_hz / frequency_hz)
        return np.asarray(1.0 + 1j * detuning, np.complex128)

    gain = inverse(carrier_hz + np.asarray(offset_hz)) / inverse(np.asarray(carrier_hz))
    return gain * np.minimum(1.0, GREATEST_GAIN / np.abs(gain))


def envelope_fir(
    carrier_hz: float, resonance_hz: float, q: float, rate_hz: float, equalise: bool = True
) -> NDArray[np.complex128]:
    """(n,) complex taps at `rate_hz` / 2 that limit an envelope's band and equalise the element.

    n = 4k + 1, so the delay of (n - 1) / 2 samples is a whole number of samples after halving
    the rate too. The gain at 0 Hz is 1. Beyond the stop edge the gain is at least 80 dB below
    the greatest gain in the band; as the equaliser never lifts more than the cell sags, that is
    80 dB below the carrier in the air. Frequency sampling with a Kaiser window (Oppenheim &
    Schafer, Discrete-Time Signal Processing, windowed design).
    """
    band = envelope_band(carrier_hz, rate_hz)
    half_rate_hz = rate_hz / 2.0
    width_rad = 2.0 * np.pi * (band.stop_hz - band.pass_hz) / half_rate_hz
    taps = 4 * math.ceil((ATTENUATION_DB - 7.95) / (2.285 * width_rad) / 4.0) + 1
    grid = 1 << (64 * taps).bit_length()  # fine enough that rounding the band's edge does no harm
    offset_hz = np.fft.fftfreq(grid, 1.0 / half_rate_hz)
    inside = np.abs(offset_hz) < (band.pass_hz + band.stop_hz) / 2.0
    window = np.kaiser(taps, 0.1102 * (ATTENUATION_DB - 8.7))

    def windowed(target: NDArray[np.complex128]) -> NDArray[np.complex128]:
        impulse: NDArray[np.complex128] = np.roll(np.fft.ifft(target), taps // 2)[:taps]
        return np.multiply(impulse, window)

    band_limit = windowed(inside.astype(np.complex128))
    band_limit /= band_limit.sum()
    if not equalise:
        return band_limit
    target = np.zeros(grid, np.complex128)
    target[inside] = element_equaliser(offset_hz[inside], carrier_hz, resonance_hz, q)
    equalised = windowed(target)
    # The window blurs a sharp resonance at the carrier too. Put that right by adding, because
    # scaling would carry the limit past +12 dB.
    missing = complex(1.0 - equalised.sum())
    return equalised + missing * band_limit


def interpolation_fir() -> NDArray[np.float64]:
    """(80,) real taps that raise any rate fourfold for signals within ±1.1/12 of the higher rate.

    Output 4m + k is the sum over j of taps[4j + k] · input[m - j]. The length holds a symmetrical
    filter of 77 taps after two zeros, so that the delay is `INTERPOLATION_DELAY`, a whole number
    of samples at both rates. Each branch taps[k::4] sums to 1: a resting envelope comes out
    constant and leaves no image of the carrier, which would fall into the audible band. In terms
    of the higher rate R (192 kHz in brackets): within 3e-5 of 1 up to R/24 (8 kHz) and 3e-4 up to
    R/12 (16 kHz), images of ±1.1 R/12 (17.6 kHz) at least 85 dB down. Equiripple (Parks &
    McClellan 1972), with no care for the gaps between the images.
    """
    from scipy.signal import remez  # design time only

    inner, outer, skirt = 1.0 / 24.0, 1.0 / 12.0, 1.1 / 12.0
    edges = (0.0, inner, inner + 1e-5, outer, 0.25 - skirt, 0.25 + skirt, 0.5 - skirt, 0.5)
    taps = np.zeros(INTERPOLATION_TAPS)
    taps[2:79] = remez(77, edges, (1.0, 1.0, 0.0, 0.0), weight=(10.0, 1.0, 5.0, 50.0), fs=1.0)
    for k in range(4):
        taps[k::4] /= taps[k::4].sum()
    return taps
