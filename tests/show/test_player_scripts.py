"""Any script of events: slices do not matter, nothing is left sounding, records survive JSON."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from support.playing import at, cue, loop, one_shot, player

from beamctl.show import events
from beamctl.show.records import SOUNDING, Record

# -- any script ----------------------------------------------------------------------------------

SCRIPT_CUES = [
    cue("1", loop(azimuth_deg=-30.0), {"beam": "a", "at_s": 0.2, "azimuth_deg": 30.0}),
    cue("2", one_shot("b", over_s=0.3), then="3", then_at_s=0.111),
    cue("3", {"beam": "a", "trim_db": -30.0, "over_s": 0.25}, then="4", then_at_s=0.4),
    cue("4", {"beam": "b", "at_s": 0.0333, "fall_s": 0.1}, one_shot("a", at_s=0.05)),
    cue(
        "5", loop("b", at_s=0.01, law="ssb"), {"beam": "a", "fall_s": 0.3}, then="1", then_at_s=0.9
    ),
]
asked = st.one_of(
    st.builds(events.Go, st.just("x"), st.sampled_from(("", "1", "2", "3", "4", "5"))),
    st.builds(events.Tail, st.just("x"), st.sampled_from(("", "1", "2")), st.floats(0.0, 0.5)),
    st.builds(events.Step, st.just("x"), st.sampled_from((-1, 1))),
    st.sampled_from(
        (events.Hold(), events.CarryOn(), events.Hush(), events.Restore(), events.Ready())
    ),
)
scripts = st.lists(st.tuples(st.integers(1, at(0.4)), asked), min_size=1, max_size=10)


def run(script: list[tuple[int, events.Event]], slice_s: float) -> Iterator[Record]:
    """Every record of a script and three seconds more, advanced in slices of `slice_s`."""
    p = player(*SCRIPT_CUES)
    now = 0
    for wait, event in [*script, (at(3.0), None)]:
        goal = now + wait
        while now < goal:
            now = min(now + at(slice_s), goal)
            yield from p.advance(now)
        if event is not None:
            yield from p.handle(event, now)


def sounding(records: list[Record]) -> list[tuple[int, str]]:
    return sorted((r.sample, r.to_json()) for r in records if r.what in SOUNDING)


@given(scripts)
@settings(max_examples=60, deadline=None)
def test_the_slices_of_advance_do_not_matter(script: list[tuple[int, events.Event]]) -> None:
    fine, coarse = list(run(script, 0.001)), list(run(script, 0.040))
    assert sounding(fine) == sounding(coarse)
    assert sorted(r.to_json() for r in fine) == sorted(r.to_json() for r in coarse)


@given(scripts)
@settings(max_examples=60, deadline=None)
def test_records_survive_json_and_no_beam_is_left_with_a_carrier_and_no_sound(
    script: list[tuple[int, events.Event]],
) -> None:
    p = player(*SCRIPT_CUES)
    now, records = 0, []
    for wait, event in script:
        now += wait
        records += p.handle(event, now)
        assert all(r.sample >= 0 for r in records)
    if p.held_at is not None:
        records += p.handle(events.CarryOn(), now)
    records += p.advance(now + at(30.0))
    for record in records:
        assert Record.from_json(record.to_json()) == record
    for plan in p.plans.values():
        assert plan.state.silent(now + at(30.0)) == (plan.sound == "")
        heard = [v for v in plan.state.voices if v.weight[3] != 0.0]
        assert len(heard) == (plan.sound != "")


@given(scripts)
@settings(max_examples=60, deadline=None)
def test_a_beam_that_takes_the_records_in_sample_order_ends_as_the_player_has_it(
    script: list[tuple[int, events.Event]],
) -> None:
    records = list(run(script, 0.040))
    p = player(*SCRIPT_CUES)
    now = 0
    for wait, event in script:
        now += wait
        p.handle(event, now)
    end = now + at(3.0)
    p.advance(end)
    fresh = player(*SCRIPT_CUES).plans
    for record in sorted(records, key=lambda r: r.sample):  # stable: as the renderer takes them
        if record.what in SOUNDING and record.beam:
            fresh[record.beam].state.apply(record)
    for name, plan in p.plans.items():
        ours, theirs = plan.state, fresh[name].state
        assert theirs.power_at(end) == pytest.approx(ours.power_at(end), abs=1e-9)
        assert theirs.direction_at(end) == pytest.approx(ours.direction_at(end), abs=1e-9)
        assert theirs.depth_at(end) == pytest.approx(ours.depth_at(end), abs=1e-9)
        assert theirs.law_name() == ours.law_name()
