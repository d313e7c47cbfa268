"""Where rays go in the room: geometry that can be checked by hand."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from support.forecasting import panel_show

from beamctl.forecast.landing import Room, corners_m, places_m
from beamctl.show.house import House, Surface

WALL: dict[str, Any] = {
    "corner_m": (-5.0, 10.0, 0.0), "along_m": (10.0, 0.0, 0.0), "up_m": (0.0, 0.0, 5.0),
    "reflection": 0.9,
}  # fmt: skip
SEATS: dict[str, Any] = {
    "class": "seats", "first_m": (-1.0, 5.0, 1.0), "rows": ("A", "B"),
    "row_step_m": (0.0, 1.0, 0.0), "seats": 3, "seat_step_m": (1.0, 0.0, 0.0),
}  # fmt: skip


def room(**house: Any) -> Room:
    """A panel 3 m up at the stage's edge, and what the house is given."""
    show = panel_show(8, 8, 10.0, at_m=(0.0, 0.0, 3.0))
    bare = {"format": 1, "block": {}, "spot": {}, "surface": {}}
    made = House.model_validate(bare | house)
    return Room(type(show)(**{f: getattr(show, f) for f in show.__slots__} | {"house": made}))


def toward(*point: float) -> np.ndarray:
    way = np.array(point) - (0.0, 0.0, 3.0)
    return way / np.linalg.norm(way)


START = np.array((0.0, 0.0, 3.0))


def test_a_ray_at_a_seat_ends_at_its_head() -> None:
    landing = room(block={"stalls": SEATS}).landing(START, toward(0.0, 6.0, 1.0))
    assert (landing.off, landing.at) == ("", "stalls B2")
    assert landing.way_m[-1] == pytest.approx((0.0, 6.0, 1.0))


def test_a_ray_just_beside_a_head_meets_it_and_one_farther_off_does_not() -> None:
    """A head is 0.25 m, and the beam's half power 0.443 of wavelength over aperture."""
    made = room(block={"stalls": SEATS | {"rows": ("A",)}})
    for aside_m, width, at in (
        (0.2, 0.0, "stalls A3"),
        (0.4, 0.0, "the floor"),
        (0.4, 0.1, "stalls A3"),
    ):
        landing = made.landing(START, toward(1.0 + aside_m, 5.0, 1.0), width)
        assert landing.at == at, aside_m


def test_of_those_it_passes_the_nearest_to_the_axis_is_met() -> None:
    made = room(block={"stalls": SEATS})
    for seat, point in (("A2", (0.0, 5.0, 1.0)), ("B2", (0.0, 6.0, 1.0))):
        assert made.landing(START, toward(*point), 0.2).at == f"stalls {seat}"


def test_a_spot_is_met_by_its_name() -> None:
    made = room(spot={"pit": {"at_m": (1.0, 2.0, 0.5)}})
    assert made.landing(START, toward(1.0, 2.0, 0.5)).at == "spot pit"


def test_down_to_the_floor() -> None:
    """From 3 m at 45 degrees down: 3 m ahead."""
    landing = room(spot={"far": {"at_m": (0.0, 20.0, 1.0)}}).landing(
        START, np.array((0.0, 1.0, -1.0)) / np.sqrt(2.0)
    )
    assert landing.at == "the floor"
    assert landing.way_m[-1] == pytest.approx((0.0, 3.0, 0.0))


def test_off_a_wall_to_the_seat_that_its_mirror_image_stands_for() -> None:
    """The wall is at 10 m, so a seat at 6 m is aimed at as if it were at 14 m."""
    made = room(block={"stalls": SEATS}, surface={"back": WALL})
    landing = made.landing(START, toward(0.0, 14.0, 1.0))
    assert (landing.off, landing.at) == ("back", "stalls B2")
    start, bounce, end = landing.way_m
    assert start == pytest.approx((0.0, 0.0, 3.0))
    assert bounce == pytest.approx((0.0, 10.0, 3.0 - 2.0 * 10.0 / 14.0))
    assert end == pytest.approx((0.0, 6.0, 1.0))


def test_a_second_surface_ends_it() -> None:
    """Straight on between two facing walls: off the back one, and into the front one."""
    front = WALL | {"corner_m": (-5.0, -1.0, 0.0)}
    made = room(surface={"back": WALL, "front": front})
    landing = made.landing(START, np.array((0.0, 1.0, 0.0)))
    assert (landing.off, landing.at) == ("back", "front")
    assert landing.way_m[-1] == pytest.approx((0.0, -1.0, 3.0))


def test_past_the_edge_of_a_wall_and_into_the_open() -> None:
    landing = room(surface={"back": WALL}).landing(START, toward(6.0, 10.0, 3.5))
    assert (landing.off, landing.at) == ("", "")
    assert np.linalg.norm(np.subtract(landing.way_m[-1], START)) > 10.0


def test_seats_below_the_stage_lower_the_floor() -> None:
    made = room(block={"pit": SEATS | {"first_m": (0.0, 2.0, -1.0)}})
    assert made.floor_m == -1.0


def test_every_place_that_is_declared() -> None:
    surface = Surface.model_validate(WALL)
    assert corners_m(surface)[2] == pytest.approx((5.0, 10.0, 5.0))
    show = panel_show(8, 8, 10.0, house={"surface": {"back": WALL}, "block": {"stalls": SEATS}})
    assert len(places_m(show)) == 1 + 6 + 4
