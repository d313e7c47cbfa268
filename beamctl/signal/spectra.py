"""How the power of a modulated carrier spreads over bands, as a meter with a fixed averaging reads.

Worked out before the show, from the prepared sound, with the law and the filter that will be used
live. Powers are relative to the resting carrier, so that a beam's gain scales all of them alike.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.fft import fft

from beamctl.signal.equaliser import envelope_fir
from beamctl.signal.laws import LAW_NAMES, REST, ROOT, envelope

FRAME = 4096  # samples at half the device rate: bins of 23 Hz at 192 kHz
HOP = FRAME // 2  # squares of sine windows that overlap by half sum to 1 everywhere
LOT = 64  # frames worked on at a time

Array = NDArray[np.float64]


class Element(NamedTuple):
    """A panel's carrier and cells. `measured`: the field that the powers go into has their sag."""

    carrier_hz: float
    resonance_hz: float
    q: float
    measured: bool


class Meter:
    """Bands of one panel's modulated carrier."""

    def __init__(
        self, element: Element, rate_hz: float, edges_hz: Array, averaging_s: float
    ) -> None:
        """`edges_hz` (B, 2), lower edges included; `rate_hz` is the device's.

        The band that holds the carrier is stated as it is in the air: where the field is given at
        the carrier, with the cells' sag there, what the equaliser lifts beside it meets the sag
        beside it. All other powers are those of the feeds.
        """
        frequency_hz = element.carrier_hz + np.asarray(np.fft.fftfreq(FRAME, 2.0 / rate_hz))
        low, high = edges_hz[:, :1], edges_hz[:, 1:]
        self._carrier = int(
            np.flatnonzero((low <= element.carrier_hz) & (element.carrier_hz < high))[0]
        )
        inside = (low <= frequency_hz) & (frequency_hz < high)
        gains = inside * _filter_power(element, rate_hz)
        if element.measured:
            gains[self._carrier] *= _sag_power(element, frequency_hz)
        self._gains = gains.astype(np.float32)
        self._averaged = max(1, int(averaging_s * rate_hz / 2.0 / HOP))

    def powers(self, programme: NDArray[np.float32], law: str, depth: float) -> Array:
        """(B,) the most that any window of the averaging time holds, re the resting carrier.

        programme  (n, 2) analytic signal at half the device rate, taken as a loop, so that a short
                   sound is never thinned out by the rest around it

        In the carrier's band never less than 1: there are rests in any programme.
        """
        frames = -(-len(programme) // HOP)
        found = np.concatenate(
            [
                self._frames(programme, law, depth, np.arange(first, min(first + LOT, frames)))
                for first in range(0, frames, LOT)
            ]
        )
        loudest = _loudest(found, self._averaged)
        loudest[self._carrier] = max(1.0, loudest[self._carrier])
        return loudest

    def _frames(
        self, programme: NDArray[np.float32], law: str, depth: float, numbers: NDArray[np.int64]
    ) -> Array:
        """Powers (frames, B) around the samples numbers · HOP, sine windows."""
        at = (numbers[:, np.newaxis] * HOP + np.arange(FRAME)) % len(programme)
        window = np.sin(np.pi * (np.arange(FRAME) + 0.5) / FRAME).astype(np.float32)
        swing = law_envelope(law, depth, programme[at, 0], programme[at, 1]) - np.float32(REST)
        spectrum = fft(swing * window, axis=1)
        power = spectrum.real**2 + spectrum.imag**2
        bands = (power @ self._gains.T).astype(np.float64) / (FRAME * HOP)
        mean = np.sum(swing.real * window**2, axis=1, dtype=np.float64) / HOP
        bands[:, self._carrier] += REST**2 + 2.0 * REST * mean  # |rest + swing|²
        return np.asarray(bands / REST**2)


def law_envelope(
    law: str, depth: float, x: NDArray[np.float32], hilbert_x: NDArray[np.float32]
) -> NDArray[np.complex64]:
    """`laws.envelope` of whole arrays."""
    number = LAW_NAMES.index(law)
    if number == ROOT:  # its root and its maximum are those of scalars
        real = REST * np.sqrt(np.maximum(0.0, 1.0 + depth * x))
        return np.asarray(real, np.complex64)
    real, imag = envelope(number, depth, x, hilbert_x)  # type: ignore[arg-type]
    return np.asarray(real + 1j * np.asarray(imag), np.complex64)


def _filter_power(element: Element, rate_hz: float) -> Array:
    """|gain|² (FRAME,) of the envelope's filter, element equaliser included, in fft order."""
    taps = envelope_fir(element.carrier_hz, element.resonance_hz, element.q, rate_hz)
    finer = -(-len(taps) // FRAME)
    return np.asarray(np.abs(np.fft.fft(taps, finer * FRAME)[::finer]) ** 2)


def _sag_power(element: Element, frequency_hz: Array) -> Array:
    """Power of the cells beside their carrier, re that at the carrier."""
    at_hz = np.maximum(frequency_hz, 1.0)
    detuning = element.q * (at_hz / element.resonance_hz - element.resonance_hz / at_hz)
    here = element.q * (
        element.carrier_hz / element.resonance_hz - element.resonance_hz / element.carrier_hz
    )
    return np.asarray((1.0 + here**2) / (1.0 + detuning**2))


def _loudest(frames: Array, count: int) -> Array:
    """Largest mean (B,) of `count` frames in a row, of (frames, B) that repeat for ever."""
    cycles, rest = divmod(count, len(frames))
    total = cycles * frames.sum(axis=0)
    if rest:
        running = np.cumsum(
            np.concatenate((np.zeros_like(frames[:1]), frames, frames[:rest])), axis=0
        )
        total = total + np.max(running[rest:] - running[:-rest], axis=0)
    return np.asarray(total / count)
