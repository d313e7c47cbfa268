"""What the player does when asked: GO, stand-by, the output; and what it refuses."""

from __future__ import annotations

from typing import Any

import pytest
from support.playing import LATER, at, cue, loop, only, player, reason, whats
from support.rigs import make_show

from beamctl.show import events
from beamctl.show.once import KEPT
from beamctl.show.opening import READY_S
from beamctl.show.player import Player
from beamctl.show.records import Record

# -- GO and stand-by ----------------------------------------------------------------------------


def test_go_fires_what_stands_by_and_moves_stand_by_on() -> None:
    p = player(cue("1", loop()), cue("2", loop("b")))
    assert (p.standby, p.state("1")) == ("1", "standing by")
    records = p.handle(events.Go("key"), 100)
    assert records[0] == Record(100, "go", cue="1", who="key")
    assert whats(records[1:]) == ["play", "level"]
    assert {(r.sample, r.beam, r.cue) for r in records[1:]} == {(100, "a", "1")}
    assert (p.state("1"), p.state("2"), p.standby) == ("running", "standing by", "2")
    assert (p.newest, p.newest_at) == ("1", 100)


def test_go_by_reference_leaves_another_stand_by_alone() -> None:
    p = player(cue("1", loop()), cue("2", loop("b")), cue("3"))
    p.handle(events.Go("wire", "2"), 0)
    assert (p.standby, p.state("2")) == ("1", "running")


def test_stand_by_after_go_passes_over_a_chain_of_follow_ons_and_what_runs() -> None:
    p = player(
        cue("1", then="2", then_at_s=1.0),
        cue("2", then="3", then_at_s=1.0),
        cue("3"),
        cue("4", loop()),
        cue("5"),
    )
    p.handle(events.Go(ref="4"), 0)
    p.handle(events.Go(), 0)
    assert p.standby == "5"


def test_after_the_last_cue_nothing_stands_by() -> None:
    p = player(cue("1"))
    p.handle(events.Go(), 0)
    assert p.standby == ""
    assert reason(p.handle(events.Go(), 1)) == "not-standing-by"


def test_step_moves_over_cues_that_cannot_stand_by() -> None:
    p = player(cue("1"), cue("2", loop()), cue("3"), cue("4"))
    p.handle(events.Go(ref="2"), 0)
    assert p.handle(events.Step("key", 1), 1) == [Record(1, "standby", cue="3", who="key")]
    assert p.state("1") == "resting"
    p.handle(events.Step(by=-1), 2)
    assert p.standby == "1"
    p.handle(events.Step(by=9), 3)
    assert p.standby == "4"
    assert p.handle(events.Step(by=1), 4) == []
    p.handle(events.StandBy(ref=""), 5)
    assert (p.standby, p.state("4")) == ("", "resting")
    p.handle(events.Step(by=-1), 6)
    assert p.standby == "4"


def test_standing_by_twice_says_nothing_and_taking_it_off_rests() -> None:
    p = player(cue("1"), cue("2"))
    assert p.handle(events.StandBy(ref="1"), 1) == []
    assert whats(p.handle(events.StandBy(ref="2"), 1)) == ["standby"]
    assert (p.state("1"), p.state("2")) == ("resting", "standing by")


def test_acts_happen_at_their_samples_in_time_order() -> None:
    p = player(cue("1", {"beam": "a", "at_s": 2.0, "fall_s": 0.5}, loop(), loop("b", at_s=1.00001)))
    assert {r.sample for r in p.handle(events.Go(), 50)} == {50}
    assert p.advance(50 + at(1.00001)) == []
    second = p.advance(50 + at(1.00001) + 1)
    assert {(r.sample, r.beam) for r in second} == {(50 + at(1.00001), "b")}
    third = p.advance(LATER)
    assert whats(third) == ["level", "stop"]
    assert {r.sample for r in third} == {50 + at(2.0)}


# -- refusals -----------------------------------------------------------------------------------


def test_nothing_sounds_before_arming() -> None:
    p = player(cue("1", loop()), armed=False)
    assert reason(p.handle(events.Go(ref="1"), 0)) == "not-armed"
    cold = Player(make_show(("a",), [cue("1", loop())]))
    assert reason(cold.handle(events.Go(ref="1"), 0)) == "not-armed"
    assert reason(cold.handle(events.Ready(), 0)) == "not-armed"
    assert reason(cold.handle(events.Restore(), 0)) == "not-armed"


def test_a_tripped_output_refuses_with_its_own_word() -> None:
    p = player(cue("1", loop()))
    p.output = "TRIPPED"
    for event in (events.Go(), events.Ready(), events.Restore()):
        assert reason(p.handle(event, 0)) == "tripped"
    assert "gate" in whats(p.handle(events.Hush(), 0))


@pytest.mark.parametrize(
    "event", [events.Go(ref="9"), events.StandBy(ref="9"), events.Tail("", "9")]
)
def test_an_unknown_cue_is_refused(event: events.Event) -> None:
    assert reason(player(cue("1")).handle(event, 0)) == "unknown-ref"


def test_a_token_fires_once_and_is_only_spent_by_a_go_that_was_done() -> None:
    p = player(cue("1"), cue("2"), cue("3"))
    assert reason(p.handle(events.Go(ref="9", token=5), 0)) == "unknown-ref"
    assert whats(p.handle(events.Go(ref="1", token=5), 0)) == ["go"]
    assert reason(p.handle(events.Go(ref="2", token=5), 0)) == "repeat"
    assert whats(p.handle(events.Go(ref="2", token=6), 0)) == ["go"]


def test_only_so_many_tokens_are_kept() -> None:
    p = player(cue("1"))
    for token in range(1, KEPT + 2):
        assert only(p.handle(events.Go(ref="1", token=token), token * 10_000), "go")
    assert reason(p.handle(events.Go(ref="1", token=2), LATER)) == "repeat"
    assert only(p.handle(events.Go(ref="1", token=1), LATER), "go")


def test_a_running_cue_is_busy() -> None:
    p = player(cue("1", loop()), cue("2"))
    p.handle(events.Go(), 0)
    assert reason(p.handle(events.Go(ref="1"), 1)) == "busy"
    assert reason(p.handle(events.StandBy(ref="1"), 1)) == "busy"
    p.handle(events.Tail(ref="1", fall_s=1.0), 2)
    assert reason(p.handle(events.Go(ref="1"), 3)) == "busy"
    assert reason(p.handle(events.Tail(ref="1"), 3)) == "busy"
    assert reason(p.handle(events.Tail(), 3)) == "busy"
    assert reason(p.handle(events.CarryOn(), 3)) == "busy"


def test_while_held_go_and_a_second_hold_are_busy() -> None:
    p = player(cue("1"))
    p.handle(events.Hold(), 0)
    assert reason(p.handle(events.Go(), 1)) == "busy"
    assert reason(p.handle(events.Hold(), 1)) == "busy"


def test_a_barred_cue_neither_fires_nor_stands_by() -> None:
    p = player(cue("1", loop()), cue("2"), cue("3"))
    p.barred = {"2": "102 dB at seat A1, cap 100 dB"}
    refused = p.handle(events.Go(ref="2"), 0)
    assert reason(refused) == "barred"
    assert "102 dB at seat A1" in refused[0].args["text"]
    assert reason(p.handle(events.StandBy(ref="2"), 0)) == "barred"
    assert p.state("2") == "barred"
    p.handle(events.Go(ref="1"), 0)
    assert p.standby == "3"
    p.barred = {}
    assert p.state("2") == "resting"


def test_a_cue_that_gets_barred_while_it_runs_can_be_tailed_and_ends() -> None:
    p = player(cue("1", loop()))
    p.handle(events.Go(), 0)
    p.barred = {"1": "the air changed"}
    assert p.state("1") == "running"
    assert whats(p.handle(events.Tail(), at(1.0))) == ["tail", "level", "stop"]
    assert only(p.advance(LATER), "done")
    assert p.state("1") == "barred"


def test_a_cue_that_gets_barred_while_it_stands_by_is_refused_and_can_be_left() -> None:
    p = player(cue("1"), cue("2"))
    p.barred = {"1": "the air changed"}
    assert reason(p.handle(events.Go(), 0)) == "barred"
    p.handle(events.Step(), 0)
    p.barred = {}
    assert (p.standby, p.state("1")) == ("2", "resting")


# -- the output ---------------------------------------------------------------------------------


def test_arming_takes_two_acts_within_five_seconds() -> None:
    p = player(cue("1"), armed=False)
    assert reason(p.handle(events.Confirm(), 0)) == "not-armed"
    assert whats(p.handle(events.Ready("key"), 10)) == ["ready"]
    assert reason(p.handle(events.Confirm(), 10 + at(READY_S) + 1)) == "not-armed"
    p.handle(events.Ready(), 20)
    opened = p.handle(events.Confirm("key"), 20 + at(READY_S))
    assert [(r.what, r.who) for r in opened] == [("output", "key"), ("gate", "")]
    assert opened[0].args == {"from": "SHUT", "to": "OPEN", "by": "arm"}
    assert opened[1].args == {"open": 1, "n": at(0.02)}
    assert p.standby == "1"


def test_one_ready_is_good_for_one_confirm() -> None:
    p = player(cue("1"), armed=False)
    p.handle(events.Ready(), 0)
    p.handle(events.Confirm(), 1)
    p.sink("sink-lost", 2)
    p.sink("sink-open", 3)
    assert reason(p.handle(events.Confirm(), 4)) == "not-armed"
    assert p.output == "SHUT"


def test_hush_takes_a_ready_back() -> None:
    p = player(cue("1"), armed=False)
    p.handle(events.Ready(), 0)
    p.handle(events.Hush(), 1)
    assert reason(p.handle(events.Confirm(), 2)) == "not-armed"


@pytest.mark.parametrize(
    ("before", "after"),
    [
        ("COLD", "COLD"),
        ("SHUT", "SHUT"),
        ("OPEN", "HUSHED"),
        ("HUSHED", "HUSHED"),
        ("TRIPPED", "TRIPPED"),
        ("LOST", "LOST"),
    ],
)
def test_hush_closes_the_gate_from_every_state(before: Any, after: str) -> None:
    p = player(cue("1"))
    p.output = before
    gate, *others = p.handle(events.Hush("key"), 7)
    assert gate == Record(7, "gate", args={"open": 0, "n": at(0.02)})
    assert whats(others) == ["output"] * (before != after)
    assert p.output == after


@pytest.mark.parametrize("acts", [[events.Restore()], [events.Ready(), events.Confirm()]])
def test_restore_opens_slowly_what_was_hushed(acts: list[events.Event]) -> None:
    p = player(cue("1"))
    assert reason(p.handle(events.Restore(), 0)) == "not-armed"  # nothing to restore
    p.handle(events.Hush(), 0)
    assert reason(p.handle(events.Go(), 1)) == "not-armed"
    records = [r for act in acts for r in p.handle(act, 2)]
    assert records[-1] == Record(2, "gate", args={"open": 1, "n": at(0.25)})
    assert p.output == "OPEN"


def test_the_sink_comes_and_goes() -> None:
    p = Player(make_show(("a",), [cue("1")]))
    assert p.sink("sink-lost", 0) == []
    assert p.sink("sink-open", 0)[0].args["to"] == "SHUT"
    assert p.sink("sink-lost", 1)[0].args == {"from": "SHUT", "to": "LOST", "by": "sink-lost"}
    p.sink("sink-open", 2)
    assert p.sink("sink-close", 3)[0].args["to"] == "COLD"


def test_acknowledge_is_told() -> None:
    assert player().handle(events.Acknowledge("key"), 3) == [Record(3, "acknowledge", who="key")]
