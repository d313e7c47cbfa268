"""The envelope's band against the edges it is derived from."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from beamctl.signal.band import envelope_band


def test_sixteen_kilohertz_at_a_forty_kilohertz_carrier() -> None:
    assert envelope_band(40_000.0, 192_000.0) == (16_000.0, 17_600.0)


@pytest.mark.parametrize(
    ("carrier_hz", "rate_hz", "stop_hz"),
    [
        (25_000.0, 192_000.0, 2_600.0),  # the ear's bands
        (40_000.0, 96_000.0, 5_120.0),  # the converter's own band
        (39_000.0, 120_000.0, 11_000.0),  # a quarter of the rate
        (80_000.0, 768_000.0, 17_600.0),
    ],
)
def test_the_nearest_edge_decides(carrier_hz: float, rate_hz: float, stop_hz: float) -> None:
    band = envelope_band(carrier_hz, rate_hz)
    assert band.stop_hz == pytest.approx(stop_hz)
    assert band.pass_hz == pytest.approx(stop_hz / 1.1)


@pytest.mark.parametrize(
    ("carrier_hz", "rate_hz"), [(23_300.0, 192_000.0), (41_000.0, 88_200.0), (80_000.0, 96_000.0)]
)
def test_no_band_is_an_error(carrier_hz: float, rate_hz: float) -> None:
    with pytest.raises(ValueError, match="no band"):
        envelope_band(carrier_hz, rate_hz)


@given(st.floats(24_000.0, 80_000.0), st.integers(22_050, 192_000).map(lambda n: 4 * n))
def test_skirts_never_reach_the_ear_nor_fold(carrier_hz: float, rate_hz: int) -> None:
    try:
        band = envelope_band(carrier_hz, rate_hz)
    except ValueError:
        nearest = min(carrier_hz - 22_400.0, 0.47 * rate_hz - carrier_hz)
        assert nearest < 1_000.0
        return
    assert 900.0 < band.pass_hz < band.stop_hz
    assert carrier_hz - band.stop_hz >= 22_400.0 - 1e-6
    assert carrier_hz + band.stop_hz < rate_hz / 2.0
    assert band.stop_hz < rate_hz / 8.0
