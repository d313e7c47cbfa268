"""WRITE, WALK and SHOW: what a change asks for; and the air readings that any mode takes."""

from __future__ import annotations

from itertools import product
from typing import Any, get_args

import pytest
from support.playing import at, cue, loop, player, reason

from beamctl.show import events
from beamctl.show.player import Player
from beamctl.show.records import Record
from beamctl.show.states import MODE, Mode

MODES: tuple[Mode, ...] = get_args(Mode)
AIR = {"temperature_c": 26.5, "humidity_pct": 38.0, "pressure_kpa": 99.5}


def in_mode(mode: Mode, *cues: dict[str, Any]) -> Player:
    p = player(*cues)
    p.mode = mode
    return p


@pytest.mark.parametrize(("before", "to"), list(product(MODES, MODES)))
@pytest.mark.parametrize("word", ["", "show", "unlock"])
def test_the_mode_changes_as_its_table_says_and_not_else(before: Mode, to: Mode, word: str) -> None:
    p = in_mode(before)
    told = p.handle(events.Mode("desk", to, word, "A. Person"), 7)
    if before == to:
        assert told == []
    elif MODE[before, to] in ("", word):
        args = {"from": before, "to": to, "name": "A. Person"}
        assert told == [Record(7, "mode", who="desk", args=args)]
        assert (p.mode, p.locked) == (to, to == "SHOW")
    else:
        assert reason(told) == "locked"
        assert MODE[before, to] in told[0].args["text"]
        assert p.mode == before


def test_the_word_may_be_typed_in_capitals_and_nobody_unlocks_without_a_name() -> None:
    p = in_mode("WALK")
    p.handle(events.Mode(to="SHOW", word=" SHOW"), 0)
    assert p.locked
    assert reason(p.handle(events.Mode(to="WALK", word="UNLOCK", name=" "), 0)) == "bad-type"
    assert p.locked
    p.handle(events.Mode(to="WALK", word="UNLOCK", name="A. Person"), 0)
    assert p.mode == "WALK"


def test_an_unknown_mode_is_refused() -> None:
    assert reason(in_mode("WRITE").handle(events.Mode(to="PLAY"), 0)) == "bad-type"


def test_a_change_of_mode_touches_no_sound() -> None:
    p = in_mode("WRITE", cue("1", loop(over_s=2.0), loop("b", at_s=1.0)))
    p.handle(events.Go(), 0)
    before = p.plans["a"].state.level.tolist()
    assert [r.what for r in p.handle(events.Mode(to="SHOW", word="show"), at(0.5))] == ["mode"]
    assert p.plans["a"].state.level.tolist() == before
    assert {r.beam for r in p.advance(at(1.0) + 1)} == {"b"}


def test_a_try_must_be_ended_before_the_show_is_locked() -> None:
    p = in_mode("WALK", cue("1", loop()))
    p.handle(events.SoundNow(ref="1", trim_db=-40.0), 0)
    assert reason(p.handle(events.Mode(to="SHOW", word="show"), 1)) == "busy"
    p.handle(events.SoundOff(), 2)
    p.handle(events.Mode(to="SHOW", word="show"), 3)
    assert p.locked


# -- the air ------------------------------------------------------------------------------------


def test_readings_are_told_while_nothing_sounds() -> None:
    p = player(armed=False)
    assert p.handle(events.SetAir("desk", **AIR), 5) == [Record(5, "air", who="desk", args=AIR)]


def test_readings_are_refused_while_the_output_is_open() -> None:
    p = player()
    assert reason(p.handle(events.SetAir(**AIR), 5)) == "busy"
    p.handle(events.Hush(), 6)
    assert [r.what for r in p.handle(events.SetAir(**AIR), 7)] == ["air"]


@pytest.mark.parametrize(
    ("key", "value", "expected"),
    [
        ("temperature_c", 31.0, "a number from 0 to 30, in degrees Celsius"),
        ("humidity_pct", float("nan"), "a number from 5 to 100, in percent"),
        ("pressure_kpa", 74.0, "a number from 75 to 102, in kilopascals"),
    ],
)
def test_a_reading_out_of_range_says_what_is_expected(
    key: str, value: float, expected: str
) -> None:
    told = player(armed=False).handle(events.SetAir(**{**AIR, key: value}), 0)
    assert reason(told) == "bad-type"
    assert told[0].args["text"] == f"{key} {value}, expected {expected}"
