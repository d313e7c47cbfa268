"""Second beams: against the lattice's own directions, and against an independent sum all round."""

from __future__ import annotations

import numpy as np
import pytest
from support.forecasting import HZ, MEDIUM, panel_show, radiator

from beamctl.acoustics.geometry import direction
from beamctl.forecast.lobes import Lobe, Lobes
from beamctl.forecast.panel import ReadyPanel
from beamctl.show.show import Show

WITHIN_DEG = 0.5
FAR_M = 50.0  # beyond the far field of every panel here

# Full lobes of a line of cells: sin(theta) = sin(theta0) + m lambda/d (e.g. Balanis, Antenna
# Theory, ch. 6), for 40 kHz at 343.9845 m/s; pitch mm, steered to, the others in degrees. Of them
# those that a cell of nearly the pitch's width still makes within 20 dB.
LATTICE = {
    (10.0, 0): (-59.312, 59.312), (10.0, 10): (-43.339,), (10.0, 20): (-31.194,),
    (10.0, 30): (-21.098,), (16.0, 0): (-32.512, 32.512), (16.0, 10): (-21.335,),
    (16.0, 20): (-11.271,), (16.0, 30): (-35.096, -2.148),
}  # fmt: skip

# Carrier of the loudest second beam re the first, dB, for a line of 16 baffled pistons of 9 mm
# every 10 mm and of 14 mm every 16 mm: the array factor (ibid.) times 2 J1(x)/x (Kinsler et al.).
LEVELS_DB = {
    (10.0, 0): -11, (10.0, 5): -8, (10.0, 10): -6, (10.0, 15): -4, (10.0, 20): -2,
    (10.0, 30): 1.6, (16.0, 0): -10, (16.0, 5): -6, (16.0, 10): -3, (16.0, 15): -0.3,
    (16.0, 20): 2.5, (16.0, 30): 8,
}  # fmt: skip
CELL_MM = {10.0: 9.0, 16.0: 14.0}


def line(pitch_mm: float) -> Show:
    return panel_show(16, 1, pitch_mm, cell_mm=CELL_MM[pitch_mm])


def second(
    show: Show, azimuth: float, elevation: float = 0.0, per_m: float = 0.0
) -> tuple[Lobe, tuple[Lobe, ...]]:
    """The first beam and the second ones, steered to angles in degrees."""
    ready = ReadyPanel(show, "p")
    x, y, z = direction(azimuth, elevation).tolist()
    drive = ready.drive((x, y, z, per_m))
    lobes = Lobes(ready)
    first = lobes.first(drive, (x, y, z, per_m))
    return first, lobes.second(drive, (x, y, z, per_m), first)


@pytest.mark.parametrize(("pitch_mm", "azimuth"), LATTICE)
def test_they_point_where_the_lattice_says(pitch_mm: float, azimuth: float) -> None:
    """A cell's own directivity pulls each toward the axis: by less than half a degree but at 0."""
    _, found = second(line(pitch_mm), azimuth)
    told = sorted(lobe.azimuth_deg for lobe in found)
    assert told == pytest.approx(sorted(LATTICE[pitch_mm, azimuth]), abs=WITHIN_DEG)
    assert all(abs(lobe.elevation_deg) < WITHIN_DEG for lobe in found)


@pytest.mark.parametrize(("pitch_mm", "azimuth"), LEVELS_DB)
def test_they_are_as_loud_as_pistons_make_them(pitch_mm: float, azimuth: float) -> None:
    expected_db = LEVELS_DB[pitch_mm, azimuth]
    _, found = second(line(pitch_mm), azimuth)
    print(f"{pitch_mm:g} mm at {azimuth} deg: {found[0].over_first_db:+.2f} dB, {expected_db}")
    assert found[0].over_first_db == pytest.approx(expected_db, abs=0.5)


def test_a_10_mm_panel_at_30_degrees_has_its_second_beam_at_minus_21_and_louder() -> None:
    _, found = second(panel_show(8, 8, 10.0), 30.0)
    assert found[0].azimuth_deg == pytest.approx(-21.1, abs=WITHIN_DEG)
    assert found[0].over_first_db > 0.0


def test_half_a_wavelength_apart_there_is_none() -> None:
    first, found = second(panel_show(16, 16, 4.3, cell_mm=4.0), 20.0)
    assert found == ()
    assert first.azimuth_deg == pytest.approx(20.0, abs=0.3)


def levels_of(show: Show, drive: np.ndarray, units: np.ndarray, range_m: float) -> np.ndarray:
    """dB (K,) on a sphere about a panel that looks along +y, by the independent sum."""
    panel = radiator(show)
    points = np.array(show.rig.panel["p"].at_m) + range_m * units
    pressure = panel.transfers_pa(points, np.array([HZ]))[0] @ drive
    return 20.0 * np.log10(np.abs(pressure) / 20e-6)


def steered(show: Show, unit: np.ndarray, per_m: float) -> np.ndarray:
    """Phasors (F,) of the independent sum's own."""
    at_m = np.array(show.rig.panel["p"].at_m)
    away_m = 1.0 / per_m if per_m else 1.0
    return radiator(show).phasors(at_m + away_m * unit, per_m > 0.0, np.array([HZ]))[0]


@pytest.mark.parametrize(
    ("azimuth", "elevation", "per_m"),
    [(12.0, -3.0, 0.0), (-20.0, 8.0, 0.0), (12.0, -3.0, 0.5)],
)
def test_an_independent_sum_all_round_finds_the_same(
    azimuth: float, elevation: float, per_m: float
) -> None:
    """Every maximum within 20 dB that a fine grid of directions shows is one of them, and no side
    lobe is: those of 8 by 8 cells stay 12.8 dB under what their cells could make there."""
    show = panel_show(8, 8, 10.0)
    first, found = second(show, azimuth, elevation, per_m)
    range_m = 1.0 / per_m if per_m else FAR_M
    drive = steered(show, direction(azimuth, elevation), per_m)
    step = 0.014
    cosines = np.stack(np.meshgrid(*[np.arange(-0.98, 0.981, step)] * 2, indexing="ij"), -1)
    inside = np.sum(cosines**2, axis=-1) < 0.98**2
    units = np.zeros((*inside.shape, 3))
    units[..., 0], units[..., 2] = cosines[..., 0], cosines[..., 1]
    units[..., 1] = np.sqrt(np.maximum(1.0 - np.sum(cosines**2, axis=-1), 0.0))
    power = np.full(inside.shape, -np.inf)
    power[inside] = levels_of(show, drive, units[inside], range_m)
    alone = np.full(inside.shape, -np.inf)  # one cell's, with as much as all 64 in phase make
    one = panel_show(1, 1, 10.0)
    alone[inside] = levels_of(one, np.ones(1), units[inside], range_m) + 20.0 * np.log10(64)
    shifted = [
        np.roll(power, (a, b), (0, 1)) for a in (-1, 0, 1) for b in (-1, 0, 1) if (a, b) != (0, 0)
    ]
    with np.errstate(invalid="ignore"):
        tops = inside & (power >= np.max(shifted, axis=0)) & (power > alone - 6.0)
    reference = levels_of(show, drive, first.unit[np.newaxis], range_m)[0]
    others = tops & (power > reference - 19.0)
    others &= np.linalg.norm(units - first.unit, axis=-1) > 0.1
    told = np.array([lobe.unit for lobe in found])
    for unit, level in zip(units[others], power[others], strict=True):
        if np.hypot(unit[0], unit[2]) > 0.95:  # grazing: half of the lobe is not to be seen
            continue
        nearest = int(np.argmin(np.linalg.norm(told - unit, axis=1)))
        assert np.linalg.norm(told[nearest] - unit) < 2 * step
        assert found[nearest].over_first_db == pytest.approx(level - reference, abs=0.2)
    assert np.count_nonzero(others) >= 2


def test_the_first_beam_is_the_predicted_peak_and_straight_on_where_nothing_steers() -> None:
    columns = panel_show(16, 4, 10.0, loom="columns")
    first, found = second(columns, 10.0, 3.0)
    assert first.elevation_deg == pytest.approx(0.0, abs=0.05)
    assert first.azimuth_deg == pytest.approx(9.95, abs=0.1)
    # four cells of one column, 10 mm apart, beam up and down by themselves as well
    assert {round(lobe.elevation_deg, -1) for lobe in found} >= {0.0, 50.0, -50.0}


def test_the_medium_is_the_table_s() -> None:
    assert MEDIUM.speed_m_s == pytest.approx(343.9845, abs=0.005)
