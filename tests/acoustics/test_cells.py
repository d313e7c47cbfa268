"""Where cells sit, how they are counted, and what a loom can steer."""

from __future__ import annotations

import numpy as np
import pytest

from beamctl.acoustics.cells import (
    Loom,
    cell_map,
    grid_positions,
    hex_positions,
    loom,
    steerable,
)

WAVELENGTH_M = 0.0086


def test_grid_counts_from_upper_left_along_the_row_then_down() -> None:
    at_m = grid_positions(3, 2, 0.01)
    expected = [
        (-0.01, 0, 0.005), (0, 0, 0.005), (0.01, 0, 0.005),
        (-0.01, 0, -0.005), (0, 0, -0.005), (0.01, 0, -0.005),
    ]  # fmt: skip
    np.testing.assert_allclose(at_m, expected, atol=1e-17)


def test_hexagon_counts_row_by_row_from_the_top() -> None:
    at_m = hex_positions(1, 0.01)
    h = 0.01 * np.sqrt(0.75)
    expected = [
        (-0.005, 0, h), (0.005, 0, h),
        (-0.01, 0, 0), (0, 0, 0), (0.01, 0, 0),
        (-0.005, 0, -h), (0.005, 0, -h),
    ]  # fmt: skip
    np.testing.assert_allclose(at_m, expected, atol=1e-17)


@pytest.mark.parametrize("rings", range(6))
def test_hexagon_packs_neighbours_one_pitch_apart(rings: int) -> None:
    at_m = hex_positions(rings, 0.01)
    assert len(at_m) == 3 * rings * (rings + 1) + 1
    np.testing.assert_allclose(at_m.mean(axis=0), 0.0, atol=1e-16)
    apart = np.linalg.norm(at_m[:, None] - at_m, axis=-1)
    neighbours = np.sum(np.isclose(apart, 0.01), axis=1)
    assert np.sort(apart, axis=None)[len(at_m) :].min(initial=1.0) > 0.0099
    inner = np.linalg.norm(at_m, axis=1) < 0.01 * (rings - 0.5) * np.sqrt(0.75)
    assert np.all(neighbours[inner] == 6)


def test_looms_of_a_grid() -> None:
    at_m = grid_positions(3, 2, 0.01)
    assert loom(at_m, "each").tolist() == [0, 1, 2, 3, 4, 5]
    assert loom(at_m, "columns").tolist() == [0, 1, 2, 0, 1, 2]
    assert loom(at_m, "rows").tolist() == [0, 0, 0, 1, 1, 1]


def test_looms_of_a_hexagon() -> None:
    at_m = hex_positions(1, 0.01)
    assert loom(at_m, "columns").tolist() == [1, 3, 0, 2, 4, 1, 3]
    assert loom(at_m, "rows").tolist() == [0, 0, 1, 1, 1, 2, 2]


def test_loom_bears_positions_that_are_not_exact() -> None:
    at_m = grid_positions(8, 8, 0.0103)
    wobble = np.random.default_rng(1).uniform(-1e-6, 1e-6, at_m.shape)
    for kind in ("columns", "rows"):
        np.testing.assert_array_equal(loom(at_m + wobble, kind), loom(at_m, kind))


def test_cell_map_of_good_cells() -> None:
    at_m = grid_positions(4, 3, 0.01)
    cells = cell_map(at_m, loom(at_m, "rows"))
    assert cells.feeds == 3
    assert not cells.dead.any()
    np.testing.assert_array_equal(cells.polarity, 1.0)
    np.testing.assert_array_equal(cells.phase_deg, 0.0)
    np.testing.assert_array_equal(cells.trim_db, 0.0)


@pytest.mark.parametrize(
    ("kind", "expected"),
    [("each", (True, True)), ("columns", (True, False)), ("rows", (False, True))],
)
@pytest.mark.parametrize("at_m", [grid_positions(8, 8, 0.01), hex_positions(4, 0.01)])
def test_what_a_loom_steers(at_m: np.ndarray, kind: Loom, expected: tuple[bool, bool]) -> None:
    assert steerable(cell_map(at_m, loom(at_m, kind)), WAVELENGTH_M) == expected


def test_a_single_row_does_not_steer_up() -> None:
    at_m = grid_positions(8, 1, 0.01)
    assert steerable(cell_map(at_m, loom(at_m, "each")), WAVELENGTH_M) == (True, False)


def test_pairs_closer_than_a_wavelength_still_steer() -> None:
    at_m = grid_positions(8, 2, 0.005)
    pairs = np.arange(16) // 2
    assert steerable(cell_map(at_m, pairs), WAVELENGTH_M) == (True, True)
    assert steerable(cell_map(at_m, pairs), 0.004) == (False, True)


def test_dead_cells_do_not_count() -> None:
    at_m = grid_positions(2, 2, 0.01)
    cells = cell_map(at_m, loom(at_m, "columns"))
    assert steerable(cells, WAVELENGTH_M) == (True, False)
    upper = cells._replace(dead=np.array((False, True, True, False)))
    assert steerable(upper, WAVELENGTH_M) == (True, True)
    assert steerable(cells._replace(dead=np.ones(4, np.bool_)), WAVELENGTH_M) == (False, False)
