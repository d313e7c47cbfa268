"""Every formula of the air refuses what it was not made for."""

from __future__ import annotations

import numpy as np
import pytest

from beamctl.acoustics.air import (
    Air,
    absorption_db_m,
    density_kg_m3,
    molar_concentration_pct,
    sound_speed_m_s,
)


@pytest.mark.parametrize(
    ("air", "message"),
    [
        (Air(-0.1), "temperature_c is -0.1, outside 0 to 30"),
        (Air(30.1), "temperature_c is 30.1, outside 0 to 30"),
        (Air(pressure_kpa=74.9), "pressure_kpa is 74.9, outside 75 to 102"),
        (Air(pressure_kpa=102.1), "pressure_kpa is 102.1, outside 75 to 102"),
        (Air(humidity_pct=101.0), "humidity_pct is 101, outside 0 to 100"),
        (Air(float("nan")), "temperature_c is nan"),
    ],
)
def test_sound_speed_range(air: Air, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        sound_speed_m_s(air)


def test_sound_speed_refuses_much_carbon_dioxide() -> None:
    with pytest.raises(ValueError, match=r"carbon_dioxide is 0.02"):
        sound_speed_m_s(Air(), 0.02)


@pytest.mark.parametrize(
    ("frequency_hz", "air", "message"),
    [
        (1e3, Air(-21.0), "temperature_c is -21, outside -20 to 50"),
        (1e3, Air(51.0), "temperature_c is 51"),
        (1e3, Air(pressure_kpa=201.0), "pressure_kpa is 201"),
        ((1e3, 1.1e6), Air(), "frequency_hz is 1.1e"),
        (-1.0, Air(), "frequency_hz is -1"),
        (float("nan"), Air(), "frequency_hz is nan"),
        (1e3, Air(humidity_pct=-1.0), "humidity_pct is -1"),
    ],
)
def test_absorption_range(frequency_hz: float, air: Air, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        absorption_db_m(frequency_hz, air)


def test_a_frequency_below_the_range_is_found_in_a_list() -> None:
    with pytest.raises(ValueError, match="frequency_hz is -5"):
        absorption_db_m((40e3, -5.0), Air())


def test_density_range() -> None:
    with pytest.raises(ValueError, match="pressure_kpa is 59"):
        density_kg_m3(Air(pressure_kpa=59.0))


def test_humid_range_of_the_molar_concentration() -> None:
    with pytest.raises(ValueError, match="humidity_pct is 120"):
        molar_concentration_pct(Air(humidity_pct=120.0))


def test_absorption_keeps_the_shape() -> None:
    assert absorption_db_m(np.full((2, 3), 40e3), Air()).shape == (2, 3)
    assert absorption_db_m(40e3, Air()).shape == ()
