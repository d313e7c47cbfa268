"""Air: speed of sound, absorption, density, from temperature, humidity and pressure.

Sound speed   Cramer, J. Acoust. Soc. Am. 93 (1993) 2510, eq. 15; about 300 ppm uncertain
Absorption    ISO 9613-1:1993, eq. 3 to 5 and annex B; ±10 %, its table ends at 10 kHz
Density       CIPM-2007, Picard et al., Metrologia 45 (2008) 149, eq. 1

Measured ultrasonic absorption lies up to 30 % below the standard's formula (Lawrence & Simmons,
J. Acoust. Soc. Am. 71 (1982) 585): trust no prediction above 20 kHz to better than about 20 %.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

KELVIN = 273.15
REFERENCE_KPA = 101.325
REFERENCE_K = 293.15
TRIPLE_POINT_K = 273.16
CARBON_DIOXIDE = 400e-6  # mole fraction

CRAMER = (
    (331.5024, 0.603055, -0.000528),
    (51.471935, 0.1495874, -0.000782),
    (-1.82e-7, 3.73e-8, -2.93e-10),
    (-85.20931, -0.228525, 5.91e-5),
    (-2.835149, -2.15e-13, 29.179762, 0.000486),
)


@dataclass(frozen=True, slots=True)
class Air:
    """Air readings. Each formula checks its own range and raises ValueError outside it."""

    temperature_c: float = 20.0
    humidity_pct: float = 50.0
    pressure_kpa: float = REFERENCE_KPA

    @property
    def kelvin(self) -> float:
        """Absolute temperature."""
        return self.temperature_c + KELVIN


def sound_speed_m_s(air: Air, carbon_dioxide: float = CARBON_DIOXIDE) -> float:
    """Speed of sound, Cramer eq. 15, 0 to 30 °C, 75 to 102 kPa, CO2 mole fraction to 0.01."""
    _check("temperature_c", air.temperature_c, 0.0, 30.0)
    _check("pressure_kpa", air.pressure_kpa, 75.0, 102.0)
    _check("carbon_dioxide", carbon_dioxide, 0.0, 0.01)
    t = air.temperature_c
    p = 1000.0 * air.pressure_kpa
    water, co2 = water_mole_fraction(air), carbon_dioxide
    dry, by_water, by_pressure, by_co2 = (a + b * t + c * t * t for a, b, c in CRAMER[:4])
    a12, a13, a14, a15 = CRAMER[4]
    linear = dry + by_water * water + by_pressure * p + by_co2 * co2
    square = a12 * water**2 + a13 * p**2 + a14 * co2**2
    return float(linear + square + a15 * water * p * co2)


def water_mole_fraction(air: Air) -> float:
    """Mole fraction of water vapour, Cramer's appendix, with Davis' saturation pressure.

    Davis, Metrologia 29 (1992) 67; the same expressions as in CIPM-2007, eq. A1.1 to A1.3.
    """
    _check("humidity_pct", air.humidity_pct, 0.0, 100.0)
    p, t, k = 1000.0 * air.pressure_kpa, air.temperature_c, air.kelvin
    saturation_pa = np.exp(1.2378847e-5 * k**2 - 1.9121316e-2 * k + 33.93711047 - 6.3431645e3 / k)
    enhancement = 1.00062 + 3.14e-8 * p + 5.6e-7 * t**2
    return float(air.humidity_pct / 100.0 * enhancement * saturation_pa / p)


def density_kg_m3(air: Air) -> float:
    """Density of moist air, CIPM-2007 eq. 1, 15 to 27 °C, 60 to 110 kPa, water below 0.06.

    CIPM states 22 ppm in that range. Used here from 0 to 30 °C, 60 to 110 kPa, where what it
    feeds (the level of the sound made in the air) asks for no more than 0.1 %.
    """
    _check("temperature_c", air.temperature_c, 0.0, 30.0)
    _check("pressure_kpa", air.pressure_kpa, 60.0, 110.0)
    p, t, k = 1000.0 * air.pressure_kpa, air.temperature_c, air.kelvin
    x = water_mole_fraction(air)
    first = 1.58123e-6 - 2.9331e-8 * t + 1.1043e-10 * t**2
    first += (5.707e-6 - 2.051e-8 * t) * x + (1.9898e-4 - 2.376e-6 * t) * x**2
    second = 1.83e-11 - 0.765e-8 * x**2
    compressibility = 1.0 - p / k * first + (p / k) ** 2 * second
    return p * 28.96546e-3 / (compressibility * 8.314472 * k) * (1.0 - 0.3780 * x)


def molar_concentration_pct(air: Air) -> float:
    """Molar concentration of water vapour in percent, ISO 9613-1 annex B, eq. B.1 to B.3."""
    _check("humidity_pct", air.humidity_pct, 0.0, 100.0)
    exponent = -6.8346 * (TRIPLE_POINT_K / air.kelvin) ** 1.261 + 4.6151
    saturation = 10.0**exponent * REFERENCE_KPA / air.pressure_kpa
    return float(air.humidity_pct * saturation)


def relaxation_hz(air: Air) -> tuple[float, float]:
    """Relaxation frequencies of oxygen and nitrogen, ISO 9613-1 eq. 3 and 4."""
    h = molar_concentration_pct(air)
    pressure = air.pressure_kpa / REFERENCE_KPA
    warmth = air.kelvin / REFERENCE_K
    oxygen = pressure * (24.0 + 4.04e4 * h * (0.02 + h) / (0.391 + h))
    slope = np.exp(-4.170 * (warmth ** (-1.0 / 3.0) - 1.0))
    nitrogen = pressure * warmth**-0.5 * (9.0 + 280.0 * h * slope)
    return oxygen, float(nitrogen)


def absorption_db_m(frequency_hz: ArrayLike, air: Air) -> NDArray[np.float64]:
    """Absorption of tones (...) in dB per metre, ISO 9613-1 eq. 5.

    Held to the clause on ±10 %: -20 to 50 °C, below 200 kPa, to 10 Hz per pascal.
    """
    f = np.asarray(frequency_hz, dtype=np.float64)
    _check("temperature_c", air.temperature_c, -20.0, 50.0)
    _check("pressure_kpa", air.pressure_kpa, 1.0, 200.0)
    for extreme in (np.min(f), np.max(f)):
        _check("frequency_hz", float(extreme), 0.0, 10_000.0 * air.pressure_kpa)
    k, warmth = air.kelvin, air.kelvin / REFERENCE_K
    oxygen, nitrogen = relaxation_hz(air)
    classical = 1.84e-11 * REFERENCE_KPA / air.pressure_kpa * np.sqrt(warmth)
    relaxing = 0.01275 * np.exp(-2239.1 / k) / (oxygen + f**2 / oxygen)
    relaxing = relaxing + 0.1068 * np.exp(-3352.0 / k) / (nitrogen + f**2 / nitrogen)
    return np.asarray(8.686 * f**2 * (classical + warmth**-2.5 * relaxing), dtype=np.float64)


def _check(name: str, value: float, low: float, high: float) -> None:
    if not low <= value <= high:  # also refuses NaN
        raise ValueError(f"{name} is {value:g}, outside {low:g} to {high:g}")
