"""Two states of a show's files, compared in words."""

from __future__ import annotations

from typing import Any

from hypothesis import given, settings
from support.playing import cue, loop
from support.rigs import make_show
from support.sheets import sheets

from beamctl.show.differences import differences, edited_cues
from beamctl.show.house import House
from beamctl.show.sheet import Sheet


def sheet(*cues: dict[str, Any], beams: tuple[str, ...] = ("a", "b")) -> Sheet:
    return make_show(beams, list(cues)).sheet


def told(before: Sheet, after: Sheet) -> list[str]:
    return [" ".join(line) for line in differences(before, after)]


SHORT = sheet(cue("1", loop()), cue("2", loop("b", depth=0.7, over_s=2.0)), cue("3"), cue("4"))


def test_a_changed_field_is_told_by_cue_and_act_with_its_old_and_its_new_value() -> None:
    after = sheet(
        cue("1", loop(), note="on the word"),
        cue("2", loop("b", depth=0.5, seat="B4", loop=False)),
        cue("3", then="4", then_at_s=1.5),
        cue("4"),
    )
    assert told(SHORT, after) == [
        "~ cue 1 note  -> on the word",
        "~ cue 2 act 1 loop true -> false",
        "~ cue 2 act 1 seat none -> B4",
        "~ cue 2 act 1 depth 0.7 -> 0.5",
        "~ cue 2 act 1 over_s 2 -> 0",
        "~ cue 3 then none -> 4",
        "~ cue 3 then_at_s none -> 1.5",
    ]
    assert edited_cues(SHORT, after) == ("1", "2", "3")


def test_cues_and_acts_that_come_and_go() -> None:
    after = sheet(
        cue("1", loop("b", point_m=[0, 1.5, 0]), loop()),
        cue("2", {"beam": "a", "fall_s": 0.5}),
        cue("2.5", loop()),
        cue("4"),
    )
    assert told(SHORT, after) == [
        "+ cue 1 act 1: beam b, sound tone, loop true, point_m [0, 1.5, 0], trim_db -20",
        "~ cue 2 act 1 beam b -> a",
        "~ cue 2 act 1 sound tone -> none",
        "~ cue 2 act 1 loop true -> false",
        "~ cue 2 act 1 depth 0.7 -> none",
        "~ cue 2 act 1 trim_db -20 -> none",
        "~ cue 2 act 1 over_s 2 -> 0",
        "~ cue 2 act 1 fall_s none -> 0.5",
        '+ cue 2.5 "cue 2.5", 1 act',
        '- cue 3 "cue 3"',
    ]
    assert told(after, SHORT)[0].startswith("- cue 1 act 1: beam b")
    assert edited_cues(SHORT, after) == ("1", "2", "2.5")


def test_a_new_number_and_a_new_place_are_not_taken_for_other_cues() -> None:
    before = sheet(cue("1", then="3", then_at_s=1.0), cue("2"), cue("3"), cue("4"))
    cues = [cue("1", then="3.5", then_at_s=1.0), cue("2"), cue("4"), {**cue("3"), "ref": "3.5"}]
    assert told(before, sheet(*cues)) == ["~ cue 3 is now 3.5"]
    swapped = sheet(cue("1", then="3", then_at_s=1.0), cue("3"), cue("2"), cue("4"))
    assert told(before, swapped) == ["~ cue 3 moved, stands after 1"]
    top = sheet(cue("4"), cue("1", then="3", then_at_s=1.0), cue("2"), cue("3"))
    assert told(before, top) == ["~ cue 4 moved, stands at the top"]
    assert edited_cues(before, top) == ("4",)


def test_title_and_beams_of_the_sheet() -> None:
    after = sheet(cue("1", loop()), beams=("a", "c")).model_copy(update={"title": "other"})
    assert told(sheet(cue("1", loop())), after) == [
        "~ title test -> other",
        "- beam b",
        "+ beam c",
    ]


def test_any_other_file_by_its_tables_and_its_own_names() -> None:
    before = make_show().house
    table = before.model_dump(by_alias=True)
    table["air"]["humidity_pct"] = 38.5
    table["block"]["row"]["class"] = "crew"
    table["block"]["row"]["first_m"] = (0.0, 2.0, 1.2)
    table["spot"] = {"door": {"at_m": (1.0, 2.0, 3.0)}}
    assert differences(before, House.model_validate(table)) == (
        ("~", "air humidity_pct 50 -> 38.5"),
        ("+", "spot door"),
        ("~", "block row class seats -> crew"),
        ("~", "block row first_m [0, 30, 1.2] -> [0, 2, 1.2]"),
    )
    rig = make_show().rig
    hexagon = {"rings": 3, "pitch_mm": 10.0}
    panel = rig.panel["p"].model_dump() | {"grid": None, "hex": hexagon}
    (gone, come) = differences(rig, type(rig).model_validate({"format": 1, "panel": {"p": panel}}))
    assert gone == ("~", "panel p grid columns 8, rows 8, pitch_mm 10 -> none")
    assert come == ("~", "panel p hex none -> rings 3, pitch_mm 10")


@given(sheets, sheets)
@settings(max_examples=60, deadline=None)
def test_there_are_differences_exactly_where_there_are_some(
    one: list[dict[str, Any]], other: list[dict[str, Any]]
) -> None:
    before, after = sheet(*one), sheet(*other)
    assert bool(differences(before, after)) == (before != after)
    changed = edited_cues(before, after)
    same = [c.ref for c in after.cue if c in before.cue]
    assert {*changed} == {c.ref for c in after.cue} - {*same}
    assert differences(after, after) == edited_cues(after, after) == ()
