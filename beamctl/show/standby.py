"""Which cue stands by next: after a GO, and when the operator moves along the sheet."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from beamctl.show.events import StandBy, Step
from beamctl.show.records import Record
from beamctl.show.sheet import Sheet
from beamctl.show.states import CUE, CueState, Reason

if TYPE_CHECKING:
    from beamctl.show.player import Player

StateOf = Callable[[str], CueState]


def after_go(sheet: Sheet, ref: str, state: StateOf) -> str:
    """The next cue of the sheet that can stand by and will not come by itself; "" at the end.

    Cues that follow on from `ref` are passed over, or the next press would fire them twice.
    """
    following = set()
    cues = {cue.ref: cue for cue in sheet.cue}
    then = cues[ref].then
    while then is not None and then not in following:
        following.add(then)
        then = cues[then].then
    later = [cue.ref for cue in sheet.cue[sheet.position(ref) + 1 :]]
    able = (r for r in later if r not in following and (state(r), "stand-by") in CUE)
    return next(able, "")


def stepped(sheet: Sheet, ref: str, by: int, state: StateOf) -> str:
    """The cue `by` steps along from `ref`, over those that cannot stand by; "" when there is none.

    From no cue at all, the first step goes to the sheet's first (or last) cue.
    """
    refs = [cue.ref for cue in sheet.cue]
    if not ref:
        ahead = refs if by > 0 else refs[::-1]
    else:
        at = refs.index(ref)
        ahead = refs[at + 1 :] if by > 0 else refs[:at][::-1]
    able = [r for r in ahead if (state(r), "stand-by") in CUE]
    return able[min(abs(by), len(able)) - 1] if able else ""


def stand_by(player: Player, event: StandBy, sample: int) -> list[Record]:
    """Put a cue on stand-by, or take stand-by off."""
    if event.ref and event.ref not in player.cues:
        return player.refuse(event, sample, "unknown-ref", f"no cue {event.ref} in the sheet")
    if event.ref and (player.state(event.ref), "stand-by") not in CUE:
        if event.ref == player.standby:
            return []
        reason: Reason = "barred" if event.ref in player.barred else "busy"
        what = f"cue {event.ref} is {player.state(event.ref)}"
        return player.refuse(event, sample, reason, what)
    player.stand(event.ref)
    return [Record(sample, "standby", cue=event.ref, who=event.who)]


def step(player: Player, event: Step, sample: int) -> list[Record]:
    """Move stand-by along the sheet."""
    goal = stepped(player.show.sheet, player.standby, event.by, player.state)
    return stand_by(player, StandBy(event.who, goal), sample) if goal else []
