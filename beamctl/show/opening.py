"""The way out: armed or restored by two acts, hushed by one; what a trip and no seats ask for."""

from __future__ import annotations

from typing import TYPE_CHECKING

from beamctl.show.beamstate import MIN_GLIDE_S
from beamctl.show.events import Clear, Confirm, Event, Hush, Ready, Restore, Vouch
from beamctl.show.records import Record
from beamctl.show.states import OUTPUT, refusal

if TYPE_CHECKING:
    from beamctl.show.player import Player

READY_S = 5.0
RESTORE_RISE_S = 0.25


def ready(player: Player, event: Ready, sample: int) -> list[Record]:
    """First of the two acts."""
    if player.output not in ("SHUT", "HUSHED"):
        why = f"nothing to arm or restore while {player.output}"
        return player.refuse(event, sample, refusal(player.output), why)
    if refused := player.locks.refusal(opening=False):
        return player.refuse(event, sample, *refused)
    player.ready_until = sample + round(READY_S * player.rate_hz)
    return [Record(sample, "ready", who=event.who)]


def confirm(player: Player, event: Confirm, sample: int) -> list[Record]:
    """Second of the two acts, in time after the first."""
    if sample > player.ready_until:
        return player.refuse(event, sample, "not-armed", "press * first, then Enter within 5 s")
    player.ready_until = -1
    return _open(player, "arm" if player.output == "SHUT" else "restore", event, sample)


def restore(player: Player, event: Restore, sample: int) -> list[Record]:
    """Return from HUSHED in one act."""
    return _open(player, "restore", event, sample)


def _open(player: Player, act: str, event: Event, sample: int) -> list[Record]:
    goal = OUTPUT.get((player.output, act))
    if goal is None:
        why = f"cannot {act} while {player.output}"
        return player.refuse(event, sample, refusal(player.output), why)
    if refused := player.locks.refusal():
        return player.refuse(event, sample, *refused)
    rise = round((RESTORE_RISE_S if act == "restore" else MIN_GLIDE_S) * player.rate_hz)
    gate = Record(sample, "gate", args={"open": 1, "n": rise})
    if act == "arm" and not player.standby and player.show.sheet.cue:
        player.stand(player.show.sheet.cue[0].ref)
    records = [*player.to(goal, sample, act, event.who), gate]
    for plan in player.plans.values():
        records += plan.bring_back(sample, RESTORE_RISE_S)
    return records


def hush(player: Player, event: Hush, sample: int) -> list[Record]:
    """Silence now, whatever the output's state."""
    goal = OUTPUT[player.output, "hush"]
    return [shut(player, sample), *player.to(goal, sample, "hush", event.who)]


def shut(player: Player, sample: int) -> Record:
    """The record that shuts the gate; what was to come by itself does not."""
    player.ready_until = -1
    for run in player.runs.values():
        run.drop_follow(sample)
    return Record(sample, "gate", args={"open": 0, "n": round(MIN_GLIDE_S * player.rate_hz)})


def clear(player: Player, event: Clear, sample: int) -> list[Record]:
    """Take a trip away, by its word."""
    if (goal := OUTPUT.get((player.output, "clear"))) is None:
        return player.refuse(event, sample, "busy", f"nothing to clear while {player.output}")
    if refused := player.locks.clear(event.word):
        return player.refuse(event, sample, *refused)
    told = Record(sample, "clear", who=event.who)
    return [told, *player.to(goal, sample, "clear", event.who)]


def vouch(player: Player, event: Vouch, sample: int) -> list[Record]:
    """Let somebody answer by name for a house without seats."""
    if refused := player.locks.vouch(event.name):
        return player.refuse(event, sample, *refused)
    player.ready_until = -1
    return [Record(sample, "vouch", who=event.who, args={"name": player.locks.vouched})]
