"""Any edit at any time: it ends where the new sheet leads, and nothing jumps on the way."""

from __future__ import annotations

from itertools import pairwise
from math import acos
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st
from pytest import approx
from support.playing import RATE_HZ, at, cue, loop
from support.rigs import make_show
from support.sheets import ANGLES, POINTS, acts_with

from beamctl.show import events
from beamctl.show.plan import AHEAD, PHASE_RATE
from beamctl.show.player import Player
from beamctl.show.records import SOUNDING, Record
from beamctl.show.show import Show

Acts = list[dict[str, Any]]
REST = at(60.0)  # all is over, but for loops
STEP = at(0.001)
pairs = st.tuples(acts_with(ANGLES), acts_with(ANGLES)) | st.tuples(
    acts_with(POINTS), acts_with(POINTS)
)


def show_of(acts: Acts) -> Show:
    """One cue, which a loop on beam c keeps running."""
    cues = [cue("1", loop("c"), *acts)]
    return make_show(("a", "b", "c"), cues, sounds=("tone", "other"))


def going(show: Show) -> tuple[Player, list[Record]]:
    """Its only cue fired at 0, and the records."""
    p = Player(show)
    p.sink("sink-open", 0)
    p.handle(events.Ready(), 0)
    p.handle(events.Confirm(), 0)
    return p, p.handle(events.Go(), 0)


@given(pairs, st.floats(0.0, 6.0))
@settings(max_examples=120, deadline=None)
def test_an_edited_cue_ends_where_the_new_sheet_leads(both: tuple[Acts, Acts], when: float) -> None:
    old, new = both
    p, told = going(show_of(old))
    told += p.adopt(show_of(new), at(when), ("1",)) + p.advance(REST)
    other, _ = going(show_of(new))
    other.advance(REST)
    for name in {a["beam"] for a in old if a.get("at_s", 0.0) < when} & {a["beam"] for a in new}:
        plan, shall = p.plans[name], other.plans[name].settled()
        is_now = plan.settled() if plan.kept is None else plan.kept.state
        assert (is_now.depth, is_now.law, is_now.trim_db) == (shall.depth, shall.law, shall.trim_db)
        assert is_now.reach == (
            shall.reach if isinstance(shall.reach, str) else approx(shall.reach)
        )
        assert (is_now.target or AHEAD).unit() == approx((shall.target or AHEAD).unit())
        if plan.sound and shall.sound:
            assert plan.state.power_at(REST) == approx(other.plans[name].state.power_at(REST))


@given(pairs, st.floats(0.0, 3.0))
@settings(max_examples=60, deadline=None)
def test_no_sounding_beam_jumps(both: tuple[Acts, Acts], when: float) -> None:
    """Records as the renderer takes them, looked at every millisecond around the edit."""
    old, new = both
    p, told = going(show_of(old))
    told += p.adopt(show_of(new), at(when), ("1",)) + p.advance(REST)
    beams = {name: plan.state for name, plan in going(show_of([]))[0].plans.items()}
    waiting = sorted((r for r in told if r.what in SOUNDING), key=lambda r: r.sample)
    seen: dict[str, list[tuple[float, Any]]] = {name: [] for name in beams}
    for now in range(at(when) - at(0.05), at(when) + at(0.4), STEP):
        while waiting and waiting[0].sample <= now:
            record = waiting.pop(0)
            beams[record.beam].apply(record)
        for name, state in beams.items():
            seen[name].append((state.power_at(now) ** 0.5, state.direction_at(now)[:3]))
    fastest = 2.0 * PHASE_RATE / p.plans["a"].swing[0] / 1000.0  # rad in a step, ends eased
    for points in seen.values():
        for (gain, here), (then, there) in pairwise(points):
            assert abs(then - gain) < 0.5 * 0.08  # of the loudest act, in a 20 ms ramp
            if min(gain, then) > 1e-3:
                angle = acos(min(1.0, sum(a * b for a, b in zip(here, there, strict=True))))
                assert angle < fastest


@given(st.lists(st.tuples(st.integers(1, at(0.7)), pairs), min_size=1, max_size=4))
@settings(max_examples=40, deadline=None)
def test_the_slices_of_advance_do_not_matter_to_edits(
    edits: list[tuple[int, tuple[Acts, Acts]]],
) -> None:
    def told(slice_s: float) -> list[str]:
        p, records = going(show_of(edits[0][1][0]))
        now = 0
        for wait, (_, acts) in edits:
            goal = now + wait
            while now < goal:
                now = min(now + at(slice_s), goal)
                records += p.advance(now)
            records += p.adopt(show_of(acts), now, ("1",))
        return sorted(r.to_json() for r in records + p.advance(now + 20 * RATE_HZ))

    assert told(0.001) == told(0.040)
