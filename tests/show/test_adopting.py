"""An edited sheet taken up while it plays: runs, stand-by, numbers, and what sounds."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import pytest
from support.playing import LATER, at, cue, loop, one_shot, only, player, reason, whats
from support.rigs import make_show

from beamctl.show import events
from beamctl.show.player import Player
from beamctl.show.records import Record


def adopt(
    p: Player,
    second: float,
    *cues: dict[str, Any],
    edited: tuple[str, ...] = ("1",),
    renamed: Mapping[str, str] | None = None,
) -> list[Record]:
    return p.adopt(make_show(tuple(p.plans), list(cues)), at(second), edited, renamed or {})


def going(*cues: dict[str, Any]) -> Player:
    """Cue 1 fired at 0."""
    p = player(*cues)
    p.handle(events.Go(ref="1"), 0)
    return p


def move(beam: str = "a", **act: Any) -> dict[str, Any]:
    return {"beam": beam} | act


# -- what sounds --------------------------------------------------------------------------------


def test_a_beam_that_sounds_follows_an_edit_on_the_account_of_its_cue() -> None:
    p = going(cue("1", loop(depth=0.5)))
    told = adopt(p, 1.0, cue("1", loop(depth=0.3, law="ssb", trim_db=-26.0)))
    assert {(r.what, r.beam, r.cue, r.sample, r.args["n"]) for r in told} == {
        (what, "a", "1", at(1.0), at(0.2)) for what in ("law", "depth", "level")
    }
    state = p.plans["a"].state
    assert state.power_at(at(1.0)) == pytest.approx(0.01)
    assert state.power_at(at(1.2)) == pytest.approx(10**-2.6)
    assert (state.depth_at(at(1.2)), state.law_name()) == (0.3, "ssb")


def test_a_field_that_is_taken_away_is_as_it_was_before_the_cue() -> None:
    p = player(cue("0", move(depth=0.2, azimuth_deg=5.0)), cue("1", loop(depth=0.9, azimuth_deg=9)))
    p.handle(events.Go(ref="0"), 0)
    p.handle(events.Go(ref="1"), at(1.0))
    adopt(p, 2.0, cue("0", move(depth=0.2, azimuth_deg=5.0)), cue("1", loop()))
    state = p.plans["a"].state
    assert state.depth_at(at(3.0)) == 0.2
    assert state.direction_at(at(3.0))[0] == pytest.approx(np.sin(np.deg2rad(5.0)))


def test_nothing_changes_for_cues_that_were_not_edited() -> None:
    other = cue("2", loop("b", over_s=3.0, azimuth_deg=1.0), move("b", at_s=1.0, azimuth_deg=3.0))
    p = going(cue("1", loop(depth=0.5)), other)
    p.handle(events.Go(ref="2"), at(0.5))
    state = p.plans["b"].state
    rows = [row.copy() for row in (state.level, state.depth, state.reach, state.aim, state.law)]
    acts, follow = list(p.runs["2"].acts), p.runs["2"].follow
    told = adopt(p, 1.0, cue("1", loop(depth=0.3)), other)
    assert {r.beam for r in told} == {"a"}
    after = (state.level, state.depth, state.reach, state.aim, state.law)
    assert all(np.array_equal(a, b) for a, b in zip(rows, after, strict=True))
    assert (list(p.runs["2"].acts), p.runs["2"].follow) == (acts, follow)


def test_an_edit_during_a_glide_goes_on_from_where_the_value_is_and_ends_when_the_glide_would() -> (
    None
):
    p = going(cue("1", loop(over_s=4.0)))
    state = p.plans["a"].state
    before = state.power_at(at(1.0))
    (level,) = adopt(p, 1.0, cue("1", loop(over_s=4.0, trim_db=-30.0)))
    assert (level.what, level.args["n"]) == ("level", at(3.0))
    assert state.power_at(at(1.0)) == pytest.approx(before, rel=1e-9)
    assert state.power_at(at(4.0)) == pytest.approx(1e-3)


def test_a_new_aim_far_off_dips_as_an_act_would() -> None:
    p = going(cue("1", loop(azimuth_deg=-40.0)))
    fall, jump, rise = adopt(p, 1.0, cue("1", loop(azimuth_deg=40.0)))
    assert (fall.what, jump.what, rise.what) == ("level", "aim", "level")
    assert fall.sample + fall.args["n"] <= jump.sample < rise.sample


def test_a_sound_is_neither_started_nor_changed_until_the_next_go() -> None:
    p = going(cue("1", one_shot()), cue("2"))
    assert adopt(p, 0.5, cue("1", loop(), loop("b")), cue("2")) == []
    assert only(p.advance(LATER), "done")
    assert adopt(p, 9e3, cue("1", one_shot()), cue("2")) == []
    assert [r.args["loop"] for r in only(p.handle(events.Go(ref="1"), 2 * LATER), "play")] == [
        False
    ]


def test_a_sound_whose_act_is_gone_falls() -> None:
    p = going(cue("1", loop(), loop("b")))
    told = adopt(p, 1.0, cue("1", move(depth=0.2), loop("b")))
    assert [(r.what, r.beam, r.args["n"]) for r in told] == [
        ("level", "a", at(0.5)),
        ("stop", "a", at(0.5)),
    ]
    assert (p.plans["a"].sound, p.plans["b"].sound, p.state("1")) == ("", "tone", "running")


def test_a_fall_put_where_time_has_passed_ends_the_sound_and_one_to_come_comes() -> None:
    p = going(cue("1", loop(), loop("b")))
    edited = cue(
        "1", loop(), loop("b"), move(at_s=1.0, fall_s=2.0), move("b", at_s=3.0, fall_s=1.0)
    )
    assert {r.beam for r in adopt(p, 2.0, edited)} == {"a"}
    assert [(r.beam, r.sample) for r in only(p.advance(LATER), "level")] == [("b", at(3.0))]


def test_a_beam_goes_back_when_the_cue_that_moved_it_is_deleted_and_on_again_when_it_returns() -> (
    None
):
    mover = cue("2", move(trim_db=-30.0))
    p = going(cue("1", loop()), mover)
    p.handle(events.Go(ref="2"), at(1.0))
    (level,) = only(adopt(p, 2.0, cue("1", loop()), edited=()), "level")
    assert level.args["power"] == pytest.approx(0.01)
    assert p.plans["a"].sound == "tone"
    (level,) = only(adopt(p, 3.0, cue("1", loop()), mover, edited=()), "level")
    assert level.args["power"] == pytest.approx(0.001)


def test_a_focus_that_follows_goes_on_following_when_its_target_is_taken_away() -> None:
    p = going(cue("1", loop(point_m=[0.0, 5.0, 0.0], reach="aim")))
    adopt(p, 1.0, cue("1", loop(reach="aim")))
    assert p.plans["a"].settled().reach == "aim"
    assert p.plans["a"].state.reach_per_m_at(at(3.0)) == 0.0


def test_after_a_try_a_cue_is_followed_from_what_was_before_it() -> None:
    cues = (cue("1", loop(depth=0.5)), cue("2", loop(depth=0.9)), cue("3", move("b")))
    p = going(*cues)
    p.handle(events.SoundNow(ref="2", trim_db=-40.0), at(1.0))
    p.handle(events.Go(ref="2"), at(2.0))
    adopt(p, 3.0, cues[0], cue("2", loop()), cues[2], edited=("2",))
    assert p.plans["a"].state.depth_at(at(4.0)) == 0.5


def test_what_a_try_has_follows_when_a_cue_sounds_again() -> None:
    p = going(cue("1", loop(depth=0.5)), cue("2", loop()))
    p.handle(events.SoundNow(ref="2", trim_db=-40.0), at(1.0))
    assert whats(adopt(p, 2.0, cue("1", loop(depth=0.9)), cue("2", loop()))) == ["done"]
    assert p.trying == ("a",)
    p.handle(events.Go(ref="2"), at(3.0))
    assert p.plans["a"].state.depth_at(at(4.0)) == 0.9


# -- runs ---------------------------------------------------------------------------------------


def test_acts_to_come_are_the_new_ones_and_what_has_passed_is_not_made_up_for() -> None:
    p = going(cue("1", loop(), move(at_s=2.0, depth=0.2), move(at_s=3.0, depth=0.3)))
    edited = (loop(), loop("b", at_s=0.5), move(at_s=1.5, trim_db=-30.0), move(at_s=4.0, depth=0.4))
    assert adopt(p, 1.0, cue("1", *edited)) == []
    later = p.advance(LATER)
    assert [(r.sample, r.what, r.args.get("depth")) for r in later] == [
        (at(1.5), "level", None),
        (at(4.0), "depth", 0.4),
    ]
    assert p.plans["b"].sound == ""


def test_an_act_that_was_given_is_not_given_again_at_a_later_place() -> None:
    p = going(cue("1", loop(), move(at_s=1.0, depth=0.2)))
    p.advance(at(1.1))  # ahead of what is heard
    edited = cue("1", loop(), move(at_s=1.0, depth=0.2), move(at_s=1.0, law="ssb"))
    assert [(r.what, r.sample) for r in adopt(p, 0.99, edited)] == [("law", at(1.0))]
    assert p.advance(LATER) == []


def test_hold_moves_the_places_of_new_acts_along() -> None:
    p = going(cue("1", loop(), loop("b", at_s=2.0)))
    p.handle(events.Hold(), at(1.0))
    adopt(p, 5.0, cue("1", loop(), loop("b", at_s=1.5)))
    p.handle(events.CarryOn(), at(11.0))
    assert [r.sample for r in only(p.advance(at(12.0)), "play")] == [at(11.5)]
    adopt(p, 12.0, cue("1", loop(), loop("b", at_s=1.5), move(at_s=2.5, depth=0.1)))
    assert [r.sample for r in p.advance(LATER)] == [at(12.5)]


def test_a_tailed_cue_takes_no_new_acts() -> None:
    p = going(cue("1", loop()))
    p.handle(events.Tail(fall_s=2.0), at(1.0))
    edited = cue("1", loop(), loop("b", at_s=1.5), then="2", then_at_s=2.0)
    assert adopt(p, 1.2, edited, cue("2")) == []
    assert [(r.what, r.sample) for r in p.advance(LATER)] == [("done", at(3.0))]


def test_acts_that_a_tail_kept_from_coming_are_no_matter() -> None:
    mover = (move(depth=0.4), move(at_s=2.0, law="ssb"))
    p = going(cue("1", loop()), cue("2", *mover))
    p.handle(events.Go(ref="2"), 0)
    p.handle(events.Tail(ref="2"), at(1.0))
    p.advance(at(4.0))
    edited = cue("2", move(depth=0.4), move(at_s=2.0, law="mam"))
    assert adopt(p, 5.0, cue("1", loop()), edited, edited=("2",)) == []


def test_follow_ons_are_the_new_ones_unless_they_came_or_were_dropped() -> None:
    p = going(
        cue("1", loop(), then="2", then_at_s=5.0), cue("2", then="3", then_at_s=9.0), cue("3")
    )
    now = cue("1", loop(), then="3", then_at_s=4.0)
    adopt(p, 1.0, now, cue("2"), cue("3"), edited=("1", "2"))
    assert p.runs["1"].follow == (at(4.0), "3")
    p.advance(at(4.5))
    adopt(p, 5.0, cue("1", loop(), then="3", then_at_s=8.0), cue("2"), cue("3"))
    assert p.runs["1"].follow is None
    hushed = going(cue("1", loop(), then="2", then_at_s=5.0), cue("2"))
    hushed.handle(events.Hush(), at(1.0))
    adopt(hushed, 2.0, cue("1", loop(), then="2", then_at_s=6.0), cue("2"))
    assert hushed.runs["1"].follow is None


def test_a_follow_on_to_a_cue_that_is_gone_does_not_come() -> None:
    p = going(cue("1", loop(), then="2", then_at_s=5.0), cue("2"), cue("3"))
    adopt(p, 1.0, cue("1", loop()), cue("3"), edited=("1",))
    assert p.runs["1"].follow is None
    assert only(p.advance(LATER), "go") == only(p.advance(LATER), "refused") == []


# -- cues that come and go ----------------------------------------------------------------------


def test_a_running_cue_that_is_deleted_is_tailed_and_forgotten() -> None:
    p = going(cue("1", loop(), loop("b", at_s=2.0)), cue("2"))
    told = adopt(p, 1.0, cue("2"), edited=())
    assert [(r.what, r.cue, r.args["n"]) for r in told] == [
        ("level", "1", at(0.5)),
        ("stop", "1", at(0.5)),
    ]
    assert p.state("1") == "tailing"
    assert p.advance(LATER) == [Record(at(1.5), "done", cue="1")]
    assert (p.states, p.runs) == ({"2": "standing by"}, {})
    assert reason(p.handle(events.Go(ref="1"), LATER)) == "unknown-ref"


def test_a_new_cue_can_be_fired() -> None:
    p = going(cue("1"))
    adopt(p, 1.0, cue("1"), cue("2", loop("b", azimuth_deg=10.0)), edited=("2",))
    told = p.handle(events.Go(ref="2"), at(2.0))
    assert only(told, "aim")[0].args["direction"][0] == pytest.approx(np.sin(np.deg2rad(10.0)))


def test_stand_by_stays_or_goes_to_the_next_number_that_can_stand_by() -> None:
    p = player(*(cue(ref) for ref in ("1", "2", "2.5", "3")))
    p.handle(events.StandBy(ref="2"), 0)
    assert adopt(p, 1.0, *(cue(ref) for ref in ("1", "2", "3"))) == []
    assert (p.standby, p.state("2")) == ("2", "standing by")
    p.barred = {"2.5": "too loud"}
    kept = (cue(ref) for ref in ("1", "2.5", "3"))
    assert adopt(p, 2.0, *kept) == [Record(at(2.0), "standby", cue="3")]
    assert (p.standby, p.state("3"), p.states) == ("3", "standing by", {"3": "standing by"})
    p.handle(events.Go(ref="1"), at(2.5))
    p.advance(at(2.6))
    assert p.states == {"1": "done", "3": "standing by"}
    adopt(p, 3.0, cue("0"))
    assert (p.standby, p.states) == ("", {})


def test_a_cue_that_gets_another_number_is_the_same_cue() -> None:
    p = going(cue("1", loop(), move(at_s=3.0, depth=0.2)), cue("2", then="1", then_at_s=50.0))
    p.handle(events.Go(ref="2"), at(0.5))
    p.barred = {"1": "why"}
    told = adopt(
        p,
        1.0,
        cue("2", loop(), move(at_s=3.0, depth=0.2)),
        cue("3", then="2", then_at_s=50.0),
        edited=(),
        renamed={"1": "2", "2": "3"},
    )
    assert told == []
    assert (p.newest, p.states) == ("3", {"2": "running", "3": "running"})
    assert (p.plans["a"].cue, p.plans["a"].owner, p.barred) == ("2", "2", {"2": "why"})
    assert p.runs["3"].follow == (at(50.5), "2")
    assert [(r.what, r.cue) for r in p.advance(at(4.0))] == [("depth", "2")]


def test_a_number_taken_from_a_cue_that_is_deleted_means_other_cues() -> None:
    p = going(cue("1", loop()), cue("2", loop("b")))
    p.handle(events.Go(ref="2"), at(0.5))
    adopt(p, 1.0, cue("1", loop("b")), edited=(), renamed={"2": "1"})
    assert {plan.sound for plan in p.plans.values()} == {""}
    assert whats(p.advance(LATER)) == ["done", "done"]
    assert p.states == {"1": "done"}


def test_another_house_or_other_beams_are_not_taken_up() -> None:
    p = player(cue("1"))
    before = p.show
    for show in (make_show(("a",), []), make_show(("a", "b"), [], house={"block": {}})):
        with pytest.raises(ValueError, match="another player"):
            p.adopt(show, 0)
    assert p.show is before


def test_a_cue_takes_the_number_of_one_that_is_gone_and_not_its_past() -> None:
    one = (loop(), move("b", depth=0.4), move("b", at_s=1.0, law="ssb"))
    p = going(cue("1", *one), cue("2", move()))
    p.handle(events.Tail(ref="1", fall_s=0.1), at(0.5))
    p.handle(events.Go(ref="2"), at(2.0))
    adopt(p, 3.0, cue("1", *one), edited=())
    adopt(p, 4.0, cue("2", *one), edited=(), renamed={"1": "2"})
    edited = cue("2", loop(), move("b", depth=0.4), move("b", at_s=1.0, law="mam"))
    assert adopt(p, 5.0, edited, edited=("2",)) == []


def test_a_number_whose_cue_still_falls_is_not_taken_over() -> None:
    p = going(cue("1", loop()), cue("2", loop("b")))
    p.handle(events.Go(ref="2"), 0)
    adopt(p, 1.0, cue("1", loop()), edited=())
    adopt(p, 1.2, cue("2", loop()), edited=(), renamed={"1": "2"})
    assert {plan.sound for plan in p.plans.values()} == {""}
    assert p.advance(LATER)
    assert p.runs == {}
