"""What is typed in the boxes of the Sheet, and the edits that are made of it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import pytest
from desk.conftest import NIGHT_TRAM, FakeHost

from beamctl.desk.box import Box
from beamctl.desk.sheet.boxes import (
    NO_TARGET,
    act_box,
    cue_box,
    missing_names,
    read_follow_on,
    read_target,
)
from beamctl.desk.sheet.changes import emptied, fields_edit, fitted
from beamctl.desk.sheet.place import ACT_FIELDS, CUE_FIELDS
from beamctl.show.edits import Set
from beamctl.show.sheet import Act, Cue

DRAFT = FakeHost().draft()
CUES = {cue.ref: cue for cue in NIGHT_TRAM.sheet.cue}


class Taken:
    """Takes values as the page does."""

    def __init__(self) -> None:
        self.values: list[Mapping[str, Any]] = []

    def __call__(self, values: Mapping[str, Any]) -> str:
        self.values.append(values)
        return ""


def use(box: Box, text: str) -> str:
    assert box.use is not None
    return box.use(text)


@pytest.mark.parametrize(
    ("text", "values"),
    [
        ("B4", {"seat": "B4"}),
        ("seat B4", {"seat": "B4"}),
        ("seat Z99", {"seat": "Z99"}),  # the reader says that there is none, and what is near it
        ("buffer", {"spot": "buffer"}),
        ("spot buffer", {"spot": "buffer"}),
        ("point 1.5 6 1.2", {"point_m": [1.5, 6, 1.2]}),
        ("angles -10, 4.5", {"azimuth_deg": -10, "elevation_deg": 4.5}),
        ("--", {}),
    ],
)
def test_targets(text: str, values) -> None:
    assert read_target(text, NIGHT_TRAM.house) == {**NO_TARGET, **values}


@pytest.mark.parametrize("text", ["", "up there", "point 1 2", "angles 3", "angles 95 0"])
def test_what_is_no_target_is_told(text: str) -> None:
    with pytest.raises(ValueError, match="expected"):
        read_target(text, NIGHT_TRAM.house)


def test_what_follows() -> None:
    assert read_follow_on("13 9.5") == {"then": "13", "then_at_s": 9.5}
    assert read_follow_on("--") == {"then": None, "then_at_s": None}
    for text in ("13", "x 9", "13 soon"):
        with pytest.raises(ValueError, match="expected"):
            read_follow_on(text)


@pytest.mark.parametrize("key", CUE_FIELDS)
def test_a_box_left_as_it_is_changes_nothing_of_a_cue(key: str) -> None:
    taken = Taken()
    box = cue_box(key, CUES["5"], taken)
    assert use(box, box.chosen) == ""
    assert taken.values == []


@pytest.mark.parametrize("key", ACT_FIELDS)
@pytest.mark.parametrize(("ref", "number"), [("1", 0), ("4", 0), ("5", 1), ("6", 1)])
def test_a_box_left_as_it_is_changes_nothing_of_an_act(ref: str, number: int, key: str) -> None:
    taken = Taken()
    box = act_box(key, CUES[ref], number, DRAFT, taken)
    assert use(box, box.chosen) == ""
    for values in taken.values:
        assert fields_edit(CUES[ref], number, values) is None


def test_names_are_picked_from_those_there_are() -> None:
    cue, taken = CUES["3"], Taken()
    boxes = {key: act_box(key, cue, 0, DRAFT, taken) for key in ACT_FIELDS}
    assert boxes["beam"].choices == tuple(NIGHT_TRAM.sheet.beam)
    assert set(NIGHT_TRAM.sounds) < set(boxes["sound"].choices)
    assert "back_wall" in boxes["via"].choices
    assert {"seat B4", "spot buffer"} < set(boxes["target"].choices)
    assert use(boxes["via"], "back_wall") == ""
    assert use(boxes["beam"], "reply") == ""
    assert taken.values == [{"via": "back_wall"}, {"beam": "reply"}]


def test_a_sound_that_goes_takes_its_loop_along() -> None:
    taken = Taken()
    use(act_box("sound", CUES["1"], 0, DRAFT, taken), "--")
    assert taken.values == [{"sound": None, "loop": None}]


def test_another_seat_keeps_the_bounce_and_angles_end_it() -> None:
    taken = Taken()
    box = act_box("target", CUES["4"], 0, DRAFT, taken)
    use(box, "B2")
    use(box, "angles 1 2")
    assert [set(values) - {"via"} for values in taken.values] == [{*NO_TARGET} - {"via"}] * 2
    assert ["via" in values for values in taken.values] == [False, True]
    assert use(box, "nowhere").startswith("nowhere: expected seat B4")


def test_where_nothing_can_be_picked_it_says_what_to_do() -> None:
    bare = NIGHT_TRAM.house.model_copy(update={"surface": {}})
    draft = replace(DRAFT, files=(), show=replace(DRAFT.show, house=bare, sounds={}))
    assert missing_names("sound", draft).endswith("/sounds")
    assert "House" in missing_names("via", draft)
    assert missing_names("via", DRAFT) == missing_names("depth", draft) == ""


def test_an_edit_names_what_changed_and_leaves_the_rest_alone() -> None:
    edit = fields_edit(CUES["4"], 0, {**NO_TARGET, "spot": "buffer", "depth": 0.8})
    assert edit is not None
    place = ("cue", "4", "act", 0)
    assert edit.label == "cue 4 act 1: spot buffer"
    assert edit.steps == (
        Set("sheet.toml", place, "seat", None),
        Set("sheet.toml", place, "spot", "buffer"),
        Set("sheet.toml", place, "via", None),
    )
    title = fields_edit(CUES["4"], None, {"title": "two bells"})
    assert title is not None
    assert title.label == "cue 4: title two bells"
    assert title.steps == (Set("sheet.toml", ("cue", "4"), "title", "two bells"),)


def test_a_field_is_emptied_with_what_hangs_on_it() -> None:
    keys = {step.key for step in emptied(CUES["4"], 0, "target").steps}
    assert keys == {"seat", "via"}
    assert {step.key for step in emptied(CUES["5"], None, "then").steps} == {"then", "then_at_s"}
    assert {step.key for step in emptied(CUES["1"], 0, "sound").steps} == {"sound", "loop"}
    assert emptied(CUES["4"], 0, "fall_s") is None
    for number, key in ((None, "ref"), (None, "title"), (0, "beam")):
        with pytest.raises(ValueError, match="cannot be empty"):
            emptied(CUES["4"], number, key)


def cue_of(*acts: dict[str, Any]) -> Cue:
    return Cue(ref="9", title="x", act=tuple(Act(beam="hum", **act) for act in acts))


@pytest.mark.parametrize(
    ("acts", "before_db", "numbers"),
    [
        ([{"trim_db": -20.0}, {"at_s": 1.0, "trim_db": -30.0}], -60.0, [0]),
        ([{"seat": "B4"}, {"at_s": 1.0, "trim_db": -20.0}], -22.0, [0, 1]),
        ([{"seat": "B4"}], -40.0, []),
        ([{"seat": "B4"}, {"at_s": 1.0, "seat": "B5"}], -22.0, [0]),  # the second finds it fitted
        ([{"at_s": 2.0, "seat": "B4"}, {"at_s": 1.0, "trim_db": -20.0}], -60.0, [1]),
        ([{"fall_s": 1.0}], -20.0, []),
    ],
)
def test_the_trim_that_fits_is_set_wherever_the_beam_is_louder(acts, before_db, numbers) -> None:
    edit = fitted(cue_of(*acts), "hum", before_db, -25.2)
    set_ = [] if edit is None else [(step.place[3], step.key, step.value) for step in edit.steps]
    assert sorted(set_) == [(number, "trim_db", -25.2) for number in numbers]
    assert fitted(cue_of(*acts), "bell", 0.0, -25.2) is None
