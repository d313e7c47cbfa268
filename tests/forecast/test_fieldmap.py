"""The field over places of the room, against an independent sum over cells and mirror images."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from support.forecasting import HZ, panel_show, radiator, rectangle
from support.radiation import Array

from beamctl.acoustics.geometry import direction
from beamctl.forecast.fieldmap import FieldMap, level_db
from beamctl.forecast.panel import ReadyPanel, place_of
from beamctl.guard.travels import Place
from beamctl.show.settled import Settled
from beamctl.show.show import Show
from beamctl.show.targets import Target

WALLS: dict[str, dict[str, Any]] = {
    "back": {
        "corner_m": (-4.0, 8.0, -2.0), "along_m": (8.0, 0.0, 0.0), "up_m": (0.0, 0.0, 4.0),
        "reflection": 0.9,
    },
    "side": {
        "corner_m": (3.0, 2.0, -2.0), "along_m": (0.0, 4.0, 0.0), "up_m": (0.0, 0.0, 3.0),
        "reflection": 0.5,
    },
}  # fmt: skip


def points_m(seed: int, count: int = 400) -> Array:
    low, high = np.array((-4.0, 0.5, -1.9)), np.array((4.0, 7.9, 2.0))
    return np.random.default_rng(seed).uniform(low, high, (count, 3))


def summed_pa(show: Show, points: Array, drive: np.ndarray) -> Array:
    """Direct path and first reflections, magnitudes added."""
    panel, hz = radiator(show), np.array([HZ])
    total = np.abs(panel.transfers_pa(points, hz)[0] @ drive)
    for surface in map(rectangle, show.house.surface.values()):
        image = panel.in_mirror(surface)
        seen = surface.lets_through(image.cells_m.mean(axis=0), points)
        total[seen] += np.abs(image.transfers_pa(points[seen], hz)[0] @ drive)
    return total


@pytest.mark.parametrize(
    ("walls", "azimuth", "per_m"),
    [((), 0.0, 0.0), (("back", "side"), 12.0, 0.25), (("side",), -20.0, 0.0)],
)
def test_an_independent_sum(walls: tuple[str, ...], azimuth: float, per_m: float) -> None:
    house = {"surface": {name: WALLS[name] for name in walls}}
    show = panel_show(8, 8, 10.0, house=house, pan_deg=10.0, tilt_deg=-8.0)
    ready, points = ReadyPanel(show, "p"), points_m(1)
    x, y, z = direction(azimuth, -2.0).tolist()
    drive = ready.drive((x, y, z, per_m))
    found = FieldMap(ready, show.house, points).pressure_pa(drive)
    expected = summed_pa(show, points, drive)
    loud = expected > expected.max() / 1000.0
    off_db = level_db(found[loud]) - level_db(expected[loud])
    print(f"worst of {np.count_nonzero(loud)} points: {np.abs(off_db).max():.4f} dB")
    assert np.abs(off_db).max() < 0.05


def test_behind_a_wall_nothing_comes_back_from_it() -> None:
    show = panel_show(8, 8, 10.0, house={"surface": {"back": WALLS["back"]}})
    bare = panel_show(8, 8, 10.0)
    behind = points_m(2) + np.array((0.0, 8.0, 0.0))
    drive = ReadyPanel(show, "p").drive((0.0, 1.0, 0.0, 0.0))
    with_wall = FieldMap(ReadyPanel(show, "p"), show.house, behind).pressure_pa(drive)
    without = FieldMap(ReadyPanel(bare, "p"), bare.house, behind).pressure_pa(drive)
    assert with_wall == pytest.approx(without)


def test_the_drive_is_the_independent_one_but_for_what_is_common() -> None:
    """Phases that steer and focus by distances alone, to within what a delay of all feeds adds."""
    show = panel_show(8, 8, 10.0, pan_deg=5.0)
    ready = ReadyPanel(show, "p")
    unit = direction(15.0, 4.0)
    panel = radiator(show)
    right, out = panel.cells_m[1] - panel.cells_m[0], panel.axis
    right = right / np.linalg.norm(right)
    in_room = unit[0] * right + unit[1] * out + unit[2] * np.cross(right, out)
    for per_m in (0.0, 0.5):
        place: Place = (unit[0], unit[1], unit[2], per_m)
        aim_m = panel.cells_m.mean(axis=0) + (1.0 / per_m if per_m else 1.0) * in_room
        other = panel.phasors(aim_m, per_m > 0.0, np.array([HZ]))[0]
        ratio = ready.drive(place) / other
        assert np.abs(ratio) == pytest.approx(np.ones(64), abs=1e-6)
        assert np.abs(np.angle(ratio / ratio[0])).max() < np.deg2rad(0.2)


@pytest.mark.parametrize(
    ("reach", "per_m"), [("far", 0.0), (4.0, 0.25), ("aim", 1.0 / np.sqrt(26.0))]
)
def test_where_a_settled_beam_points_and_is_focused(reach, per_m: float) -> None:
    state = Settled(reach=reach, target=Target("point", (1.0, 5.0, 0.0)))
    place = place_of(state)
    assert place == pytest.approx((1.0 / np.sqrt(26.0), 5.0 / np.sqrt(26.0), 0.0, per_m))


def test_a_beam_that_was_never_aimed_looks_straight_ahead() -> None:
    assert place_of(Settled(reach="aim")) == (0.0, 1.0, 0.0, 0.0)


def test_a_rig_that_cannot_give_the_trim_is_held_to_its_rating() -> None:
    weak = ReadyPanel(panel_show(8, 8, 10.0, volts_at_full_scale=10.0, max_volts=2.0), "p")
    strong = ReadyPanel(panel_show(8, 8, 10.0), "p")
    assert strong.rest_gain(0.0) == pytest.approx(0.5)
    assert strong.rest_gain(-20.0) == pytest.approx(0.05)
    assert weak.rest_gain(0.0) == pytest.approx(0.2)
    assert weak.rest_gain(-20.0) == pytest.approx(0.05)
