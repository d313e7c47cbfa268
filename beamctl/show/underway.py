"""What is under way: held, carried on with, tailed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from beamctl.show.events import Acknowledge, CarryOn, Hold, Tail
from beamctl.show.records import Record
from beamctl.show.states import CUE
from beamctl.show.trying import end_tries

if TYPE_CHECKING:
    from beamctl.show.player import Player


def hold(player: Player, event: Hold, sample: int) -> list[Record]:
    """Freeze every glide and every clock."""
    if player.held_at is not None:
        return player.refuse(event, sample, "busy", "the show is held already")
    player.held_at = sample
    for run in player.runs.values():
        run.frozen = max(0, run.settles_at - sample)
    records = [Record(sample, "hold", who=event.who)]
    for plan in player.plans.values():
        if plan.sounding(sample):
            records += plan.freeze(sample)
    return records


def carry_on(player: Player, event: CarryOn, sample: int) -> list[Record]:
    """Carry on with what hold froze; what was to come comes as much later."""
    if player.held_at is None:
        return player.refuse(event, sample, "busy", "the show is not held")
    wait, player.held_at = sample - player.held_at, None
    for run in player.runs.values():
        run.shift(wait)
        if run.frozen:
            run.lasts(sample + run.frozen)
            run.frozen = 0
    told = [Record(sample, "carry-on", who=event.who)]
    return told + [r for p in player.plans.values() for r in p.thaw(sample)]


def tail(player: Player, event: Tail, sample: int) -> list[Record]:
    """End what a running cue sounds; the newest of all, a try as well, when none is named."""
    running = [run for run in player.runs.values() if player.state(run.ref) == "running"]
    newest = running[-1].started if running else -1
    if not event.ref and player.trying and player.tried_at >= newest:
        return end_tries(player, player.trying, sample, event.fall_s, event.who)
    ref = event.ref or (running[-1].ref if running else "")
    if ref not in player.cues:
        what = f"no cue {ref} in the sheet" if ref else "no cue is running"
        return player.refuse(event, sample, "unknown-ref" if ref else "busy", what)
    if (player.state(ref), "tail") not in CUE:
        return player.refuse(event, sample, "busy", f"cue {ref} is {player.state(ref)}")
    told = Record(sample, "tail", cue=ref, who=event.who)
    return [told, *fade(player, ref, sample, event.fall_s)]


def fade(player: Player, ref: str, sample: int, fall_s: float) -> list[Record]:
    """Let all that running cue `ref` sounds fall, and nothing more come of it."""
    player.turn(ref, "tail")
    player.runs[ref].cut(player.clock(sample), sample + round(fall_s * player.rate_hz))
    plans = [plan for plan in player.plans.values() if plan.owner == ref]
    return [record for plan in plans for record in plan.fall(sample, fall_s, ref)]


def acknowledge(player: Player, event: Acknowledge, sample: int) -> list[Record]:
    """Say that somebody has read the oldest notice."""
    return [Record(sample, "acknowledge", who=event.who)]
