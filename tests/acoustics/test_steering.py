"""Properties of the delays and of what the feeds make of them."""

from __future__ import annotations

from decimal import Decimal, localcontext
from typing import Any

import numba
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from beamctl.acoustics.cells import cell_map, grid_positions, loom
from beamctl.acoustics.geometry import direction
from beamctl.acoustics.steering import (
    SLOWEST_AIR_M_S,
    base_delay_s,
    cell_delays_s,
    feed_delays_s,
    feed_drive,
    path_lead_m,
)

AT_M = grid_positions(8, 8, 0.01)
CARRIER_HZ = 40e3
COMPILED: Any = numba.njit(path_lead_m)


def exact_lead(r: tuple[float, float], f: tuple[float, float]) -> float:
    """|f| - |f - r| in 50 digits, for a cell and a focus in one plane."""
    with localcontext() as context:
        context.prec = 50
        rx, ry, fx, fy = (Decimal(v) for v in (*r, *f))
        apart = ((fx - rx) ** 2 + (fy - ry) ** 2).sqrt()
        return float((fx * fx + fy * fy).sqrt() - apart)


@settings(deadline=None)
@given(
    st.floats(-0.3, 0.3),
    st.floats(-1.4, 1.4),
    st.sampled_from((0.2, 1.0, 7.3, 1e3, 1e6, 1e9)),
)
def test_path_lead_is_the_difference_of_the_distances(
    cell_m: float, angle: float, distance_m: float
) -> None:
    """To a femtometre near and far, where the plain difference has long lost its digits."""
    fx, fy = distance_m * np.sin(angle), distance_m * np.cos(angle)
    found = path_lead_m(np.array(cell_m * np.sin(angle)), np.array(cell_m**2), 1.0 / distance_m)
    assert float(found) == pytest.approx(exact_lead((cell_m, 0.0), (fx, fy)), abs=1e-15)


def test_path_lead_at_infinity_is_the_plane_wave() -> None:
    dot = np.array((-0.1, 0.0, 0.05))
    np.testing.assert_array_equal(path_lead_m(dot, dot**2 + 0.01, 0.0), dot)


@settings(deadline=None)
@given(st.floats(-0.3, 0.3), st.floats(0.0, 0.09), st.floats(0.0, 3.0))
def test_path_lead_compiles_for_scalars(dot_m: float, extra_m2: float, per_m: float) -> None:
    square_m2 = dot_m**2 + extra_m2
    expected = float(path_lead_m(np.array(dot_m), np.array(square_m2), per_m))
    assert COMPILED(dot_m, square_m2, per_m) == pytest.approx(expected, rel=1e-12, abs=1e-18)


@settings(deadline=None)
@given(st.floats(-90, 90), st.floats(-90, 90), st.floats(0.0, 20.0), st.floats(331.0, 352.0))
def test_no_delay_is_negative(azimuth: float, elevation: float, per_m: float, c: float) -> None:
    base = base_delay_s(AT_M)
    delays = cell_delays_s(AT_M, direction(azimuth, elevation), per_m, c, base)
    assert np.all(delays >= 0.0)
    assert np.all(delays <= 2.0 * base)


def test_base_delay_is_the_corner_cell_in_the_slowest_air() -> None:
    assert base_delay_s(AT_M) == pytest.approx(0.035 * np.sqrt(2.0) / SLOWEST_AIR_M_S)


def test_cell_nearest_the_aim_fires_last() -> None:
    right = cell_delays_s(AT_M, direction(20.0, 0.0), 0.0, 344.0, 0.0).reshape(8, 8)
    assert np.all(np.diff(right, axis=1) > 0.0)
    up = cell_delays_s(AT_M, direction(0.0, 20.0), 0.0, 344.0, 0.0).reshape(8, 8)
    assert np.all(np.diff(up, axis=0) < 0.0)


def test_drive_of_single_cells_is_their_phase() -> None:
    cells = cell_map(AT_M, loom(AT_M, "each"))
    delays = cell_delays_s(AT_M, direction(10.0, 5.0), 0.2, 344.0, base_delay_s(AT_M))
    drive = feed_drive(cells, delays, CARRIER_HZ)
    np.testing.assert_allclose(drive, np.exp(-2j * np.pi * CARRIER_HZ * delays), atol=1e-12)
    np.testing.assert_array_equal(feed_delays_s(cells, delays), delays)


def test_polarity_phase_and_trim_are_turned_back() -> None:
    cells = cell_map(AT_M[:3], np.array((0, 1, 2)))._replace(
        polarity=np.array((1.0, -1.0, 1.0)),
        phase_deg=np.array((0.0, 0.0, 90.0)),
        trim_db=np.array((0.0, 0.0, -20.0)),
    )
    drive = feed_drive(cells, np.zeros(3), CARRIER_HZ)
    np.testing.assert_allclose(drive, (1.0, -1.0, -0.1j), atol=1e-15)


def test_columns_take_the_mean_of_their_live_cells() -> None:
    cells = cell_map(AT_M, loom(AT_M, "columns"))
    dead = np.zeros(64, dtype=np.bool_)
    dead[[0, 8, 16]] = True  # upper three of the left column
    dead[3::8] = True  # the whole fourth column
    cells = cells._replace(dead=dead)
    delays = cell_delays_s(AT_M, direction(12.0, 4.0), 0.0, 344.0, base_delay_s(AT_M))
    turns = np.exp(-2j * np.pi * CARRIER_HZ * delays).reshape(8, 8)
    drive = feed_drive(cells, delays, CARRIER_HZ)
    assert drive[0] == pytest.approx(turns[3:, 0].mean())
    assert drive[1] == pytest.approx(turns[:, 1].mean())
    assert drive[3] == 0.0
    feed_delays = feed_delays_s(cells, delays)
    assert feed_delays[0] == pytest.approx(delays.reshape(8, 8)[3:, 0].mean())
    assert feed_delays[3] == base_delay_s(AT_M)
