"""An edited sheet taken up while it plays: what is under way and what sounds follow it.

A beam follows the cue that last touched it. What its acts have led to so far, by the old sheet and
by the new one, is compared field by field, and only what differs glides. An edit starts no sound;
one falls when the new acts no longer lead to any.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from beamctl.show.order import natural_key
from beamctl.show.plan import BeamPlan, Changes, Kept
from beamctl.show.records import Record
from beamctl.show.run import Run
from beamctl.show.settled import FIELDS, FRESH, Settled, after_act, names
from beamctl.show.sheet import Act, Cue
from beamctl.show.show import Show
from beamctl.show.states import CUE
from beamctl.show.underway import fade

if TYPE_CHECKING:
    from beamctl.show.player import Player

FOLLOW_S = 0.2  # a change takes at least this long
GONE_S = 0.5  # fall of a sound whose act or cue is gone


def adopt(
    player: Player, show: Show, sample: int, edited: Collection[str], renamed: Mapping[str, str]
) -> list[Record]:
    """Go on by the sheet of `show`; see `Player.adopt`."""
    old = player.show
    if (show.rig, show.house, show.sheet.beam) != (old.rig, old.house, old.sheet.beam):
        raise ValueError("another rig, house or set of beams needs another player")
    changed = {*edited, *renamed.values()}
    taken = {*player.cues, *player.runs}.difference(renamed)
    if not taken.isdisjoint(renamed.values()):
        renamed = {}  # that number was another cue's, so these are other cues now
    _rename(player, renamed)
    before = {renamed.get(ref, ref): cue for ref, cue in player.cues.items()}
    player.show, player.cues = show, {cue.ref: cue for cue in show.sheet.cue}
    changed |= player.cues.keys() ^ before.keys()
    player.aim_at(cue for ref, cue in player.cues.items() if ref in changed)
    adoption = _Adoption(player, sample, before, changed)
    records = adoption.stand()
    for plan in player.plans.values():
        records += adoption.follow(plan)
    for run in player.runs.values():
        records += adoption.run_on(run)
    return records


def _rename(player: Player, renamed: Mapping[str, str]) -> None:
    """Let all that the player knows by number follow a cue to its new one."""

    def now(ref: str) -> str:
        return renamed.get(ref, ref)

    player.standby, player.newest = now(player.standby), now(player.newest)
    player.states = {now(ref): state for ref, state in player.states.items()}
    player.barred = {now(ref): why for ref, why in player.barred.items()}
    for ref in {*renamed.values()}.difference(renamed):
        player.past.pop(ref, None)  # of a cue that is long gone
    for run in (*player.runs.values(), *player.past.values()):
        run.ref = now(run.ref)
        run.follow = run.follow and (run.follow[0], now(run.follow[1]))
    player.runs = {run.ref: run for run in player.runs.values()}
    player.past = {run.ref: run for run in player.past.values()}
    for plan in player.plans.values():
        plan.cue, plan.owner = now(plan.cue), now(plan.owner)
        plan.kept = plan.kept and Kept(now(plan.kept.cue), plan.kept.state)


@dataclass(frozen=True, slots=True)
class _Adoption:
    """One edit being taken up: `before` has the old cues by the numbers they have now."""

    player: Player
    sample: int
    before: Mapping[str, Cue]
    changed: Collection[str]

    def stand(self) -> list[Record]:
        """Let another cue stand by for one that is gone, and forget the states of those."""
        player = self.player
        records = []
        if player.standby and player.standby not in player.cues:
            key = natural_key(player.standby)
            able = (r for r in player.cues if (player.state(r), "stand-by") in CUE)
            player.stand(
                min((r for r in able if natural_key(r) > key), key=natural_key, default="")
            )
            records.append(Record(self.sample, "standby", cue=player.standby))
        for ref in self.before.keys() - player.cues.keys() - player.runs.keys():
            player.states.pop(ref, None)
        return records

    def follow(self, plan: BeamPlan) -> list[Record]:
        """Records that take one beam where the edited cues have it by now."""
        ref, owner = plan.touched_by(), plan.owner
        falls = owner in self.changed and not self._led(plan, FRESH, self.player.cues, owner).sound
        if falls:  # what else the edit changed waits until it sounds again
            plan.keep()
        records = plan.follow(self._changes(plan, ref), self.sample)
        self.player.lengthen(ref, records)
        if falls:
            records += plan.fall(self.sample, GONE_S, owner)
            self.player.lengthen(owner, records)
        return records

    def _changes(self, plan: BeamPlan, ref: str) -> Changes:
        """What the edit of cue `ref` makes of a beam by now, as `BeamPlan.follow` takes it."""
        was = self._led(plan, plan.before, self.before, ref)
        shall = self._led(plan, plan.before, self.player.cues, ref)
        differ = {key for key in FIELDS if getattr(shall, key) != getattr(was, key)}
        if "target" in differ and shall.reach == "aim":
            differ.add("reach")  # a target without a distance would end it
        return {key: (getattr(shall, key), self._takes_s(plan, ref, key)) for key in differ}

    def run_on(self, run: Run) -> list[Record]:
        """Let a run go on by what its cue says now; one whose cue is gone fades."""
        player, records = self.player, []
        if run.ref not in player.cues:
            if player.state(run.ref) == "running":
                records = fade(player, run.ref, self.sample, GONE_S)
        elif run.ref in self.changed and run.ref in self.before:
            old, new = self.before[run.ref], player.cues[run.ref]
            run.take_up(old, new, player.clock(self.sample), player.rate_hz)
        return records

    def _led(self, plan: BeamPlan, state: Settled, cues: Mapping[str, Cue], ref: str) -> Settled:
        """What the acts of cue `ref` that have had their time make of a beam's state."""
        for act in self._passed(plan, cues, ref):
            state = after_act(state, act, self.player.target(act))
        return state

    def _passed(self, plan: BeamPlan, cues: Mapping[str, Cue], ref: str) -> list[Act]:
        run = self._run(ref)
        if run is None or ref not in cues:
            return []
        now, rate_hz = self.player.clock(self.sample), self.player.rate_hz
        acts = (act for act in cues[ref].in_time() if act.beam == plan.name)
        return [act for act in acts if run.passed(act, now, rate_hz)]

    def _takes_s(self, plan: BeamPlan, ref: str, key: str) -> float:
        """Seconds for a field to change: what is left of the glide that the new sheet gives it."""
        run = self._run(ref)
        acts = [act for act in self._passed(plan, self.player.cues, ref) if names(act, key)]
        if run is None or not acts:
            return FOLLOW_S
        now_s = (self.player.clock(self.sample) - run.started) / self.player.rate_hz
        return max(FOLLOW_S, acts[-1].at_s + acts[-1].over_s - now_s)

    def _run(self, ref: str) -> Run | None:
        return self.player.runs.get(ref) or self.player.past.get(ref)
