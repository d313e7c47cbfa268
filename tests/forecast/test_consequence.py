"""What a resting beam does to seats: the guard's own figures, held against an independent sum."""

from __future__ import annotations

import numpy as np
import pytest
from support.forecasting import HZ, panel_show, radiator
from support.stalls import STALLS

from beamctl.acoustics.geometry import to_panel
from beamctl.forecast.consequence import Consequence, Listeners
from beamctl.forecast.panel import ReadyPanel
from beamctl.guard.bars import Level, levels
from beamctl.guard.field import Field
from beamctl.guard.travels import Place
from beamctl.show.rig import PanelSpec
from beamctl.show.show import Show
from beamctl.show.standing import GUARDED
from beamctl.show.targets import frame_of

MARGIN_DB = 10.0  # of a rig that nobody measured
CREW = STALLS | {"class": "crew", "first_m": (0.0, 2.5, -0.5), "rows": ("pit",), "seats": 1}
HOUSE = {"block": {"stalls": STALLS}}


def venue(**more: object) -> Show:
    return panel_show(8, 8, 10.0, **({"tilt_deg": -12.0, "house": HOUSE} | more))


def at_seat(show: Show, seat: str) -> tuple[Place, np.ndarray]:
    """A beam that reaches far, and where it is aimed."""
    spec: PanelSpec = show.rig.panel["p"]
    point = np.array(show.house.seats()[seat])
    x, y, z = (to_panel(frame_of(spec), point) / np.linalg.norm(point)).tolist()
    return (x, y, z, 0.0), point


def look(show: Show, seat: str, trim_db: float) -> Consequence:
    place, point = at_seat(show, seat)
    return Listeners(show).consequence("a", place, trim_db, point)


@pytest.mark.parametrize("seat", ["A1", "B3", "C6"])
def test_the_target_counts_what_reaches_it_the_margin_and_no_less(seat: str) -> None:
    """By an independent sum at the ear: louder by the margin, and by up to 3 dB for the rest of
    the head."""
    show = venue()
    found = look(show, seat, -30.0).target
    assert found is not None
    place, point = at_seat(show, seat)
    drive = 0.5 * 10.0 ** (-30.0 / 20.0) * ReadyPanel(show, "p").drive(place)
    pressure = radiator(show).transfers_pa(point[np.newaxis], np.array([HZ]))[0] @ drive
    ear_db = 20.0 * np.log10(abs(pressure[0]) / 20e-6)
    print(f"{found.name}: {ear_db:.2f} dB at the ear, counts {found.level_db:.2f}")
    assert MARGIN_DB - 0.05 <= found.level_db - ear_db <= MARGIN_DB + 3.0


def resting(show: Show, seat: str, trim_db: float) -> Level:
    """The cue's figure as the guard finds it for a programme that adds nothing to the carrier."""
    act = {"beam": "a", "sound": "tone", "loop": True, "seat": seat, "trim_db": trim_db}
    cue = {"ref": "1", "title": "one", "act": [act | {"over_s": 0.05}]}
    played = venue(cues=[cue])
    nothing = np.zeros(len(GUARDED))
    nothing[[band.low_hz <= HZ < band.high_hz for band in GUARDED].index(True)] = 1.0
    return levels(played, Field(played), lambda panel, programme: nothing)["1"]


@pytest.mark.parametrize("seat", ["A1", "B3"])
def test_the_worst_seat_is_the_one_that_the_guard_finds(seat: str) -> None:
    worst = look(venue(), seat, -22.0).worst
    found = resting(venue(), seat, -22.0)
    assert worst is not None
    assert (worst.name, worst.cap_db) == (found.seat, found.cap_db)
    assert worst.level_db == pytest.approx(found.level_db, abs=0.01)


def test_the_trim_that_just_fits() -> None:
    """A tenth of a dB above it somebody is over the cap."""
    found = look(venue(), "B3", -5.0)
    assert found.worst is not None and found.trim_fits_db is not None
    assert found.worst.margin_db < 0.0
    inside, outside = (look(venue(), "B3", found.trim_fits_db + by).worst for by in (0.0, 0.1))
    assert inside is not None and outside is not None
    assert inside.margin_db >= 0.0 > outside.margin_db


def test_a_decibel_that_is_held_costs_two_of_programme() -> None:
    """The audible sound goes with the square of the ultrasound."""
    over, under = look(venue(), "B3", -5.0), look(venue(), "B3", -40.0)
    assert over.worst is not None
    assert over.held_db == pytest.approx(-over.worst.margin_db)
    assert over.programme_db == pytest.approx(-2.0 * over.held_db)
    assert (under.held_db, under.programme_db) == (0.0, 0.0)


def test_a_beam_that_may_be_as_loud_as_it_likes() -> None:
    quiet = look(venue(level_db_30cm_10v=60.0), "C6", -20.0)
    assert quiet.trim_fits_db == 0.0


def test_crew_have_a_cap_of_their_own() -> None:
    show = venue(house={"block": {"stalls": STALLS, "pit": CREW}})
    found = look(show, "pit1", -30.0)
    assert found.target is not None
    assert (found.target.name, found.target.cap_db) == ("pit pit1", 110.0)


def test_nobody_at_the_target_and_nobody_at_all() -> None:
    show = venue()
    place, point = at_seat(show, "B3")
    aside = Listeners(show).consequence("a", place, -30.0, point + np.array((0.0, 0.3, 0.0)))
    assert aside.target is None
    assert aside.worst is not None
    empty = venue(house={"block": {}})
    assert Listeners(empty).consequence("a", place, -30.0, point) == Consequence(None, None)
