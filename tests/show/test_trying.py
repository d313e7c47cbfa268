"""Sound it now: one act outside any cue, and no trace of it once a cue sounds there again."""

from __future__ import annotations

from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from support.playing import LATER, at, cue, loop, one_shot, only, player, reason, whats
from support.rigs import make_show
from support.sheets import sheets

from beamctl.show import events
from beamctl.show.plan import END_PAD_S
from beamctl.show.player import Player
from beamctl.show.records import Record

GAP_S = 20.0  # longer than any cue of `sheets`
CUES = (
    cue(
        "1", loop(depth=0.9, law="ssb", azimuth_deg=10.0), {"beam": "a", "at_s": 2.0, "depth": 0.4}
    ),
    cue("2", {"beam": "a", "trim_db": -30.0}, {"beam": "a", "at_s": 1.0, "fall_s": 1.0}),
    cue("3", one_shot("b")),
    cue("4", loop()),
    cue("5", {"beam": "a", "azimuth_deg": -10.0}),
)


def tried(p: Player, ref: str, act: int = 0, trim_db: float = -40.0, sample: int = 0) -> list[Any]:
    return p.handle(events.SoundNow("desk", ref, act, trim_db), sample)


def test_an_act_sounds_as_it_would_at_its_own_trim_or_below_and_no_cue_runs() -> None:
    p = player(*CUES)
    told = tried(p, "1", 1)
    assert (told[0].what, told[0].beam, told[0].cue, told[0].who) == ("try", "a", "try", "desk")
    assert told[0].args == {"of": "1", "act": 1, "trim_db": -40.0}
    assert {r.cue for r in told} == {"try"}
    state = p.plans["a"].state
    assert state.power_at(at(0.2)) == pytest.approx(1e-4)
    assert (state.depth_at(at(1.0)), state.law_name()) == (0.4, "ssb")
    assert state.direction_at(0)[0] == pytest.approx(0.1736, abs=1e-4)
    assert (p.trying, p.runs, p.newest, p.standby) == (("a",), {}, "", "1")


@pytest.mark.parametrize(
    ("ref", "act", "trim_db", "word"),
    [
        ("9", 0, -40.0, "unknown-ref"),
        ("1", 2, -40.0, "unknown-ref"),
        ("1", -1, -40.0, "unknown-ref"),
        ("2", 1, -40.0, "bad-type"),  # a fall
        ("1", 0, -19.9, "barred"),
        ("2", 0, -29.9, "barred"),
        ("1", 0, float("nan"), "bad-type"),
        ("1", 0, -91.0, "bad-type"),
    ],
)
def test_what_cannot_be_tried_is_refused(ref: str, act: int, trim_db: float, word: str) -> None:
    p = player(*CUES)
    told = tried(p, ref, act, trim_db)
    assert reason(told) == word
    assert p.trying == ()
    if word == "barred":
        assert f"up to {-20 if ref == '1' else -30} dB" in told[0].args["text"]


def test_nothing_is_tried_when_nothing_may_sound() -> None:
    assert reason(tried(player(*CUES, armed=False), "1")) == "not-armed"
    p = player(*CUES)
    p.barred = {"1": "it is being looked at"}
    assert reason(tried(p, "1")) == "barred"
    p.handle(events.Hold(), 0)
    assert reason(tried(p, "4")) == "busy"
    p.mode = "SHOW"
    assert reason(tried(p, "4")) == "locked"
    p.output = "TRIPPED"
    p.mode = "WALK"
    assert reason(tried(p, "4")) == "tripped"


def test_it_ends_when_asked_and_asking_again_says_nothing() -> None:
    p = player(*CUES)
    tried(p, "1")
    assert reason(p.handle(events.SoundOff(beam="x"), 1)) == "unknown-ref"
    assert p.handle(events.SoundOff(beam="b"), at(1.0)) == []
    assert whats(p.handle(events.SoundOff(), at(1.0))) == ["try-end", "level", "stop"]
    assert (p.trying, p.plans["a"].state.silent(at(1.3))) == ((), True)
    assert p.handle(events.SoundOff(), at(2.0)) == []


def test_a_one_shot_sound_ends_by_itself() -> None:
    p = player(*CUES)
    tried(p, "3")
    assert p.trying == ("b",)
    assert [r.sample for r in p.advance(LATER)] == [at(1.0 + END_PAD_S)] * 2
    assert p.trying == ()


def test_what_the_engine_takes_late_ends_as_much_later() -> None:
    p = player(*CUES)
    p.moved(tried(p, "3"), 500)
    assert {r.sample for r in p.advance(LATER)} == {at(1.0 + END_PAD_S) + 500}


def test_tail_ends_the_newest_of_cues_and_tries() -> None:
    p = player(*CUES)
    p.handle(events.Go(ref="3"), 0)
    tried(p, "1", sample=10)
    assert whats(p.handle(events.Tail(fall_s=0.5), 20)) == ["try-end", "level", "stop"]
    assert whats(p.handle(events.Tail(fall_s=0.5), 30)) == ["tail", "level", "stop"]
    tried(p, "1", sample=40)
    p.handle(events.Go(ref="3"), at(2.0))
    assert only(p.handle(events.Tail(), at(2.1)), "tail")[0].cue == "3"
    assert p.trying == ("a",)


def test_a_try_takes_over_from_a_cue_which_is_then_done() -> None:
    p = player(*CUES)
    p.handle(events.Go(ref="4"), 0)
    tried(p, "1", sample=at(1.0))
    assert p.advance(at(2.0)) == [Record(at(1.2), "done", cue="4")]
    assert p.trying == ("a",)


def test_a_cue_takes_over_from_a_try_and_nothing_of_the_try_is_left() -> None:
    p = player(*CUES)
    tried(p, "1")
    p.handle(events.Go(ref="4"), at(1.0))
    plan = p.plans["a"]
    assert (p.trying, plan.owner, plan.cue) == ((), "4", "4")
    later = at(2.0)
    assert (plan.state.depth_at(later), plan.state.law_name()) == (0.7, "dsb")
    assert plan.state.direction_at(later)[0] == pytest.approx(0.0)
    assert plan.state.power_at(later) == pytest.approx(0.01)


def test_an_act_without_a_sound_comes_on_top_of_a_try_and_stays_when_it_has_ended() -> None:
    p = player(*CUES)
    tried(p, "1")
    p.handle(events.Go(ref="5"), at(1.0))
    assert p.trying == ("a",)
    assert p.plans["a"].state.direction_at(at(2.0))[0] == pytest.approx(-0.1736, abs=1e-4)
    p.handle(events.SoundOff(), at(2.0))
    p.handle(events.Go(ref="4"), at(3.0))
    assert p.plans["a"].state.direction_at(at(4.0))[0] == pytest.approx(-0.1736, abs=1e-4)
    assert p.plans["a"].state.depth_at(at(4.0)) == 0.7


def test_hush_silences_it_and_a_loop_is_heard_again_as_all_loops_are() -> None:
    p = player(*CUES)
    tried(p, "1")
    assert whats(p.handle(events.Hush(), 10)) == ["gate", "output"]
    assert reason(tried(p, "1", sample=11)) == "not-armed"
    p.handle(events.SoundOff(), 12)
    p.handle(events.Restore(), at(1.0))
    assert (p.trying, p.plans["a"].state.silent(at(1.0))) == ((), True)


@pytest.mark.parametrize("off", [False, True])
def test_when_the_sink_is_lost_a_loop_comes_back_unless_it_was_ended(off: bool) -> None:
    p = player(*CUES)
    tried(p, "1")
    tried(p, "3")
    p.sink("sink-lost", 100)
    assert p.trying == ("a",)
    if off:
        p.handle(events.SoundOff(), 150)
    p.sink("sink-open", 200)
    p.handle(events.Ready(), 300)
    back = p.handle(events.Confirm(), 300)
    assert [r.args["sound"] for r in only(back, "play")] == ["tone"] * (not off)
    assert p.trying == (() if off else ("a",))


@given(sheets, st.data())
@settings(max_examples=60, deadline=None)
def test_once_a_cue_sounds_on_a_beam_nobody_hears_what_was_tried_there_before(
    cues: list[dict[str, Any]], data: st.DataObject
) -> None:
    plain, other = (armed(*cues) for _ in range(2))
    acts = [(one["ref"], k) for one in cues for k in range(len(one["act"]))]
    for i, one in enumerate(cues):
        now = at(i * GAP_S)
        for ref, k in data.draw(st.lists(st.sampled_from(acts), max_size=2)) if acts else ():
            tried(other, ref, k, -60.0, now)
        if data.draw(st.booleans()):
            other.handle(events.SoundOff(), now + at(1.0))
        for p in (plain, other):
            p.handle(events.Go(ref=one["ref"]), now + at(5.0))
            p.advance(now + at(GAP_S))
        rest = now + at(GAP_S) - 1
        for name, plan in other.plans.items():
            starts = [a for a in one["act"] if a["beam"] == name and "sound" in a]
            if starts and plan.sound:
                assert_alike(plain, other, name, rest)


def armed(*cues: dict[str, Any]) -> Player:
    p = Player(make_show(("a", "b"), list(cues), sounds=("tone", "other")))
    p.sink("sink-open", 0)
    p.handle(events.Ready(), 0)
    p.handle(events.Confirm(), 0)
    return p


def assert_alike(one: Player, other: Player, beam: str, sample: int) -> None:
    a, b = one.plans[beam], other.plans[beam]
    assert (a.sound, a.owner, a.trim_db) == (b.sound, b.owner, b.trim_db)
    assert b.state.power_at(sample) == pytest.approx(a.state.power_at(sample))
    assert b.state.depth_at(sample) == a.state.depth_at(sample)
    assert b.state.law_name() == a.state.law_name()
    assert b.state.direction_at(sample) == pytest.approx(a.state.direction_at(sample), abs=1e-9)
    assert b.state.reach_per_m_at(sample) == pytest.approx(a.state.reach_per_m_at(sample), abs=1e-9)
