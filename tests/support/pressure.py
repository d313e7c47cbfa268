"""Pressure at places from recorded samples, by direct sums over cells, without the program."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
import scipy.fft
from numpy.typing import NDArray
from support.directsum import Slab, speed_m_s

LOW_HZ, HIGH_HZ = 35_481.34, 44_668.36  # the third about 40 kHz, IEC 61260-1
REFERENCE_PA = 20e-6
HEAD_M = 0.25
PLACES = 400

Array = NDArray[np.float64]


class Hung(NamedTuple):
    """A grid panel, and the first of its channels; cells count from the upper left."""

    slab: Slab
    first: int

    @property
    def channels(self) -> NDArray[np.int64]:
        """Channels in the order of the slab's cells, which count from below."""
        rows, columns = self.slab.rows, self.slab.columns
        return self.first + np.arange(rows * columns).reshape(rows, columns)[::-1].ravel()


def head(ear_m: Sequence[float]) -> Array:
    """Places (P, 3) all over a head, its middle first."""
    rng = np.random.default_rng(11)
    way = rng.normal(size=(PLACES, 3))
    way *= HEAD_M * rng.random((PLACES, 1)) ** (1 / 3) / np.linalg.norm(way, axis=1, keepdims=True)
    return np.concatenate((np.zeros((1, 3)), way)) + np.asarray(ear_m)


class Pressures:
    """The carrier's band of recordings of `frames` at places (P, 3); panels add as magnitudes."""

    def __init__(self, hung: Sequence[Hung], places_m: Array, rate_hz: int, frames: int) -> None:
        hz = np.arange(frames // 2 + 1) * (rate_hz / frames)
        self._bins = slice(*np.searchsorted(hz, (LOW_HZ, HIGH_HZ)))
        self._frames, self._hung = frames, hung
        self._count = self._bins.stop - self._bins.start
        self.rate_hz = self._count * rate_hz / frames  # of what `squares` returns
        self._transfers = [_transfer(panel.slab, places_m, hz[self._bins]) for panel in hung]

    def squares(self, samples: NDArray[np.float32]) -> Array:
        """Mean square re 20 µPa, (P, n) at `rate_hz`, of a recording (frames, channels)."""
        total: Array = np.zeros(())
        for panel, transfer in zip(self._hung, self._transfers, strict=True):
            lines = scipy.fft.rfft(samples[:, panel.channels].T, axis=1)[:, self._bins]
            spectrum = np.sum(transfer * lines, axis=1)
            # one sideband of a real signal, at a rate of its own width: an envelope
            envelope = scipy.fft.ifft(spectrum, axis=1) * (2.0 * self._count / self._frames)
            total = total + np.abs(envelope)
        return np.asarray(total**2 / REFERENCE_PA**2, dtype=np.float64)

    def worst_db(self, samples: NDArray[np.float32], averaging_s: float) -> Array:
        """Level (P,) of the loudest window of `averaging_s`, wherever it begins."""
        return sliding_db(self.squares(samples), round(averaging_s * self.rate_hz)).max(axis=1)


def _transfer(slab: Slab, places_m: Array, hz: Array) -> NDArray[np.complex64]:
    """Pressure (P, cells, hz) per full-scale sine, the time that sound takes to a place left out.

    Summed at every 25 Hz and drawn straight between: over a panel the phase turns by 0.03 in that.
    """
    nodes = np.linspace(hz[0], hz[-1], round(float(hz[-1] - hz[0]) / 25.0) + 2)
    way_m = np.linalg.norm(places_m - np.array(slab.at_m), axis=1)[:, np.newaxis]
    turns_per_hz = way_m / speed_m_s(slab.celsius)
    at_nodes = np.stack(
        [slab.transfer_pa(places_m, f) * np.exp(2j * np.pi * f * turns_per_hz) for f in nodes],
        axis=-1,
    )
    found = np.empty((*at_nodes.shape[:2], len(hz)), np.complex64)
    for place, cell in np.ndindex(*at_nodes.shape[:2]):
        found[place, cell] = np.interp(hz, nodes, at_nodes[place, cell])
    return found


def sliding_db(squares: Array, length: int) -> Array:
    """Level of every window of `length` in squares (P, n)."""
    sums = np.cumsum(np.pad(squares, ((0, 0), (1, 0))), axis=1)
    mean = (sums[:, length:] - sums[:, :-length]) / length
    return np.asarray(10.0 * np.log10(np.maximum(mean, 1e-12)))
