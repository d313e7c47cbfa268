"""Delays against sfs-python and published delay tables."""

from __future__ import annotations

import numpy as np
import pytest
import sfs
from numpy.typing import NDArray

from beamctl.acoustics.air import Air, absorption_db_m, sound_speed_m_s
from beamctl.acoustics.cells import cell_map, grid_positions, loom
from beamctl.acoustics.geometry import direction, panel_frame
from beamctl.acoustics.steering import base_delay_s, cell_delays_s, feed_drive
from beamctl.acoustics.transfer import panel_emitters, transfer

SPEED_M_S = 343.9845
LINE_M = grid_positions(8, 1, 0.01)  # 8 cells on the x axis, 10 mm apart, centred

# Microseconds, cells from -35 to +35 mm, the smallest taken off: sfs 0.6.3, time-domain functions.
FOCUSED = {
    (0.0, 0.5, 0.0): (0, 1.741047, 2.902903, 3.484179, 3.484179, 2.902903, 1.741047, 0),
    (0.1, 0.5, 0.0): (0, 7.314946, 14.099046, 20.345026, 26.046069, 31.195856, 35.788592,
                      39.819040),
}  # fmt: skip
STEPS: dict[float, float] = {10: 5.048139601, 20: 9.942894035, 30: 14.535538665}
# Sum of unit monopoles 1/(4 pi r) at those foci, sfs 0.6.3, frequency-domain point sources.
MONOPOLES = {(0.0, 0.5, 0.0): 1.27190634, (0.1, 0.5, 0.0): 1.24740114}


def delays_s(
    at_m: NDArray[np.float64], target_m: tuple[float, float, float]
) -> NDArray[np.float64]:
    distance_m = float(np.linalg.norm(target_m))
    toward = np.array(target_m) / distance_m
    return cell_delays_s(at_m, toward, 1.0 / distance_m, SPEED_M_S, base_delay_s(at_m))


@pytest.mark.parametrize("target_m", FOCUSED)
def test_focus_delays(target_m: tuple[float, float, float]) -> None:
    found = delays_s(LINE_M, target_m)
    np.testing.assert_allclose(1e6 * (found - found.min()), FOCUSED[target_m], atol=6e-7)


@pytest.mark.parametrize("azimuth_deg", STEPS)
def test_steering_step(azimuth_deg: float) -> None:
    found = cell_delays_s(LINE_M, direction(azimuth_deg, 0.0), 0.0, SPEED_M_S, 0.0)
    np.testing.assert_allclose(1e6 * np.diff(found), STEPS[azimuth_deg], atol=1e-9)
    assert np.argmax(found) == 7  # toward +x, the cell nearest +x fires last


@pytest.mark.parametrize("angles", [(0, 0), (10, 0), (-20, 15), (45, -30), (0, 60)])
def test_plane_wave_against_sfs(angles: tuple[float, float]) -> None:
    at_m = grid_positions(8, 8, 0.01)
    toward = direction(*angles)
    facing = np.tile((0.0, 1.0, 0.0), (64, 1))
    expected, *_ = sfs.td.wfs.plane_25d(at_m, facing, toward, c=SPEED_M_S)
    found = cell_delays_s(at_m, toward, 0.0, SPEED_M_S, base_delay_s(at_m))
    assert np.all(found >= 0.0)
    np.testing.assert_allclose(found - found[0], expected - expected[0], atol=1e-18)


@pytest.mark.parametrize("target_m", [(0, 0.5, 0), (0.1, 0.5, 0), (-0.3, 0.4, 0.2), (1, 9, -2)])
def test_focus_against_sfs(target_m: tuple[float, float, float]) -> None:
    at_m = grid_positions(8, 8, 0.01)
    facing = np.tile((0.0, 1.0, 0.0), (64, 1))
    expected, *_ = sfs.td.wfs.focused_25d(
        at_m, facing, np.array(target_m, float), np.array((0, 1, 0)), (0, 2, 0), c=SPEED_M_S
    )
    found = delays_s(at_m, target_m)
    assert np.all(found >= 0.0)
    np.testing.assert_allclose(found - found[0], expected - expected[0], atol=2e-17)


@pytest.mark.parametrize("target_m", MONOPOLES)
def test_cells_add_up_at_the_focus(target_m: tuple[float, float, float]) -> None:
    air = Air()
    cells = cell_map(LINE_M, loom(LINE_M, "each"))
    emitters = panel_emitters(cells, panel_frame((0, 0, 0)), 1.0 / (4.0 * np.pi), 0.0, 0.0, 0.0)
    distance_m = float(np.linalg.norm(target_m))
    toward = np.array(target_m) / distance_m
    wanted = cell_delays_s(LINE_M, toward, 1.0 / distance_m, sound_speed_m_s(air), 0.0)
    heard = transfer(np.array([target_m]), emitters, air, 40e3)[0]
    assert abs(heard @ feed_drive(cells, wanted, 40e3)) == pytest.approx(np.abs(heard).sum())
    absorbed_db = absorption_db_m(40e3, air) * np.linalg.norm(LINE_M - target_m, axis=1)
    free = np.abs(heard) * 10.0 ** (absorbed_db / 20.0)
    assert free.sum() == pytest.approx(MONOPOLES[target_m], abs=6e-9)
