"""One-third-octave bands from 10 to 100 kHz, IEC 61260-1:2014 base 10."""

from __future__ import annotations

from typing import NamedTuple

NOMINAL_HZ = (10e3, 12.5e3, 16e3, 20e3, 25e3, 31.5e3, 40e3, 50e3, 63e3, 80e3, 100e3)


class Band(NamedTuple):
    """A one-third-octave band; frequencies in hertz."""

    nominal_hz: float
    mid_hz: float
    low_hz: float
    high_hz: float


def _band(index: int, nominal_hz: float) -> Band:
    low_hz, mid_hz, high_hz = (1000.0 * 10.0 ** ((2 * index + k) / 20) for k in (-1, 0, 1))
    return Band(nominal_hz, mid_hz, low_hz, high_hz)


BANDS = tuple(_band(index, nominal_hz) for index, nominal_hz in enumerate(NOMINAL_HZ, start=10))


def band_at(frequency_hz: float) -> Band | None:
    """The band from 10 to 100 kHz that holds the frequency, its lower edge included; else None."""
    return next((b for b in BANDS if b.low_hz <= frequency_hz < b.high_hz), None)
