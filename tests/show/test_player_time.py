"""What the player does by itself and in time: follow-ons, hold, ends of sounds, dips."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from support.playing import LATER, RATE_HZ, at, cue, loop, one_shot, only, player, whats

from beamctl.show import events
from beamctl.show.plan import END_FALL_S, END_PAD_S, PHASE_RATE
from beamctl.show.player import Player
from beamctl.show.records import Record

# -- follow-ons ---------------------------------------------------------------------------------


def chain() -> Player:
    return player(cue("1", then="2", then_at_s=1.5), cue("2", loop(at_s=0.25)), cue("3", loop("b")))


def test_a_follow_on_fires_at_its_very_sample() -> None:
    p = chain()
    p.handle(events.Go(), 11)
    assert p.standby == "3"
    assert only(p.advance(11 + at(1.5)), "go") == []
    (go,) = only(p.advance(11 + at(1.5) + 1), "go")
    assert go == Record(11 + at(1.5), "go", cue="2", who="follow-on of 1")
    (play,) = only(p.advance(LATER), "play")
    assert play.sample == 11 + at(1.5) + at(0.25)
    assert p.standby == "3"


def test_a_follow_on_finds_a_cue_done_however_late_it_is_looked_at() -> None:
    p = player(cue("1", then="2", then_at_s=1.0), cue("2", loop(), {"beam": "a", "fall_s": 0.1}))
    p.handle(events.Go(ref="2"), 0)
    p.handle(events.Go(ref="1"), 10)
    later = p.advance(LATER)
    assert [r.what for r in later if r.cue == "2"] == [
        "done",
        "go",
        "play",
        "level",
        "level",
        "stop",
        "done",
    ]


def test_firing_by_hand_cancels_the_pending_follow_on() -> None:
    p = chain()
    p.handle(events.Go(), 0)
    p.handle(events.Go(ref="2"), at(1.0))
    later = p.advance(LATER)
    assert only(later, "go") == only(later, "refused") == []
    assert [(r.cue, r.sample) for r in only(later, "done")] == [("1", at(1.0))]


def test_hush_cancels_follow_ons_and_restore_does_not_bring_them_back() -> None:
    p = chain()
    p.handle(events.Go(), 0)
    p.handle(events.Hush(), at(1.0))
    later = p.handle(events.Restore(), at(1.2)) + p.advance(LATER)
    assert only(later, "go") == only(later, "refused") == []
    assert [(r.cue, r.sample) for r in only(later, "done")] == [("1", at(1.0))]


def test_tail_cancels_a_follow_on_and_the_acts_to_come() -> None:
    p = player(cue("1", loop(), loop("b", at_s=2.0), then="2", then_at_s=3.0), cue("2"))
    p.handle(events.Go(), 0)
    assert whats(p.handle(events.Tail("key", fall_s=0.5), at(1.0))) == ["tail", "level", "stop"]
    assert p.state("1") == "tailing"
    assert p.advance(LATER) == [Record(at(1.5), "done", cue="1")]


def test_tail_without_a_reference_ends_the_newest_running_cue() -> None:
    p = player(cue("1", loop()), cue("2", loop("b")))
    p.handle(events.Go(), 0)
    p.handle(events.Go(), 1)
    p.handle(events.Tail(), 2)
    assert (p.state("1"), p.state("2")) == ("running", "tailing")
    p.handle(events.Tail(), 3)
    assert p.state("1") == "tailing"


# -- hold ---------------------------------------------------------------------------------------


@given(held_s=st.floats(0.0, 1.45), wait=st.integers(0, at(100.0)))
@settings(max_examples=40, deadline=None)
def test_hold_shifts_acts_and_follow_ons_by_exactly_the_held_time(held_s: float, wait: int) -> None:
    def played(hold: bool) -> list[tuple[int, str, str]]:
        p = player(
            cue("1", loop(), loop("b", at_s=1.48), then="2", then_at_s=1.6),
            cue("2", {"beam": "a", "fall_s": 1.0, "at_s": 0.5}),
        )
        records = p.handle(events.Go(), 0) + p.advance(at(held_s))
        if hold:
            assert whats(p.handle(events.Hold(), at(held_s)))[0] == "hold"
            assert p.advance(at(held_s) + wait) == []
            assert p.handle(events.CarryOn(), at(held_s) + wait)[0].what == "carry-on"
        records += p.advance(LATER)
        return [(r.sample, r.what, r.beam) for r in records]

    moved = [(s + wait * (s >= at(held_s) and s > 0), *rest) for s, *rest in played(False)]
    assert played(True) == moved


def test_hold_freezes_the_beams_that_sound_and_carry_on_thaws_them() -> None:
    p = player(cue("1", loop(over_s=2.0)))
    p.handle(events.Go(), 0)
    assert [(r.what, r.beam) for r in p.handle(events.Hold(), at(1.0))] == [
        ("hold", ""),
        ("freeze", "a"),
    ]
    beam = p.plans["a"].state
    assert beam.power_at(at(9.0)) == pytest.approx(0.05**2, rel=1e-2)
    thawed = p.handle(events.CarryOn(), at(10.0))
    assert [(r.what, r.beam) for r in thawed if r.beam == "a"] == [("thaw", "a")]
    assert beam.power_at(at(11.0)) == pytest.approx(0.01)


def test_no_cue_is_done_while_its_glides_are_held() -> None:
    p = player(cue("1", loop()), cue("2", {"beam": "a", "depth": 0.2, "over_s": 2.0}))
    p.handle(events.Go(), 0)
    p.handle(events.Go(), at(1.0))
    p.handle(events.Hold(), at(2.0))
    assert p.advance(at(60.0)) == []
    p.handle(events.CarryOn(), at(60.0))
    assert p.advance(LATER) == [Record(at(61.0), "done", cue="2")]


def test_a_tail_while_held_falls_at_once_and_stays_silent() -> None:
    p = player(cue("1", loop(over_s=4.0)))
    p.handle(events.Go(), 0)
    p.handle(events.Hold(), at(1.0))
    p.handle(events.Tail(fall_s=0.5), at(2.0))
    assert p.plans["a"].state.silent(at(2.5))
    assert p.advance(at(3.0)) == [Record(at(2.5), "done", cue="1")]
    p.handle(events.CarryOn(), at(4.0))
    assert p.plans["a"].state.silent(at(4.0))
    assert p.plans["a"].state.power_at(at(20.0)) == 0.0


# -- sounds, levels, travels ---------------------------------------------------------------------


def test_a_one_shot_sound_ends_lets_the_carrier_go_and_the_cue_is_done() -> None:
    p = player(cue("1", one_shot()))
    p.handle(events.Go(), 0)
    end = at(1.0 + END_PAD_S)
    assert p.advance(end) == []
    level, stop, done = p.advance(LATER)
    assert (level.sample, level.args) == (end, {"power": 0.0, "n": at(END_FALL_S)})
    assert (stop.sample, stop.what) == (end, "stop")
    assert done == Record(end + at(END_FALL_S), "done", cue="1")
    assert (p.state("1"), p.plans["a"].sound, p.plans["a"].owner) == ("done", "", "")
    assert p.plans["a"].state.silent(end + at(END_FALL_S))
    assert only(p.handle(events.Go(ref="1"), LATER), "go")


def test_a_one_shot_sound_ends_while_held_and_stays_silent_afterwards() -> None:
    p = player(cue("1", one_shot(over_s=3.0)))
    p.handle(events.Go(), 0)
    p.handle(events.Hold(), at(0.5))
    assert {r.sample for r in only(p.advance(at(2.0)), "level")} == {at(1.0 + END_PAD_S)}
    p.handle(events.CarryOn(), at(3.0))
    assert p.plans["a"].state.silent(at(3.0))
    assert p.plans["a"].state.power_at(at(30.0)) == 0.0


def test_a_loop_keeps_its_cue_running_until_another_takes_the_beam() -> None:
    p = player(cue("1", loop()), cue("2", loop()))
    p.handle(events.Go(), 0)
    assert p.advance(LATER) == []
    p.handle(events.Go(), LATER)
    p.advance(2 * LATER)
    assert (p.state("1"), p.state("2")) == ("done", "running")


def test_a_cue_whose_sound_another_ends_is_done_when_it_has_fallen() -> None:
    p = player(cue("1", loop()), cue("2", {"beam": "a", "fall_s": 2.0}))
    p.handle(events.Go(), 0)
    p.handle(events.Go(), at(1.0))
    assert {(r.sample, r.what, r.cue) for r in p.advance(LATER)} == {
        (at(3.0), "done", "1"),
        (at(3.0), "done", "2"),
    }


def test_a_silent_beam_takes_its_aim_at_once_and_a_sounding_one_travels() -> None:
    p = player(
        cue("1", loop(point_m=[0.0, 5.0, 0.0], over_s=3.0)),
        cue("2", {"beam": "a", "point_m": [1.0, 5.0, 0.0], "over_s": 2.0}),
    )
    first = p.handle(events.Go(), 0)
    assert [r.args["n"] for r in only(first, "aim")] == [0]
    assert [r.args["n"] for r in only(first, "level")] == [at(3.0)]
    second = p.handle(events.Go(), at(4.0))
    assert [(r.what, r.args["n"]) for r in second[1:]] == [("aim", at(2.0))]


def test_a_trim_glides_and_does_not_wake_a_silent_beam() -> None:
    p = player(cue("1", loop()), cue("2", {"beam": "a", "trim_db": -40.0, "over_s": 2.0}))
    assert whats(p.handle(events.Go(ref="2"), 0)) == ["go"]
    p.handle(events.Go(ref="1"), at(1.0))
    (level,) = only(p.handle(events.Go(ref="2"), at(2.0)), "level")
    assert level.args["power"] == pytest.approx(1e-4)


def test_a_trim_does_not_bring_back_a_carrier_whose_sound_is_ending() -> None:
    p = player(
        cue("1", loop()),
        cue("2", {"beam": "a", "fall_s": 5.0}),
        cue("3", {"beam": "a", "trim_db": -10.0}),
    )
    for second in (0.0, 1.0, 2.0):
        p.handle(events.Go(), at(second))
    assert p.plans["a"].state.silent(at(6.0))


def test_a_sound_on_a_beam_that_is_falling_rises_to_the_trim_again() -> None:
    p = player(
        cue("1", loop()),
        cue("2", {"beam": "a", "fall_s": 5.0}),
        cue("3", {"beam": "a", "sound": "tone", "loop": True}),
    )
    for second in (0.0, 1.0, 2.0):
        p.handle(events.Go(), at(second))
    assert p.plans["a"].state.power_at(at(7.0)) == pytest.approx(0.01)


def test_a_jump_too_fast_for_the_ear_dips_and_returns_in_order() -> None:
    p = player(cue("1", loop(azimuth_deg=-40.0)), cue("2", {"beam": "a", "azimuth_deg": 40.0}))
    p.handle(events.Go(), 0)
    go, fall, jump, rise = p.handle(events.Go(), at(1.0))
    assert (go.what, fall.what, jump.what, rise.what) == ("go", "level", "aim", "level")
    assert go.sample == fall.sample < jump.sample < rise.sample
    assert jump.sample >= fall.sample + fall.args["n"]
    assert (fall.args["power"], jump.args["n"]) == (0.0, 0)
    assert rise.args["power"] == pytest.approx(0.01)
    assert only(p.advance(LATER), "done") == [Record(rise.sample + rise.args["n"], "done", cue="2")]


def test_a_travel_is_slowed_to_the_phase_rate() -> None:
    p = player(cue("1", loop(azimuth_deg=0.0)), cue("2", {"beam": "a", "azimuth_deg": 2.0}))
    p.handle(events.Go(), 0)
    (aim,) = only(p.handle(events.Go(), at(1.0)), "aim")
    swing_rad = p.plans["a"].swing[0] * 2.0 * 3.141592653589793 / 180.0
    assert aim.args["n"] / RATE_HZ >= swing_rad / PHASE_RATE
    assert aim.args["n"] < at(0.15)


def test_a_wide_travel_with_time_enough_does_not_dip() -> None:
    p = player(
        cue("1", loop(azimuth_deg=-40.0)),
        cue("2", {"beam": "a", "azimuth_deg": 40.0, "over_s": 3.0}),
    )
    p.handle(events.Go(), 0)
    assert [(r.what, r.args.get("n")) for r in p.handle(events.Go(), at(1.0))] == [
        ("go", None),
        ("aim", at(3.0)),
    ]


def test_a_fall_during_a_dip_leaves_the_beam_silent() -> None:
    p = player(cue("1", loop(azimuth_deg=-40.0)), cue("2", {"beam": "a", "azimuth_deg": 40.0}))
    told = p.handle(events.Go(), 0) + p.handle(events.Go(), at(1.0))
    told += p.handle(events.Tail(ref="1", fall_s=0.0), at(1.0) + 100)
    last = sorted((r for r in told if r.what == "level"), key=lambda r: r.sample)[-1]
    assert last.args["power"] == 0.0
    assert p.plans["a"].state.silent(at(1.2))


def test_an_event_that_moves_beams_waits_for_what_was_done_ahead_of_it() -> None:
    p = player(cue("1", loop(), {"beam": "a", "at_s": 1.0, "trim_db": -10.0, "over_s": 1.0}))
    p.handle(events.Go(), 0)
    (ahead,) = p.advance(at(1.1))
    tail, level, stop = p.handle(events.Tail(fall_s=0.1), at(0.99))
    assert {r.sample for r in (tail, level, stop)} == {ahead.sample}
    assert p.plans["a"].state.silent(at(1.2))
    assert p.handle(events.Hush(), at(0.995))[0].sample == at(0.995)  # silence never waits


def test_an_event_comes_after_what_was_due_before_it() -> None:
    p = player(cue("1", loop(), loop("b", at_s=1.0)))
    p.handle(events.Go(), 0)
    held = p.handle(events.Hold(), at(2.0))
    assert [(r.sample, r.what) for r in held if r.beam == "b"] == [
        (at(1.0), "play"),
        (at(1.0), "level"),
        (at(2.0), "freeze"),
    ]


def test_what_hangs_on_a_go_moves_with_it() -> None:
    """The engine took a GO late: later acts, the follow-on and the sound's end are as late."""
    cues = (
        cue(
            "1", one_shot(), {"at_s": 0.5, "beam": "a", "azimuth_deg": 3.0}, then="2", then_at_s=2.0
        ),
        cue("2", loop("b")),
    )
    plain, late = (player(*cues) for _ in range(2))
    plain.handle(events.Go(ref="1"), 1000)
    late.moved(late.handle(events.Go(ref="1"), 1000), 256)
    expected = [r.later(256) for r in plain.advance(at(5.0))]
    assert "go" in whats(expected)
    assert late.advance(at(5.0) + 256) == expected
    assert late.runs["2"].started == plain.runs["2"].started + 256
