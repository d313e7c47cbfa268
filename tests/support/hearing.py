"""What rendered feeds do at points in the room: the carrier's envelope, and what the air adds.

Written from the formulas alone, in double precision. Everything is done on spectra: a filter is the
exact response of a finite symmetrical FIR, so the circular transform spoils no more than `MARGIN_S`
at each end of the stretch that was handed in.

    E at a point   feeds' spectra around the carrier, band-limited to ±20 kHz (nothing of |E|² below
                   20 kHz is lost that an ear could hear: the renderer's stay in ±17.6 kHz),
                   each cell's times exp(-j 2π f r/c) / r at its own frequency f, so that carrier
                   phase and envelope delay are both exact, summed
    p ~ d²/dt²|E|² Berktay, J. Sound Vib. 2 (1965) 435; |E|² is low-passed first (pass 20 kHz, stop
                   24 kHz, -100 dB), because a second derivative lifts what no ear hears
"""

from __future__ import annotations

from typing import NamedTuple

import numba
import numpy as np
from scipy import fft
from scipy.signal import firwin, freqz, kaiserord

MARGIN_S = 0.0035  # both filters' halves, 1.7 ms, and the spread of the paths from a panel, 1.2 ms
TURN = 256  # bins worked through with one table of phases


class Heard(NamedTuple):
    """At P points, every 1/`rate_hz`; both from the stretch's first sample on, margins included."""

    level: np.ndarray  # (P, n) |E|
    bend: np.ndarray  # (P, n) second derivative of |E|², band-limited
    rate_hz: float


def lowpass(pass_hz: float, stop_hz: float, down_db: float, rate_hz: float) -> np.ndarray:
    """Symmetrical FIR taps (odd count), Kaiser window."""
    count, beta = kaiserord(down_db, (stop_hz - pass_hz) / (0.5 * rate_hz))
    middle = 0.5 * (pass_hz + stop_hz)
    return firwin(count | 1, middle, window=("kaiser", beta), fs=rate_hz)


def response(taps: np.ndarray, f_hz: np.ndarray, rate_hz: float) -> np.ndarray:
    """Real response of symmetrical taps, as if they had no delay."""
    _, found = freqz(taps, worN=f_hz, fs=rate_hz)
    return np.real(found * np.exp(1j * np.pi * f_hz / rate_hz * (len(taps) - 1)))


class Spectra(NamedTuple):
    """Feeds (F, `count`) as spectra (F, size / 2 + 1), zeros put behind them; size in fours."""

    bins: np.ndarray
    count: int
    size: int


def spectra_of(feeds: np.ndarray) -> Spectra:
    size = fft.next_fast_len((feeds.shape[1] + 3) // 4) * 4
    return Spectra(fft.rfft(feeds, size, axis=1), feeds.shape[1], size)


def heard_below(feeds: Spectra, rate_hz: float, pass_hz: float, stop_hz: float) -> np.ndarray:
    """(F, n) what is left of feeds after a low-pass, -120 dB, at half the rate."""
    kept = feeds.size // 4 + 1
    f_hz = np.arange(kept) * rate_hz / feeds.size
    shape = response(lowpass(pass_hz, stop_hz, 120.0, rate_hz), f_hz, rate_hz)
    low = fft.irfft(feeds.bins[:, :kept] * shape, feeds.size // 2, axis=1)
    return 0.5 * low[:, : feeds.count // 2]


def hear(
    feeds: Spectra,
    rate_hz: float,
    carrier_hz: float,
    at_m: np.ndarray,
    points_m: np.ndarray,
    speed_m_s: float,
) -> Heard:
    """What feeds, one cell each at `at_m` (F, 3), do at points (P, 3)."""
    step_hz = rate_hz / feeds.size
    middle = round(carrier_hz / step_hz)
    half = int(24_000.0 / step_hz)
    offsets = np.arange(-half, half + 1)
    shape = response(lowpass(20e3, 24e3, 100.0, rate_hz), np.abs(offsets) * step_hz, rate_hz)
    around = np.ascontiguousarray(feeds.bins[:, middle - half : middle + half + 1] * shape)
    r = np.linalg.norm(points_m[:, None, :] - at_m, axis=2)
    late = (r - r.mean(axis=1, keepdims=True)) / speed_m_s
    spectrum = np.zeros((len(points_m), feeds.size // 2), np.complex128)
    spectrum[:, offsets] = _sum(around, late, 1.0 / r, (middle - half) * step_hz, step_hz)
    envelope = fft.ifft(spectrum, axis=1)
    return _bent(np.abs(envelope), 0.5 * rate_hz, feeds.count // 2)


def _bent(level: np.ndarray, rate_hz: float, count: int) -> Heard:
    spectra = fft.rfft(level**2, axis=1)
    f_hz = np.arange(spectra.shape[1]) * rate_hz / level.shape[1]
    shape = response(lowpass(20e3, 24e3, 100.0, rate_hz), f_hz, rate_hz)
    bend = fft.irfft(spectra * (-((2.0 * np.pi * f_hz) ** 2) * shape), level.shape[1], axis=1)
    return Heard(level[:, :count], bend[:, :count], rate_hz)


@numba.njit(cache=False, nogil=True, fastmath={"contract"})
def _sum(spectra, late_s, gain, first_hz, step_hz):
    """Σ over feeds of gain × spectrum × exp(-j 2π f late), at every point: (P, bins)."""
    points, feeds = late_s.shape
    bins = spectra.shape[1]
    total = np.zeros((points, bins), np.complex128)
    table = np.empty(TURN, np.complex128)
    for p in range(points):
        for n in range(feeds):
            turn = -2.0 * np.pi * late_s[p, n]
            for j in range(TURN):
                table[j] = np.exp(1j * turn * step_hz * j)
            for start in range(0, bins, TURN):
                here = gain[p, n] * np.exp(1j * turn * (first_hz + step_hz * start))
                stop = min(TURN, bins - start)
                for j in range(stop):
                    total[p, start + j] += spectra[n, start + j] * (here * table[j])
    return total
