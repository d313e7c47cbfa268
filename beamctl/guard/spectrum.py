"""From the samples of a panel's feeds to what the field model takes.

Frames of half-overlapping sine windows, whose squares sum to one, so that no power is lost between
them; a full-scale sine is a unit phasor. The band that holds the carrier is cut into sub-bands,
each narrow enough that one frequency stands for it across the panel; of each the strongest
independent vectors are kept, and of all the rest the power.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.fft import rfft  # several times as fast as NumPy's in single precision
from scipy.linalg import eigh

from beamctl.acoustics.exposure import Band, band_at
from beamctl.show.standing import GUARDED

Array = NDArray[np.float64]

FRAME_S = 0.0054  # about; a power of two
AUDIBLE_HZ = 17_800.0  # below this nothing belongs into a feed
TURN = 0.6  # the most that a sub-band's width times the cells' spread in time may be, cycles
WIDEST_HZ, NARROWEST_HZ = 2000.0, 400.0
VECTORS = 8  # at most, kept of a sub-band: as many unlike beams are told apart
NEGLIGIBLE = 3e-5  # of the band's power: vectors below it go to the rest


class SubBand(NamedTuple):
    """One slice of the carrier's band: bins low … high - 1, and the cells' answer there re mid."""

    mid_hz: float
    low: int
    high: int
    answer: NDArray[np.float32]


Vectors = NDArray[np.complex64]


class Spectrum(NamedTuple):
    """One panel over one step; powers are squares of phasors, 1 for a full-scale sine.

    parts    of the carrier's band: frequency in hertz and vectors (F, K) of each sub-band, every
             bin by what the cells answer to it re that frequency
    rest     power of the carrier's band that no vector holds
    bands    band → (F,) power of each feed, for all other bands that hold any
    drive    root of the summed mean squares of the feeds
    carrier  power of the carrier's band, audible: power below 17.8 kHz, both over all feeds
    """

    parts: list[tuple[float, Vectors]]
    rest: float
    bands: dict[Band, Array]
    drive: float
    carrier: float
    audible: float


def frame_length(rate_hz: int) -> int:
    """Samples of a frame: the power of two nearest `FRAME_S`."""
    return int(2 ** round(np.log2(FRAME_S * rate_hz)))


class Analyser:
    """Spectra of one panel: `take` wants steps of a fixed multiple of half a frame, in order."""

    def __init__(
        self,
        rate_hz: int,
        feeds: int,
        carrier_hz: float,
        spread_s: float,
        answer: Callable[[Array], Array] = np.ones_like,
    ) -> None:
        """`spread_s`: between first and last cell at a listener; `answer` of cells, by hertz."""
        self._n = frame_length(rate_hz)
        sine = np.sin(np.pi * (np.arange(self._n) + 0.5) / self._n)
        self._window = (2.0 * np.sqrt(2.0) / self._n * sine).astype(np.float32)
        self._tail = np.zeros((feeds, self._n // 2), np.float32)
        hz = np.arange(self._n // 2 + 1, dtype=np.float64) * float(rate_hz / self._n)
        home = band_at(carrier_hz)
        self._audible = int(np.searchsorted(hz, AUDIBLE_HZ))
        self._bands = {
            band: (int(np.searchsorted(hz, band.low_hz)), int(np.searchsorted(hz, band.high_hz)))
            for band in GUARDED
        }
        self._home = self._bands.pop(home) if home in self._bands else (0, 0)
        width_hz = float(np.clip(TURN / max(spread_s, 1e-9), NARROWEST_HZ, WIDEST_HZ))
        self._subs = sub_bands(hz, self._home, carrier_hz, width_hz, answer)

    @property
    def frequencies_hz(self) -> dict[float, float]:
        """The frequencies that stand for the sub-bands, and the most of a bin's answer re each."""
        return {sub.mid_hz: float(np.max(sub.answer)) for sub in self._subs}

    def take(self, block: NDArray[np.float32]) -> Spectrum:
        """Spectrum of the next step (n, F), n a multiple of half a frame."""
        half = self._n // 2
        signal = np.concatenate((self._tail, block.T), axis=1)
        self._tail = signal[:, -half:].copy()
        frames = np.lib.stride_tricks.sliding_window_view(signal, self._n, axis=1)[:, ::half]
        window = self._window * np.float32(1.0 / np.sqrt(frames.shape[1]))
        bins: Vectors = rfft(frames * window, axis=2, overwrite_x=True)
        power = np.sum(bins.real**2 + bins.imag**2, axis=1)
        by_bin = power.sum(axis=0, dtype=np.float64)
        parts, rest = self._parts(bins, by_bin)
        return Spectrum(
            parts=parts,
            rest=rest,
            bands={
                band: power[:, low:high].sum(axis=1, dtype=np.float64)
                for band, (low, high) in self._bands.items()
                if by_bin[low:high].sum() > 0.0
            },
            drive=float(np.linalg.norm(signal[:, half:]) / np.sqrt(len(block))),
            carrier=float(by_bin[slice(*self._home)].sum()),
            audible=float(by_bin[: self._audible].sum()),
        )

    def _parts(self, bins: Vectors, by_bin: Array) -> tuple[list[tuple[float, Vectors]], float]:
        """Vectors of every sub-band that counts, and the power of the rest."""
        least = NEGLIGIBLE * float(by_bin[slice(*self._home)].sum())
        parts, rest = [], 0.0
        for sub in self._subs:
            held = float(by_bin[sub.low : sub.high].sum())
            if held <= least:
                rest += held
                continue
            answered = bins[:, :, sub.low : sub.high] * sub.answer
            snapshots = answered.reshape(len(bins), -1)
            vectors, left = principal(snapshots, least)
            if vectors.shape[1]:
                parts.append((sub.mid_hz, vectors))
            rest += left
        return parts, rest


def sub_bands(
    hz: Array,
    home: tuple[int, int],
    carrier_hz: float,
    width_hz: float,
    answer: Callable[[Array], Array],
) -> list[SubBand]:
    """Slices of about `width_hz` over the bins of `home`, one of them about the carrier."""
    low, high = home
    place = np.floor((hz[low:high] - carrier_hz) / width_hz + 0.5)
    found = []
    for number in np.unique(place):
        bins = low + np.flatnonzero(place == number)
        middle = carrier_hz if number == 0 else float(np.mean(hz[bins]))
        among = answer(hz[bins]) / answer(np.array([middle]))
        found.append(SubBand(middle, int(bins[0]), int(bins[-1]) + 1, among.astype(np.float32)))
    return found


def principal(snapshots: Vectors, least: float) -> tuple[Vectors, float]:
    """The strongest orthogonal vectors (F, K) of snapshots (F, M), and the power of the rest.

    The left singular vectors, each times its singular value, whose power is over `least`: their
    powers and the rest add to the snapshots'.
    """
    feeds, count = snapshots.shape
    few = count <= feeds
    gram = snapshots.conj().T @ snapshots if few else snapshots @ snapshots.conj().T
    last = len(gram) - 1
    powers, turns = eigh(gram, subset_by_index=(max(0, last - VECTORS + 1), last))
    kept = np.flatnonzero(powers > least)
    vectors = snapshots @ turns[:, kept] if few else turns[:, kept] * np.sqrt(powers[kept])
    return vectors, max(0.0, float(np.trace(gram).real) - float(powers[kept].sum()))
