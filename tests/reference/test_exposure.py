"""Third-octave bands and exposure tables against their standards and sources."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from beamctl.acoustics.exposure import BANDS, TABLES, band_at, cap_db

# IEC 61260-1:2014 base 10, nominal kHz, exact midband, lower and upper edge in Hz, to 0.01 Hz:
# pyfar 0.8.1 and acoustic-toolbox 0.2.2 agree.
EDGES = (
    (10, 10000.00, 8912.51, 11220.18),
    (12.5, 12589.25, 11220.18, 14125.38),
    (16, 15848.93, 14125.38, 17782.79),
    (20, 19952.62, 17782.79, 22387.21),
    (25, 25118.86, 22387.21, 28183.83),
    (31.5, 31622.78, 28183.83, 35481.34),
    (40, 39810.72, 35481.34, 44668.36),
    (50, 50118.72, 44668.36, 56234.13),
    (63, 63095.73, 56234.13, 70794.58),
    (80, 79432.82, 70794.58, 89125.09),
    (100, 100000.00, 89125.09, 112201.85),
)

# dB re 20 uPa in the bands 10 12.5 16 20 25 31.5 40 50 63 80 100 kHz. IRPA/INIRC, Health Phys. 46
# (1984) 969, and Health Canada Safety Code 24 (1991) table 5, as quoted by Howard, Hansen & Zander,
# J. Occup. Health Safety Aust. NZ 21 (2004) 253, and Leighton, Proc. R. Soc. A 472 (2016) 20150624.
LIMITS: dict[str, tuple[float | None, ...]] = {
    "irpa-1984-public": (None, None, None, 70, *[100] * 7),
    "irpa-1984-workers": (None, None, None, 75, *[110] * 7),
    "health-canada-1991": (None, None, 75, 75, *[110] * 4, None, None, None),
}


def test_band_edges() -> None:
    found = [(b.nominal_hz / 1e3, b.mid_hz, b.low_hz, b.high_hz) for b in BANDS]
    np.testing.assert_allclose(found, EDGES, rtol=0, atol=0.0051)


def test_bands_leave_no_gap() -> None:
    for below, above in itertools.pairwise(BANDS):
        assert below.high_hz == above.low_hz
        assert band_at(above.low_hz) is above
        assert band_at(np.nextafter(above.low_hz, 0.0)) is below


def test_nothing_outside_the_bands() -> None:
    assert band_at(8912.0) is None
    assert band_at(112202.0) is None
    assert band_at(float("nan")) is None


@pytest.mark.parametrize("name", LIMITS)
def test_limits_band_by_band(name: str) -> None:
    assert tuple(cap_db(TABLES[name], row[1]) for row in EDGES) == LIMITS[name]


def test_every_table_says_where_it_comes_from() -> None:
    assert set(TABLES) == set(LIMITS)
    for table in TABLES.values():
        assert "19" in table.source
        assert "Check before use" in table.standing


def test_lower_sideband_of_a_low_carrier_meets_the_stricter_band() -> None:
    """A 25 kHz carrier's lower sideband enters the 20 kHz band above 2.61 kHz of audio."""
    workers = TABLES["irpa-1984-workers"]
    assert cap_db(workers, 25e3 - 2.61e3) == 110
    assert cap_db(workers, 25e3 - 2.62e3) == 75
