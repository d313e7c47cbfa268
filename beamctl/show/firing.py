"""GO, and all that a fired cue does by itself from then on."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import TYPE_CHECKING

from beamctl.show.events import Go
from beamctl.show.plan import BeamPlan
from beamctl.show.records import Record
from beamctl.show.run import Run
from beamctl.show.standby import after_go
from beamctl.show.states import CUE, OUTPUT, refusal

if TYPE_CHECKING:
    from beamctl.show.player import Player

Deed = Callable[[int], list[Record]]


def go(player: Player, event: Go, sample: int) -> list[Record]:
    """Fire a cue, unless something speaks against it."""
    ref = event.ref or player.standby
    if player.once.used(event.token):
        return player.refuse(event, sample, "repeat", f"token {event.token} was used")
    if (player.output, "go") not in OUTPUT:
        why = f"{player.output}: * then Enter opens the output"
        return player.refuse(event, sample, refusal(player.output), why)
    if not ref:
        return player.refuse(event, sample, "not-standing-by", "no cue stands by")
    if ref not in player.cues:
        return player.refuse(event, sample, "unknown-ref", f"no cue {ref} in the sheet")
    if ref in player.barred:
        return player.refuse(event, sample, "barred", f"cue {ref}: {player.barred[ref]}")
    if player.held_at is not None:
        return player.refuse(event, sample, "busy", "the show is held; carry on first")
    if (player.state(ref), "go") not in CUE:
        return player.refuse(event, sample, "busy", f"cue {ref} is {player.state(ref)}")
    player.once.take(event.token)
    records = _fire(player, ref, sample, event.who)
    if ref == player.standby or not player.standby:
        player.stand(after_go(player.show.sheet, ref, player.state))
    return records


def _fire(player: Player, ref: str, sample: int, who: str) -> list[Record]:
    """Start cue `ref`: its GO record and the acts that are due at once."""
    for run in player.runs.values():
        if run.follow is not None and run.follow[1] == ref:
            run.drop_follow(sample)
    player.turn(ref, "go")
    run = player.runs[ref] = Run.of(player.cues[ref], sample, player.rate_hz)
    player.newest, player.newest_at = ref, sample
    records = [Record(sample, "go", cue=ref, who=who)]
    while run.due() == sample:
        records += _act(player, run, sample)
    return records


def next_due(player: Player) -> tuple[int, Deed] | None:
    """Sample and deed of what happens next by itself; while held, sounds still end."""
    due: list[tuple[int, Deed]] = []
    for run in player.runs.values() if player.held_at is None else ():
        if (at := run.due()) is not None:
            due.append((at, partial(_act, player, run)))
        if run.follow is not None:
            due.append((run.follow[0], partial(_follow_on, player, run)))
    for plan in player.plans.values():
        if plan.ends_at is not None:
            due.append((plan.ends_at, partial(_end, player, plan)))
    return min(due, key=lambda item: item[0], default=None)


def settle(player: Player, sample: int) -> list[Record]:
    """Finish the cues that have nothing left to do by `sample`."""
    records = []
    for run in list(player.runs.values()):
        sounds = any(plan.owner == run.ref for plan in player.plans.values())
        if run.acts or run.follow or run.frozen or sounds or run.settles_at >= sample:
            continue
        player.past[run.ref] = player.runs.pop(run.ref)
        player.turn(run.ref, "settled")
        if run.ref not in player.cues:
            del player.states[run.ref]
        records.append(Record(run.settles_at, "done", cue=run.ref))
    return records


def _act(player: Player, run: Run, sample: int) -> list[Record]:
    act = run.give(sample)
    plan = player.plans[act.beam]
    seconds = player.show.sounds[act.sound].seconds if act.sound is not None else 0.0
    owner = plan.owner
    records = plan.perform(act, sample, run.ref, player.target(act), seconds)
    player.lengthen(run.ref, records)
    if plan.owner != owner:
        player.lengthen(owner, records)
    return records


def _follow_on(player: Player, run: Run, sample: int) -> list[Record]:
    ref = run.follow[1] if run.follow else ""
    run.follow = None
    run.lasts(sample)
    return go(player, Go(f"follow-on of {run.ref}", ref), sample)


def _end(player: Player, plan: BeamPlan, sample: int) -> list[Record]:
    owner = plan.owner
    records = plan.end(sample)
    player.lengthen(owner, records)
    return records
