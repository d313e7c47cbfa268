"""Places in heads, and listeners whom little or nothing reaches."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from support.directsum import Slab
from support.radiation import Array
from support.rigs import PANEL, make_show

from beamctl.acoustics.bands import band_at
from beamctl.guard.estimator import Estimator
from beamctl.guard.field import Field
from beamctl.guard.points import HEAD_RADIUS_M, RINGS, SPACING, head_points, listeners
from beamctl.guard.watch import Watch
from beamctl.show.house import House
from beamctl.show.show import Show

CARRIER_HZ = 40e3


def block(*first_m: float, **more: Any) -> dict[str, Any]:
    """One seat, or a row of them."""
    row = {"class": "seats", "rows": ("A",), "row_step_m": (0.0, 1.0, 0.0), "seats": 1}
    return row | {"first_m": first_m, "seat_step_m": (0.5, 0.0, 0.0)} | more


def wall(corner_m: tuple[float, ...], along_m: tuple[float, ...], up_m: tuple[float, ...]) -> Any:
    return {"corner_m": corner_m, "along_m": along_m, "up_m": up_m, "reflection": 0.8}


def show_of(blocks: dict[str, Any], surfaces: dict[str, Any] | None = None) -> Show:
    """A panel of 8 by 8 at the origin that looks along +y."""
    house = House.model_validate({"format": 1, "block": blocks, "surface": surfaces or {}})
    return replace(make_show(), house=house)


def carrier_pa2(show: Show) -> Array:
    """(L,) with every feed at full scale and in phase."""
    field = Field(show)
    return field.power_pa2("p", CARRIER_HZ, np.ones((64, 1, 1), np.complex64))[:, 0]


def test_listeners_stand_in_the_order_of_the_house() -> None:
    blocks = {
        "stalls": block(0.0, 5.0, 1.2, rows=("A", "B"), seats=2),
        "desk": block(2.0, 9.0, 1.0, **{"class": "crew"}),
    }
    found = listeners(show_of(blocks).house)
    names = ["stalls A1", "stalls A2", "stalls B1", "stalls B2", "desk A1"]
    assert [listener.name for listener in found] == names
    assert [listener.crew for listener in found] == [False] * 4 + [True]
    assert found[3].at_m == (0.5, 6.0, 1.2)
    assert (found[3].seat, found[3].block) == ("B2", "stalls")


@pytest.mark.parametrize("width_per_m", [0.005, 0.04, 0.08, 0.3, 2.0])
def test_places_lie_in_the_head_and_leave_no_gap(width_per_m: float) -> None:
    rng = np.random.default_rng(1)
    source_m, ear_m = rng.normal(size=(2, 3)) + np.array([[0.0, 0.0, 0.0], [0.0, 6.0, 0.0]])
    places, rise = head_points(ear_m, source_m, width_per_m)
    assert np.all(places[0] == ear_m)
    assert rise[0] == 1.0
    assert np.all(rise >= 1.0)
    away = np.linalg.norm(places - ear_m, axis=1)
    assert np.all(away <= HEAD_RADIUS_M * (1.0 + 1e-9))
    way = (ear_m - source_m) / np.linalg.norm(ear_m - source_m)
    assert np.all((places[1:] - ear_m) @ way <= 1e-9)  # the half that faces the source
    spacing_m = SPACING * width_per_m * np.linalg.norm(ear_m - source_m)
    gap_m = max(spacing_m, HEAD_RADIUS_M / RINGS) / np.sqrt(3.0)
    across = np.eye(3) - np.outer(way, way)
    anywhere = rng.normal(size=(2000, 3)) @ across
    anywhere *= HEAD_RADIUS_M * np.sqrt(rng.random((2000, 1)) / np.sum(anywhere**2, 1)[:, None])
    apart = np.linalg.norm(anywhere[:, None] - (places[1:] - ear_m) @ across, axis=-1).min(axis=1)
    assert apart.max() <= gap_m * (1.0 + 1e-9)


@pytest.mark.parametrize("away_m", [0.0, 1e-9, 0.1, 0.24, 0.26, 0.6])
def test_a_seat_nearer_than_a_head_has_finite_places_and_pressure(away_m: float) -> None:
    places, rise = head_points(np.array((0.0, away_m, 0.0)), np.zeros(3), 0.08)
    assert np.all(np.isfinite(places))
    assert np.all(np.isfinite(rise))
    across = np.ptp(places, axis=0)
    assert np.all(across[[0, 2]] > 1.5 * HEAD_RADIUS_M)
    near, far = carrier_pa2(show_of({"a": block(0.0, away_m, 0.0), "b": block(0.0, 3.0, 0.0)}))
    pa_m = 20e-6 * 10.0 ** (115.0 / 20.0) * 0.3 * 5.0 / 10.0
    slab = Slab((0.0, 0.0, 0.0), 0.0, 0.0, 8, 8, 0.01, CARRIER_HZ, 0.009, pa_m)
    at_ear = slab.transfer_pa(np.array([[0.0, away_m, 0.0]]), CARRIER_HZ).sum()
    assert np.isfinite(near)
    assert near > max(far, float(np.abs(at_ear) ** 2))


def test_a_seat_behind_the_panel_gets_nothing_unless_a_wall_sends_it_back() -> None:
    behind = {"a": block(0.0, -2.0, 0.0)}
    assert carrier_pa2(show_of(behind)).tolist() == [0.0]
    back = wall((-3.0, 8.0, -3.0), (6.0, 0.0, 0.0), (0.0, 0.0, 6.0))
    (returned,) = carrier_pa2(show_of(behind, {"back": back}))
    straight = {"a": block(0.0, 18.0, 0.0)}  # 8 m out, 10 m back
    (direct,) = carrier_pa2(show_of(straight))
    assert returned == pytest.approx(0.8**2 * direct, rel=0.01)


@pytest.mark.parametrize("at_m", [(0.0, 4.0, 0.0), (0.6, 5.0, 0.2)])
def test_a_surface_seen_edge_on_adds_nothing(at_m: tuple[float, ...]) -> None:
    seats = {"a": block(*at_m)}
    through = wall((-3.0, 1.0, 0.0), (6.0, 0.0, 0.0), (0.0, 6.0, 0.0))  # in the panel's own plane
    alone = carrier_pa2(show_of(seats))
    found = carrier_pa2(show_of(seats, {"board": through}))
    assert np.all(found >= alone)
    assert np.all(found <= (1.0 + 0.8) ** 2 * alone * 1.05)
    beyond = wall((-3.0, 9.0, 0.0), (6.0, 0.0, 0.0), (0.0, 6.0, 0.0))  # no line comes by it
    assert carrier_pa2(show_of(seats, {"board": beyond})) == pytest.approx(alone)


def test_a_wall_that_no_mirrored_line_meets_adds_nothing() -> None:
    seats = {"a": block(0.0, 4.0, 0.0)}
    small = wall((6.0, 1.0, -0.2), (0.0, 0.4, 0.0), (0.0, 0.0, 0.4))  # the bounce is at y = 2 m
    alone = carrier_pa2(show_of(seats))
    assert carrier_pa2(show_of(seats, {"side": small})) == pytest.approx(alone)
    moved = small | {"corner_m": (6.0, 1.8, -0.2)}
    assert np.all(carrier_pa2(show_of(seats, {"side": moved})) > alone)


def test_bounds_and_mosts_hold_for_whom_only_an_image_reaches() -> None:
    back = wall((-3.0, 8.0, -3.0), (6.0, 0.0, 0.0), (0.0, 0.0, 6.0))
    show = show_of({"a": block(0.0, -2.0, 0.0), "b": block(9.0, -2.0, 0.0)}, {"back": back})
    field = Field(show)
    rng = np.random.default_rng(3)
    drives = rng.normal(size=(64, 40, 2)) @ (1.0, 1j)
    power = field.power_pa2("p", CARRIER_HZ, drives[:, :, np.newaxis])
    assert np.all(power[0] > 0.0)
    assert np.all(power[1] == 0.0)
    most = field.most_pa2("p", CARRIER_HZ)
    assert np.all(power <= most[:, np.newaxis] * np.sum(np.abs(drives) ** 2, axis=0) * 1.001)
    band = band_at(CARRIER_HZ)
    assert band is not None
    bound = np.stack([field.bound_pa2("p", band, np.abs(d)) for d in drives.T], axis=1)
    assert np.all(bound[0] > 0.2 * power[0])
    assert np.all(bound[1] == 0.0)


def test_without_listeners_everything_is_empty() -> None:
    show = show_of({}, {"back": wall((-3.0, 8.0, -3.0), (6.0, 0.0, 0.0), (0.0, 0.0, 6.0))})
    field = Field(show)
    assert field.power_pa2("p", CARRIER_HZ, np.ones((64, 3, 2), np.complex64)).shape == (0, 3)
    assert field.most_pa2("p", CARRIER_HZ).shape == (0,)
    band = band_at(CARRIER_HZ)
    assert band is not None
    assert field.bound_pa2("p", band, np.ones(64)).shape == (0,)
    estimator = Estimator(show, field, show.caps)
    assert estimator.most.shape == (1, 0)
    watch = Watch(show, 2048, field)
    rng = np.random.default_rng(2)
    for _ in range(4):
        block_n = rng.normal(0.0, 0.1, (watch.step_n, 64)).astype(np.float32)
        assert watch.take(block_n).shape == (1,)
        watch.left(np.ones(1))
    assert watch.headroom_db() is None
    assert all(found.shape == (0,) for found in watch.levels())
    assert watch.dose.percent.shape == (0,)
    assert watch.state == "CLEAR"


def test_two_heads_in_one_place_hear_the_same() -> None:
    a, b = carrier_pa2(show_of({"a": block(1.0, 4.0, 0.0), "b": block(1.0, 4.0, 0.0)}))
    assert a == b
    assert PANEL["resonance_hz"] == CARRIER_HZ  # else the figures above mean something else
