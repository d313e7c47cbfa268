"""Sound it now: what one act leads to, outside any cue, no louder than it was looked at."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import replace
from typing import TYPE_CHECKING

from beamctl.show.events import SoundNow, SoundOff
from beamctl.show.locks import Refusal
from beamctl.show.plan import TRY, TRY_S
from beamctl.show.records import Record
from beamctl.show.settle import led_to
from beamctl.show.states import OUTPUT, refusal

if TYPE_CHECKING:
    from beamctl.show.player import Player

LOWEST_TRIM_DB = -90.0


def sound_now(player: Player, event: SoundNow, sample: int) -> list[Record]:
    """Sound what an act leads to on its beam; a try or a cue's sound that was there gives way."""
    if refused := _refusal(player, event):
        return player.refuse(event, sample, *refused)
    act = player.cues[event.ref].act[event.act]
    state, loop = led_to(player.show, event.ref, act, player.target)
    if refused := _refused_as(state.sound, state.trim_db, event):
        return player.refuse(event, sample, *refused)
    plan = player.plans[act.beam]
    owner, seconds = plan.owner, player.show.sounds[state.sound].seconds
    records = plan.attempt(replace(state, trim_db=event.trim_db), loop, sample, seconds)
    player.lengthen(owner, records)
    player.tried_at = sample
    args = {"of": event.ref, "act": event.act, "trim_db": event.trim_db}
    return [Record(sample, "try", act.beam, TRY, event.who, args), *records]


def sound_off(player: Player, event: SoundOff, sample: int) -> list[Record]:
    """End the try on one beam, or all of them; where none sounds there is nothing to say."""
    if event.beam and event.beam not in player.plans:
        return player.refuse(event, sample, "unknown-ref", f"no beam {event.beam} in the sheet")
    beams = [name for name in player.trying if event.beam in ("", name)]
    return end_tries(player, beams, sample, TRY_S, event.who)


def end_tries(
    player: Player, beams: Collection[str], sample: int, fall_s: float, who: str
) -> list[Record]:
    """Records that let the tries on these beams fall."""
    records = []
    for name in beams:
        records.append(Record(sample, "try-end", name, TRY, who))
        records += player.plans[name].fall(sample, fall_s, TRY)
    return records


def _refusal(player: Player, event: SoundNow) -> Refusal | None:
    """Why nothing may be tried now, or not this act."""
    if player.locked:
        return "locked", "SHOW is locked: no try"
    if (player.output, "go") not in OUTPUT:
        return refusal(player.output), f"{player.output}: * then Enter opens the output"
    if event.ref not in player.cues:
        return "unknown-ref", f"no cue {event.ref} in the sheet"
    if not 0 <= event.act < len(player.cues[event.ref].act):
        return "unknown-ref", f"cue {event.ref} has no act {event.act + 1}"
    if event.ref in player.barred:
        return "barred", f"cue {event.ref}: {player.barred[event.ref]}"
    if player.held_at is not None:
        return "busy", "the show is held; carry on first"
    return None


def _refused_as(sound: str, highest_db: float, event: SoundNow) -> Refusal | None:
    """Why the state that the act leads to cannot be sounded as asked."""
    what = f"cue {event.ref} act {event.act + 1}"
    if not sound:
        return "bad-type", f"{what} leads to silence: nothing to sound"
    if event.trim_db > highest_db:
        return "barred", f"{what} was looked at up to {highest_db:g} dB, not at {event.trim_db:g}"
    if not event.trim_db >= LOWEST_TRIM_DB:
        return "bad-type", f"trim {event.trim_db:g} dB, expected {LOWEST_TRIM_DB:g} or more"
    return None
