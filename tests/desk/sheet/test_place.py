"""The cursor of the Sheet, and what is lifted off it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from desk.conftest import NIGHT_TRAM, FakeHost

from beamctl.desk.desk import Cursor
from beamctl.desk.format import View
from beamctl.desk.sheet.cursor import SheetCursor
from beamctl.desk.sheet.lifted import Lifted
from beamctl.desk.sheet.place import ACT_FIELDS, CUE_FIELDS, Place
from beamctl.show.sheet import Act

SHEET = NIGHT_TRAM.sheet
CUES = SHEET.cue
FIRST_ACT = len(CUE_FIELDS)


def test_every_field_of_an_act_has_its_place() -> None:
    held = {"seat", "spot", "point_m", "azimuth_deg", "elevation_deg"}
    assert {*ACT_FIELDS, *held} == {*Act.model_fields, "target"}


@pytest.mark.parametrize(
    ("start", "by", "end"),
    [
        (Place(2), 1, Place(3)),
        (Place(2), -1_000, Place(0)),
        (Place(2), 1_000, Place(8)),
        (Place(2, 1), 1, Place(2, 2)),
        (Place(2, 1), 1_000, Place(2, FIRST_ACT + 1)),
        (Place(2, 1), -5, Place(2, 0)),
        (Place(2, FIRST_ACT, 3), 1, Place(2, FIRST_ACT, 4)),
        (Place(2, FIRST_ACT, 3), 1_000, Place(2, FIRST_ACT, len(ACT_FIELDS) - 1)),
    ],
)
def test_moving_stays_among_its_like(start: Place, by: int, end: Place) -> None:
    assert start.moved(by, CUES) == end


def test_in_and_out() -> None:
    cue = Place(2)
    act = cue.inside(CUES)
    assert act == cue.at_act(0)
    field = act.inside(CUES)
    assert (field.key, field.act) == (ACT_FIELDS[0], 0)
    assert field.inside(CUES) == field
    assert field.outside() == act
    assert act.outside() == cue == cue.outside()
    bare = (CUES[0].model_copy(update={"act": ()}),)
    assert Place(0).inside(bare).key == "title"
    assert Place(0).inside(()) == Place(0)


@pytest.mark.parametrize(
    ("place", "nearest"),
    [
        (Place(99), Place(8)),
        (Place(2, 99, 3), Place(2, FIRST_ACT + 1)),
        (Place(2).at_act(0, "depth"), Place(2).at_act(0, "depth")),
    ],
)
def test_a_place_that_is_gone(place: Place, nearest: Place) -> None:
    assert place.within(CUES) == nearest
    assert place.within(()) == Place(0)


def test_cues_and_acts_are_not_lifted_together() -> None:
    acts = Lifted().with_act("3", 0, CUES[2].act[0])
    assert acts.acts_of("3") == (0,)
    cues = acts.with_cue("5").with_cue("2")
    assert cues == Lifted(("5", "2"))
    assert cues.with_cue("5") == Lifted(("2",))
    assert cues.with_act("3", 0, CUES[2].act[0]) == acts
    assert acts.with_act("3", 0, CUES[2].act[0]) == Lifted()


def test_what_is_lifted_is_let_go_of_once_it_is_gone_or_changed() -> None:
    assert Lifted(("5", "99", "2")).kept(SHEET) == Lifted(("2", "5"))
    was = CUES[2].act[0]
    other = was.model_copy(update={"depth": 0.3})
    lifted = Lifted(acts=(("3", 1, CUES[2].act[1]), ("3", 0, was), ("4", 0, was)))
    assert lifted.kept(SHEET) == Lifted(acts=(("3", 0, was), ("3", 1, CUES[2].act[1])))
    assert Lifted(acts=(("3", 0, other),)).kept(SHEET) == Lifted()


@pytest.fixture
def tram(view: Callable[..., View]) -> View:
    return view(about={"draft": FakeHost().draft()}, standby="4")


def test_without_a_cue_the_cursor_takes_the_stand_by(tram: View) -> None:
    assert SheetCursor(Cursor()).where(tram) == Place(3)
    none = replace(tram, snapshot=replace(tram.snapshot, standby=""))
    assert SheetCursor(Cursor()).where(none) == Place(0)


def test_the_cursor_is_shared(tram: View) -> None:
    shared = Cursor("3", 0)
    cursor = SheetCursor(shared)
    cursor.move(tram, Place(2).at_act(1, "depth"))
    assert (shared.ref, shared.act) == ("3", 1)
    shared.act = 0  # the Bench has turned to the other act
    assert cursor.where(tram) == Place(2).at_act(0)
    shared.ref = "5"  # another cue was found
    assert cursor.where(tram) == Place(5)


def test_the_cursor_stays_near_a_cue_that_is_gone_and_waits_for_one_to_come(tram: View) -> None:
    shared = Cursor("3")
    cursor = SheetCursor(shared)
    assert cursor.where(tram) == Place(2)
    cursor.stand("3.5", Place().at_act(1))
    assert cursor.where(tram) == Place(2).at_act(1)
    assert shared.ref == "3.5"


def test_in_show_the_cursor_goes_with_the_stand_by(tram: View) -> None:
    shown = replace(tram, snapshot=replace(tram.snapshot, mode="SHOW"))
    cursor = SheetCursor(Cursor("2"))
    assert cursor.where(shown) == Place(3)
    assert cursor.where(tram) == Place(1)
