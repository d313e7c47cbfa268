"""The field model against a cell-by-cell sum written apart from it."""

from __future__ import annotations

import cmath
import math
import tracemalloc

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.special import jv

from beamctl.acoustics import transfer as module
from beamctl.acoustics.air import Air, absorption_db_m, sound_speed_m_s
from beamctl.acoustics.cells import cell_map, grid_positions, hex_positions, loom
from beamctl.acoustics.geometry import mirror_point, panel_frame
from beamctl.acoustics.steering import feed_drive
from beamctl.acoustics.transfer import Emitters, image, panel_emitters, transfer

AIR = Air(21.0, 45.0, 99.0)
WALL = ((-6.0, 14.0, 0.0), (12.0, 0.0, 0.0), (0.0, 0.0, 5.0))


def panel() -> Emitters:
    """A hexagon on columns, with a dead cell, a turned one and a late one."""
    at_m = hex_positions(3, 0.0103)
    cells = cell_map(at_m, loom(at_m, "columns"))
    dead, polarity, phase = cells.dead.copy(), cells.polarity.copy(), cells.phase_deg.copy()
    dead[5], polarity[9], phase[20] = True, -1.0, 25.0
    cells = cells._replace(dead=dead, polarity=polarity, phase_deg=phase)
    return panel_emitters(cells, panel_frame((0.5, 1.0, 3.0), 20.0, -15.0, 7.0), 1.7, 0.009, 4e4, 9)


def points(count: int = 40) -> NDArray[np.float64]:
    random = np.random.default_rng(7)
    return random.uniform((-6.0, -3.0, 0.0), (6.0, 12.0, 5.0), (count, 3))


def one_by_one(at: NDArray[np.float64], e: Emitters, frequency_hz: float) -> list[list[complex]]:
    """The same sum in plain complex arithmetic, one point and one cell at a time."""
    k = 2.0 * math.pi * frequency_hz / sound_speed_m_s(AIR)
    db_m = float(absorption_db_m(frequency_hz, AIR))
    table = []
    for p in at:
        row = [0j] * e.feeds
        for n, cell in enumerate(e.at_m):
            way = [float(a - b) for a, b in zip(p, cell, strict=True)]
            r = math.sqrt(sum(w * w for w in way))
            angle = math.acos(sum(w * float(f) for w, f in zip(way, e.facing, strict=True)) / r)
            if angle > math.pi / 2.0:
                continue
            x = k * e.diameter_m / 2.0 * math.sin(angle)
            shape = 2.0 * float(jv(1, x)) / x if x > 0.0 else 1.0
            detuned = frequency_hz / e.resonance_hz - e.resonance_hz / frequency_hz
            ring = 1.0 / complex(1.0, e.q * detuned)
            loss = 10.0 ** (-db_m * r / 20.0)
            row[e.feed[n]] += (
                complex(e.strength_pa_m[n]) * shape * ring * loss * cmath.exp(-1j * k * r) / r
            )
        table.append(row)
    return table


@pytest.mark.parametrize("frequency_hz", [38e3, 40e3, 41.5e3])
def test_against_a_sum_cell_by_cell(frequency_hz: float) -> None:
    found = transfer(points(), panel(), AIR, frequency_hz)
    expected = np.array(one_by_one(points(), panel(), frequency_hz))
    assert np.any(expected == 0.0) and np.any(np.abs(expected) > 0.1)
    np.testing.assert_allclose(found, expected, rtol=1e-9, atol=1e-12)


def test_the_drive_makes_good_what_is_turned_or_late() -> None:
    """Cells wired the wrong way round or late, driven for it, sound as a panel of good cells."""
    at_m = grid_positions(6, 4, 0.0103)
    good = cell_map(at_m, loom(at_m, "each"))
    random = np.random.default_rng(3)
    odd = good._replace(
        polarity=random.choice((-1.0, 1.0), 24), phase_deg=random.uniform(-180.0, 180.0, 24)
    )
    delays_s = random.uniform(0.0, 1e-4, 24)
    heard = [
        transfer(points(), panel_emitters(cells, panel_frame((0, 0, 3)), 1, 0, 0, 0), AIR, 40e3)
        @ feed_drive(cells, delays_s, 40e3)
        for cells in (good, odd)
    ]
    np.testing.assert_allclose(heard[1], heard[0], rtol=1e-9)


def test_lots_do_not_show(monkeypatch: pytest.MonkeyPatch) -> None:
    whole = transfer(points(), panel(), AIR, 40e3)
    monkeypatch.setattr(module, "WORKING_BYTES", 7 * module.PAIR_BYTES * len(panel().at_m))
    np.testing.assert_array_equal(transfer(points(), panel(), AIR, 40e3), whole)


def test_working_memory_stays_bounded() -> None:
    at_m = grid_positions(16, 16, 0.01)
    e = panel_emitters(cell_map(at_m, loom(at_m, "each") * 0), panel_frame((0, 0, 3)), 1, 0, 0, 0)
    tracemalloc.start()
    transfer(points(5000), e, AIR, 40e3)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert peak < 40e6


def test_silent_behind_and_finite_on_a_cell() -> None:
    e = panel()
    behind = e.at_m.mean(axis=0) - 0.5 * e.facing
    assert np.all(transfer(behind[np.newaxis], e, AIR, 40e3) == 0.0)
    assert np.all(np.isfinite(transfer(e.at_m, e, AIR, 40e3)))


def test_feeds_without_cells_are_silent() -> None:
    e = panel()._replace(feeds=20)
    found = transfer(points(), e, AIR, 40e3)
    assert found.shape == (40, 20)
    assert np.all(found[:, 13:] == 0.0)
    np.testing.assert_array_equal(found[:, :13], transfer(points(), panel(), AIR, 40e3))


def test_no_resonance_answers_alike_everywhere() -> None:
    flat = panel()._replace(q=0.0, resonance_hz=0.0)
    ringing = transfer(points(), panel()._replace(resonance_hz=41e3), AIR, 41e3)
    np.testing.assert_allclose(transfer(points(), flat, AIR, 41e3), ringing, rtol=1e-12)


def test_image_sounds_as_the_panel_does_on_the_other_side() -> None:
    mirrored = image(panel(), *WALL, 0.9)
    there = transfer(mirror_point(points(), *WALL), mirrored, AIR, 40e3)
    np.testing.assert_allclose(there, 0.9 * transfer(points(), panel(), AIR, 40e3), rtol=1e-8)
