"""The modes: WRITE and WALK change freely, SHOW locks, and is left by a typed word and a name."""

from __future__ import annotations

from typing import TYPE_CHECKING

from beamctl.show.events import Mode
from beamctl.show.records import Record
from beamctl.show.states import MODE

if TYPE_CHECKING:
    from beamctl.show.player import Player


def change(player: Player, event: Mode, sample: int) -> list[Record]:
    """Change the mode, which touches no sound; the mode that holds already says nothing."""
    if event.to == player.mode:
        return []
    goal = next((to for before, to in MODE if before == player.mode and to == event.to), None)
    if goal is None:
        return player.refuse(event, sample, "bad-type", "the mode is WRITE, WALK or SHOW")
    word, name = MODE[player.mode, goal], event.name.strip()
    if word and event.word.strip().casefold() != word:
        return player.refuse(event, sample, "locked", f"type the word {word}")
    if player.locked and not name:
        return player.refuse(event, sample, "bad-type", "a name is needed")
    if goal == "SHOW" and player.trying:
        beams = ", ".join(player.trying)
        return player.refuse(event, sample, "busy", f"Sound it now still sounds {beams}: end it")
    args = {"from": player.mode, "to": goal, "name": name}
    player.mode = goal
    return [Record(sample, "mode", who=event.who, args=args)]
