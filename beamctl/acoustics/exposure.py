"""Published limits for airborne ultrasound, to draw caps from.

A table is advice that somebody published, with its standing; none is a promise, and only one is for
the public. Follow local codes and qualified people. ICNIRP's statement of 2024 (Health Phys. 127,
326) sets no new figures and finds the basis of the 1984 ones weak. Left out: whatever a body allows
for shorter exposures, and limits of vibration by contact, which are on another reference.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from beamctl.acoustics.bands import BANDS, NOMINAL_HZ, Band, band_at

__all__ = ["BANDS", "TABLES", "Band", "Table", "band_at", "cap_db"]

MEMORY = "from memory: check before use."


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


_RUSSIAN = {12.5e3: 80.0, 16e3: 90.0, 20e3: 100.0, 25e3: 105.0, 31.5e3: 110.0}
_LEIGHTON = "as quoted by Leighton, Proc. R. Soc. A 472 (2016) 20150624"

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
        "workers, up to 8 h a day; allowances for shorter exposure are left out here. From "
        "secondary sources, one of which gives 115 from 31.5 kHz up; 110 there also " + MEMORY,
    ),
    "health-canada-1991": Table(
        _limits({16e3: 75.0, 25e3: 110.0}, last_hz=50e3),
        "Health Canada, Safety Code 24 (1991), table 5, section 4.2.1",
        "workers, not relaxed for short exposures. 20 kHz and up from secondary sources; the "
        "figure at 16 kHz and the rule on short exposures " + MEMORY,
    ),
    "howard-2004-consensus": Table(
        _limits({20e3: 75.0, 25e3: 110.0}, last_hz=50e3),
        "Howard, Hansen & Zander, J. Occup. Health Safety Aust. NZ 21 (2004) 253, p. 254",
        "a review's consensus of limits for workers, labelled there as for exposures below 4 h. As "
        "quoted by a bibliographic database.",
    ),
    "acgih-ceiling": Table(
        _limits({10e3: 105.0, 25e3: 110.0, 31.5e3: 115.0}),
        "ACGIH threshold limit values, airborne ultrasound, ceiling",
        "workers, not to be passed at any time. From secondary sources; 105 up to 20 kHz also "
        + MEMORY,
    ),
    "acgih-8h": Table(
        {10e3: 88.0, 12.5e3: 89.0, 16e3: 92.0, 20e3: 94.0},
        f"ACGIH threshold limit values, airborne ultrasound, 8 h average, {_LEIGHTON}",
        "workers, an average over 8 h a day; nothing from 25 kHz up. From a secondary source.",
    ),
    "sanpin-2010": Table(
        _limits(_RUSSIAN),
        "Russia, SanPiN 2.1.3.2630-10, annex 11 (2010)",
        "workplaces; repealed, replaced in 2021. Its text says octave bands, though its centres "
        "are those of thirds. From two legal databases.",
    ),
    "gost-1989": Table(
        _limits(_RUSSIAN),
        "USSR and Russia, GOST 12.1.001-89 (1989)",
        "workplaces. Lawton, HSE contract research report 343/2001, quotes an older set of 75, 85 "
        "and 110. Figures " + MEMORY,
    ),
    "poland-2018-8h": Table(
        _limits({10e3: 80.0, 20e3: 90.0, 25e3: 105.0, 31.5e3: 110.0}, last_hz=40e3),
        "Poland, regulation of 2018, 8 h equivalent level",
        "workers, an equivalent level over 8 h a day, held together with the maximum levels. "
        "Figures " + MEMORY,
    ),
    "poland-2018-max": Table(
        _limits({10e3: 100.0, 20e3: 110.0, 25e3: 125.0, 31.5e3: 130.0}, last_hz=40e3),
        "Poland, regulation of 2018, maximum level",
        "workers, a maximum to be held together with the 8 h levels, 20 dB lower. Figures "
        + MEMORY,
    ),
    "ears-proposal": Table(
        {20e3: 77.0, 25e3: 102.0},
        f"EARS project, proposal, {_LEIGHTON}",
        "a proposal of researchers, for these two bands alone. From a secondary source.",
    ),
    "japan-1971": Table(
        _limits({12.5e3: 90.0, 20e3: 110.0}),
        "Japan, limits at work of 1971",
        "workers. Figures of low confidence, " + MEMORY,
    ),
    "sweden-1978": Table(
        _limits({20e3: 105.0, 25e3: 110.0, 31.5e3: 115.0}),
        "Sweden, limits at work of 1978",
        "workers. Figures of low confidence, " + MEMORY,
    ),
    "norway-1978": Table(
        _limits({25e3: 120.0}),
        "Norway, limits at work of 1978",
        "workers, in octave bands from 22 kHz up: put here on each third of them, so that three "
        "thirds together may pass it by 4.8 dB. Figure of low confidence, " + MEMORY,
    ),
    "australia-1981": Table(
        _limits({12.5e3: 75.0, 25e3: 110.0}),
        "Australia, limits at work of 1981",
        "workers. Figures " + MEMORY,
    ),
    "vdi-3766": Table(
        {20e3: 110.0},
        "Germany, VDI 3766 and VDI 2058-2",
        "workers, a maximum at 20 kHz alone; its measure of a day, an AU-weighted level of 85 dB, "
        "is no figure of a band. Figures " + MEMORY,
    ),
}


def cap_db(table: Table, frequency_hz: float) -> float | None:
    """The table's figure for the band that holds the frequency; None where it is silent."""
    band = band_at(frequency_hz)
    return None if band is None else table.limits_db.get(band.nominal_hz)
