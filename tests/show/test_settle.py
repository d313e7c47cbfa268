"""The state after a cue, and the moments inside one, against the player that plays them."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from support.playing import RATE_HZ, at, cue, loop, one_shot
from support.rigs import make_show
from support.sheets import sheets

from beamctl.show import events
from beamctl.show.beamstate import BeamState
from beamctl.show.player import Player
from beamctl.show.settle import Moment, TargetOf, acts_of, led_to, state_after
from beamctl.show.settled import Settled
from beamctl.show.show import Show
from beamctl.show.targets import Target, target_of

GAP_S = 20.0  # longer than any cue below
SWING = 1.055  # gain of a rise taken over r before its end: 1 - sin²(π r / 2) + 4/27 π/2 sin(π r)


def show_of(*cues: dict[str, Any]) -> Show:
    return make_show(("a", "b"), list(cues), sounds=("tone", "other"))


def after(*cues: dict[str, Any]) -> Settled:
    """Beam a after the last of these cues."""
    return state_after(show_of(*cues), cues[-1]["ref"])["a"]


def test_before_the_first_cue_every_beam_is_fresh() -> None:
    assert state_after(show_of(cue("1", loop())), "") == {"a": Settled(), "b": Settled()}
    with pytest.raises(KeyError):
        state_after(show_of(cue("1")), "2")


def test_what_an_act_does_not_name_stays() -> None:
    first = cue("1", loop(depth=0.4, law="mam", reach=3.0, azimuth_deg=10.0))
    second = cue("2", {"beam": "a", "trim_db": -30.0, "over_s": 5.0})
    settled = after(first, second)
    assert (settled.sound, settled.trim_db, settled.depth) == ("tone", -30.0, 0.4)
    assert (settled.law, settled.reach) == ("mam", 3.0)
    assert settled.target is not None
    assert settled.target.direction == pytest.approx((np.sin(np.pi / 18), np.cos(np.pi / 18), 0.0))


def test_one_shot_sounds_are_over_and_loops_are_not() -> None:
    assert after(cue("1", one_shot())).sound == ""
    assert after(cue("1", loop())).sound == "tone"
    assert after(cue("1", loop()), cue("2", one_shot(sound="other"))).sound == ""
    assert after(cue("1", one_shot(), loop(at_s=0.5, sound="other"))).sound == "other"
    assert after(cue("1", {"beam": "a", "at_s": 2.0, "fall_s": 9.0}, loop())).sound == ""


def test_a_focus_that_follows_stays_where_it_was_when_the_target_has_no_distance() -> None:
    near = cue("1", loop(point_m=[0.0, 4.0, 0.0], reach="aim"))
    angle = cue("2", {"beam": "a", "azimuth_deg": 5.0})
    assert after(near).reach == "aim"
    assert after(near, angle).reach == pytest.approx(4.0)


def moments(*cues: dict[str, Any]) -> list[Moment]:
    return list(acts_of(show_of(*cues)))


def test_acts_at_one_time_make_one_moment_and_a_cue_without_acts_none() -> None:
    told = moments(cue("1", loop(), loop("b"), {"beam": "a", "at_s": 2.0, "fall_s": 1.0}), cue("2"))
    assert [(m.ref, m.at_s) for m in told] == [("1", 0.0), ("1", 2.0)]
    assert {n: b.sound for n, b in told[0].beams.items()} == {"a": "tone", "b": "tone"}
    assert {n: b.sound for n, b in told[1].beams.items()} == {"a": "", "b": "tone"}
    assert told[0].leaving == {}
    assert told[1].leaving == {"a": (told[0].beams["a"],)}


def test_a_travel_has_both_ends_while_it_lasts() -> None:
    told = moments(
        cue("1", loop(point_m=[0.0, 5.0, 0.0])),
        cue(
            "2",
            {"beam": "a", "point_m": [1.0, 5.0, 0.0], "over_s": 3.0},
            {"beam": "b", "at_s": 2.0, "depth": 0.5},
            {"beam": "b", "at_s": 4.0, "depth": 0.5},
        ),
    )
    _, starts, under_way, over = told
    here, there = Target("point 0 5 0", (0.0, 5.0, 0.0)), Target("point 1 5 0", (1.0, 5.0, 0.0))
    for moment in (starts, under_way):
        assert moment.beams["a"].target == there
        assert [s.target for s in moment.leaving["a"]] == [here]
    assert over.beams["a"].target == there
    assert over.leaving == {}


def test_a_one_shot_counts_for_its_length_and_no_longer() -> None:
    told = moments(
        cue(
            "1",
            one_shot(),
            {"beam": "b", "at_s": 0.99, "depth": 0.5},
            {"beam": "b", "at_s": 1.03, "depth": 0.5},
            {"beam": "b", "at_s": 1.07, "depth": 0.5},
        )
    )
    assert [m.beams["a"].sound for m in told] == ["tone", "tone", "", ""]
    assert ["a" in m.leaving for m in told] == [False, False, True, False]


def test_what_falls_takes_a_new_aim_along() -> None:
    told = moments(
        cue(
            "1",
            loop(azimuth_deg=0.0),
            {"beam": "a", "at_s": 1.0, "fall_s": 5.0},
            {"beam": "a", "at_s": 2.0, "azimuth_deg": 20.0, "trim_db": -50.0},
        )
    )
    aimed = [
        s.target.direction[0] for s in told[-1].leaving["a"] if s.target and s.target.direction
    ]
    assert aimed == pytest.approx([0.0, np.sin(np.deg2rad(20.0))])
    assert {s.trim_db for s in told[-1].leaving["a"]} == {-20.0}


# -- against the player --------------------------------------------------------------------------


def armed(show: Show) -> Player:
    player = Player(show)
    player.sink("sink-open", 0)
    for event in (events.Ready(), events.Confirm()):
        player.handle(event, 0)
    return player


def focus_per_m(settled: Settled) -> float:
    if settled.reach == "aim":
        point = settled.target.point_m if settled.target else None
        return 1.0 / float(np.linalg.norm(point)) if point else 0.0
    return 0.0 if settled.reach == "far" else 1.0 / float(settled.reach)


def assert_same(settled: Settled, state: BeamState, sound: str, sample: int) -> None:
    assert settled.sound == sound
    power = 10.0 ** (settled.trim_db / 10.0) if settled.sound else 0.0
    assert state.power_at(sample) == pytest.approx(power)
    assert state.depth_at(sample) == settled.depth
    assert state.law_name() == settled.law
    unit = settled.target.unit() if settled.target else (0.0, 1.0, 0.0)
    assert state.direction_at(sample)[:3] == pytest.approx(unit, abs=1e-12)
    assert state.reach_per_m_at(sample) == pytest.approx(focus_per_m(settled), abs=1e-12)


@given(sheets)
@settings(max_examples=80, deadline=None)
def test_the_state_after_each_cue_is_where_the_player_comes_to_rest(
    cues: list[dict[str, Any]],
) -> None:
    show = show_of(*cues)
    player = armed(show)
    for i, one in enumerate(cues):
        player.handle(events.Go(ref=one["ref"]), at(i * GAP_S))
        rest = at((i + 1) * GAP_S) - 1
        player.advance(rest)
        for name, settled in state_after(show, one["ref"]).items():
            plan = player.plans[name]
            assert_same(settled, plan.state, plan.sound, rest)


@given(sheets)
@settings(max_examples=40, deadline=None)
def test_what_one_act_leads_to_is_what_its_moment_has(cues: list[dict[str, Any]]) -> None:
    show = show_of(*cues)
    for moment in acts_of(show):
        acts = show.sheet.cue[show.sheet.position(moment.ref)].in_time()
        for name, settled in moment.beams.items():
            given = [a for a in acts if a.beam == name and a.at_s == moment.at_s]
            if given:
                assert led_to(show, moment.ref, given[-1], target_in(show))[0] == settled


def target_in(show: Show) -> TargetOf:
    panel = show.rig.panel["p"]
    return lambda act: target_of(act, show.house, panel) if act.aims else None


def test_an_act_leads_to_what_was_given_before_it_and_to_nothing_later() -> None:
    show = show_of(
        cue("1", loop(depth=0.3)),
        cue("2", {"beam": "a", "at_s": 2.0, "depth": 0.9}, {"beam": "a", "trim_db": -30.0}),
        cue("3", one_shot()),
        cue("4", {"beam": "a", "depth": 0.1}),
    )
    acts = {c.ref: c.act for c in show.sheet.cue}
    led = {
        (ref, k): led_to(show, ref, act, target_in(show))
        for ref, made in acts.items()
        for k, act in enumerate(made)
    }
    assert led["2", 1] == (Settled("tone", -30.0, 0.3), True)
    assert led["2", 0] == (Settled("tone", -30.0, 0.9), True)
    assert led["3", 0] == (Settled("tone", -20.0, 0.9), False)
    assert led["4", 0] == (Settled("", -20.0, 0.1), True)


@given(sheets, st.floats(0.0, 1.0))
@settings(max_examples=80, deadline=None)
def test_what_sounds_inside_a_cue_lies_between_the_states_of_its_moments(
    cues: list[dict[str, Any]], share: float
) -> None:
    """Looked at just after each act: louder than all ends of its glide, or unlisted, is wrong."""
    show = show_of(*cues)
    player = armed(show)
    start = {one["ref"]: at(i * GAP_S) for i, one in enumerate(cues)}
    fired: set[str] = set()
    for moment in acts_of(show):
        if moment.ref not in fired:
            for ref in [c["ref"] for c in cues if c["ref"] not in fired]:
                player.handle(events.Go(ref=ref), start[ref])
                fired.add(ref)
                if ref == moment.ref:
                    break
        sample = start[moment.ref] + at(moment.at_s)
        player.advance(sample + 1)
        for name, settled in moment.beams.items():
            ends = [s for s in (settled, *moment.leaving.get(name, ())) if s.sound]
            power = player.plans[name].state.power_at(sample + round(share * RATE_HZ * 0.001))
            loudest = max((10.0 ** (s.trim_db / 10.0) for s in ends), default=0.0)
            assert power <= loudest * SWING**2 + 1e-12
