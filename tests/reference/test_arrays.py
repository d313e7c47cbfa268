"""Patterns of whole panels, by the product's field model, against the theory of uniform arrays."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.optimize import brentq, minimize_scalar

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.cells import cell_map, grid_positions, loom
from beamctl.acoustics.geometry import direction, panel_frame
from beamctl.acoustics.steering import cell_delays_s, feed_drive
from beamctl.acoustics.transfer import (
    REFERENCE_PA,
    cell_strength_pa_m,
    panel_emitters,
    transfer,
)

CARRIER_HZ = 40e3
AIR = Air()
WAVELENGTH_M = sound_speed_m_s(AIR) / CARRIER_HZ
RANGE_M = 1000.0  # far for every array here
FRAME = panel_frame((0.0, 0.0, 0.0))

# N cells half a wavelength apart, broadside: half-power and half-amplitude full widths, first side
# lobe in dB, first null; degrees. From sin(N psi/2) / (N sin(psi/2)), e.g. Balanis, Antenna Theory,
# ch. 6; agrees with a sum of sfs point sources.
BROADSIDE = {
    4: (26.3230, 35.9738, -11.3033, 30.0000),
    8: (12.8025, 17.4518, -12.7973, 14.4775),
    10: (10.2092, 13.9128, -12.9662, 11.5370),
    16: (6.3587, 8.6630, -13.1468, 7.1808),
    32: (3.1741, 4.3238, -13.2329, 3.5833),
    64: (1.5864, 2.1609, -13.2543, 1.7908),
}
# 16 cells half a wavelength apart: half-power edges about the steered angle, same source.
STEERED: dict[float, tuple[float, float]] = {
    15: (11.7333, 18.3174),
    30: (26.3938, 33.7425),
    45: (40.6657, 49.6912),
}

# sin(theta) = sin(theta0) + m lambda/d: pitch mm, steered to, other full lobes, for the
# wavelength of 40 kHz at 343.9845 m/s.
TABLE_WAVELENGTH_M = 343.9845 / 40e3
GRATING = (
    (4.3, 0, ()), (4.3, 10, ()), (4.3, 20, ()), (4.3, 30, ()),
    (8.6, 0, (-89.456, 89.456)), (8.6, 10, (-55.721,)), (8.6, 20, (-41.143,)),
    (8.6, 30, (-29.997,)),
    (10.0, 0, (-59.312, 59.312)), (10.0, 10, (-43.339,)), (10.0, 20, (-31.194,)),
    (10.0, 30, (-21.098,)),
    (10.2, 0, (-57.469, 57.469)), (10.2, 10, (-42.025,)), (10.2, 20, (-30.071,)),
    (10.2, 30, (-20.066,)),
    (16.0, 0, (-32.512, 32.512)), (16.0, 10, (-64.330, -21.335, 45.326)),
    (16.0, 20, (-47.133, -11.271, 61.582)), (16.0, 30, (-35.096, -2.148)),
    (18.0, 0, (-72.845, -28.539, 28.539, 72.845)), (18.0, 10, (-51.432, -17.705, 40.648)),
    (18.0, 20, (-37.842, -7.801, 55.062)), (18.0, 30, (-68.950, -27.098, 1.275, 77.893)),
)  # fmt: skip
# Pitch over wavelength at which the first grating lobe reaches 90 degrees: 1 / (1 + sin(theta0)).
LIMITS: dict[float, float] = {
    0: 1.0, 10: 0.852044, 20: 0.745145, 30: 0.666667, 45: 0.585786, 60: 0.535898, 90: 0.5,
}  # fmt: skip


class Pattern:
    """Far pattern of omnidirectional cells `at_m`, steered to an azimuth, re all cells in phase."""

    def __init__(self, at_m: NDArray[np.float64], azimuth_deg: float = 0.0) -> None:
        cells = cell_map(at_m, loom(at_m, "each"))
        self.emitters = panel_emitters(cells, FRAME, 1.0, 0.0, 0.0, 0.0)
        delays = cell_delays_s(at_m, direction(azimuth_deg, 0.0), 0.0, sound_speed_m_s(AIR), 0.0)
        self.drive = feed_drive(cells, delays, CARRIER_HZ)

    def along(self, directions: NDArray[np.float64]) -> NDArray[np.float64]:
        heard = transfer(RANGE_M * directions, self.emitters, AIR, CARRIER_HZ)
        return np.asarray(np.abs(heard @ self.drive) / np.abs(heard).sum(axis=1))

    def __call__(self, azimuth_deg: float) -> float:
        return float(self.along(direction([azimuth_deg], 0.0))[0])

    def crossing(self, level: float, low_deg: float, high_deg: float) -> float:
        return float(brentq(lambda a: self(a) - level, low_deg, high_deg, xtol=1e-9))

    def extreme(self, sign: float, low_deg: float, high_deg: float) -> float:
        found = minimize_scalar(
            lambda a: sign * self(a), bounds=(low_deg, high_deg), method="bounded",
            options={"xatol": 1e-7},
        )  # fmt: skip
        return float(found.x)


def line(count: int, pitch_m: float, azimuth_deg: float = 0.0) -> Pattern:
    return Pattern(grid_positions(count, 1, pitch_m), azimuth_deg)


@pytest.mark.parametrize("count", BROADSIDE)
def test_broadside_line(count: int) -> None:
    half_power, half_amplitude, side_db, null_deg = BROADSIDE[count]
    pattern = line(count, WAVELENGTH_M / 2)
    assert pattern(0.0) == pytest.approx(1.0, abs=1e-4)
    assert 2 * pattern.crossing(np.sqrt(0.5), 0.0, null_deg) == pytest.approx(half_power, abs=2e-4)
    assert 2 * pattern.crossing(0.5, 0.0, null_deg) == pytest.approx(half_amplitude, abs=2e-4)
    found_null = pattern.extreme(1.0, 0.7 * null_deg, 1.3 * null_deg)
    assert found_null == pytest.approx(null_deg, abs=2e-4)
    second_null = np.rad2deg(np.arcsin(min(1.0, 2 * np.sin(np.deg2rad(null_deg)))))
    side = pattern(pattern.extreme(-1.0, null_deg, second_null))
    assert 20.0 * np.log10(side) == pytest.approx(side_db, abs=1e-3)


@pytest.mark.parametrize("azimuth_deg", STEERED)
def test_steered_line(azimuth_deg: float) -> None:
    pattern = line(16, WAVELENGTH_M / 2, azimuth_deg)
    low, high = STEERED[azimuth_deg]
    level = np.sqrt(0.5)
    found_low = pattern.crossing(level, azimuth_deg - 6, azimuth_deg)
    found_high = pattern.crossing(level, azimuth_deg, azimuth_deg + 6)
    assert (found_low, found_high) == pytest.approx((low, high), abs=2e-4)


def test_square_panel_has_the_line_pattern_both_ways() -> None:
    pattern = Pattern(grid_positions(8, 8, WAVELENGTH_M / 2))
    edge = BROADSIDE[8][0] / 2
    both = pattern.along(direction([edge, 0.0], [0.0, edge]))
    np.testing.assert_allclose(both, np.sqrt(0.5), atol=1e-4)


@pytest.mark.parametrize(("pitch_mm", "azimuth_deg", "lobes"), GRATING)
def test_grating_lobes(pitch_mm: float, azimuth_deg: float, lobes: tuple[float, ...]) -> None:
    """Every lobe of full height is in the table, and every one of the table is there."""
    pattern = line(16, pitch_mm / 1000.0 * WAVELENGTH_M / TABLE_WAVELENGTH_M, azimuth_deg)
    azimuths = np.arange(-89.98, 89.99, 0.02)
    height = pattern.along(direction(azimuths, 0.0))
    inner = height[1:-1]
    tops = (inner > 0.99) & (inner >= height[:-2]) & (inner > height[2:])
    found = [pattern.extreme(-1.0, a - 0.05, a + 0.05) for a in azimuths[1:-1][tops]]
    np.testing.assert_allclose(found, sorted((azimuth_deg, *lobes)), atol=2e-3)


@pytest.mark.parametrize("azimuth_deg", LIMITS)
def test_largest_pitch_without_a_grating_lobe(azimuth_deg: float) -> None:
    """At the limit the lobe just arrives at 90 degrees; 5 % below, it has not."""
    edge = -90.0 + 1e-6
    assert line(16, LIMITS[azimuth_deg] * WAVELENGTH_M, azimuth_deg)(edge) > 0.999
    assert line(16, 0.95 * LIMITS[azimuth_deg] * WAVELENGTH_M, azimuth_deg)(edge) < 0.5


@pytest.mark.parametrize(
    ("columns", "rows", "gain_db"),
    [(8, 6, 33.62), (10, 5, 33.98), (8, 8, 36.12), (10, 10, 40.00), (16, 16, 48.16)],
)
def test_cells_in_phase_add_as_pressures(columns: int, rows: int, gain_db: float) -> None:
    """20 log10 N on the axis of N equal cells: elementary superposition, e.g. Kinsler et al."""
    at_m = grid_positions(columns, rows, 0.01)
    cells = cell_map(at_m, np.zeros(len(at_m), dtype=np.int64))
    panel = panel_emitters(cells, FRAME, 1.0, 0.009, CARRIER_HZ, 20.0)
    lone = cell_map(np.zeros((1, 3)), np.zeros(1, dtype=np.int64))
    single = panel_emitters(lone, FRAME, 1.0, 0.009, CARRIER_HZ, 20.0)
    far = np.array([(0.0, RANGE_M, 0.0)])
    ratio = np.abs(transfer(far, panel, AIR, CARRIER_HZ) / transfer(far, single, AIR, CARRIER_HZ))
    assert 20.0 * np.log10(float(ratio[0, 0])) == pytest.approx(gain_db, abs=0.006)


@pytest.mark.parametrize(
    ("level_db", "pressure_pa", "strength_pa_m"),
    [(115.0, 11.247, 3.374), (120.0, 20.0, 6.0), (106.0, 3.991, 1.1972)],
)
def test_data_sheet_level(level_db: float, pressure_pa: float, strength_pa_m: float) -> None:
    """Levels of 40 kHz cells at 0.3 m with 10 V rms, from public data sheets, re 20 uPa."""
    found = cell_strength_pa_m(level_db, 10.0)
    assert found == pytest.approx(strength_pa_m, rel=2e-4)
    assert found / 0.3 == pytest.approx(pressure_pa, rel=2e-4)
    assert cell_strength_pa_m(level_db, 5.0) == pytest.approx(found / 2.0)
    assert 20.0 * np.log10(found / REFERENCE_PA) == pytest.approx(level_db - 10.46, abs=0.003)
