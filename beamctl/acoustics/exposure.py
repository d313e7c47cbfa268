"""One-third-octave bands, and published limits for airborne ultrasound to draw caps from.

A table is advice that somebody published, with its standing; none is a promise. Follow local codes
and qualified people. ICNIRP's statement of 2024 (Health Phys. 127, 326) sets no new figures and
finds the basis of the 1984 ones weak.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import NamedTuple

NOMINAL_HZ = (10e3, 12.5e3, 16e3, 20e3, 25e3, 31.5e3, 40e3, 50e3, 63e3, 80e3, 100e3)


class Band(NamedTuple):
    """A one-third-octave band, IEC 61260-1:2014 base 10; frequencies in hertz."""

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


@dataclass(frozen=True, slots=True)
class Table:
    """Sound pressure levels by a band's nominal frequency, dB re 20 µPa, at the ear."""

    limits_db: Mapping[float, float]
    source: str
    standing: str


def _limits(by_first_band: Mapping[float, float], last_hz: float = 100e3) -> dict[float, float]:
    """Every band from the first named to the last, each with the figure of the named one below."""
    limits, figure = {}, None
    for nominal_hz in NOMINAL_HZ:
        figure = by_first_band.get(nominal_hz, figure)
        if figure is not None and nominal_hz <= last_hz:
            limits[nominal_hz] = figure
    return limits


TABLES: Mapping[str, Table] = {
    "irpa-1984-public": Table(
        _limits({20e3: 70.0, 25e3: 100.0}),
        "IRPA/INIRC interim guidelines, Health Phys. 46 (1984) 969, general public",
        "continuous exposure of the public, no allowance for short ones. From secondary sources: "
        "5 dB below the workers' figure at 20 kHz, 10 dB below it above. Check before use.",
    ),
    "irpa-1984-workers": Table(
        _limits({20e3: 75.0, 25e3: 110.0}),
        "IRPA/INIRC interim guidelines, Health Phys. 46 (1984) 969, workers",
        "occupational, up to 8 h a day; allowances for shorter exposure are left out here. From "
        "secondary sources, one of which gives 115 from 31.5 kHz up. Check before use.",
    ),
    "health-canada-1991": Table(
        _limits({16e3: 75.0, 25e3: 110.0}, last_hz=50e3),
        "Health Canada, Safety Code 24 (1991), table 5, section 4.2.1",
        "occupational, not relaxed for short exposures. 20 kHz and up from secondary sources; the "
        "16 kHz figure and the rule on short exposures from memory. Check before use.",
    ),
}


def cap_db(table: Table, frequency_hz: float) -> float | None:
    """The table's figure for the band that holds the frequency; None where it is silent."""
    band = band_at(frequency_hz)
    return None if band is None else table.limits_db.get(band.nominal_hz)
