"""The player: events and time in, records out. It reads no clock: `sample` is always an argument.

`handle` answers an event at once; `advance` does what is due by itself up to a sample: acts placed
after their GO, follow-ons, the ends of one-shot sounds. Both return records in sample order per
beam; a refusal is a record too, with its reason. What each event does is told in the file that
`HANDLERS` names.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Any

import numpy as np

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.show import adopting, events, firing, modes, opening, readings, trying, underway
from beamctl.show.beamstate import BeamState
from beamctl.show.locks import Locks
from beamctl.show.once import Once
from beamctl.show.plan import BeamPlan, swing_of
from beamctl.show.records import Record
from beamctl.show.run import Run
from beamctl.show.sheet import Act, Cue
from beamctl.show.show import Show
from beamctl.show.standby import stand_by, step
from beamctl.show.states import CUE, OUTPUT, CueState, Mode, Output, Reason
from beamctl.show.targets import Target, target_of


@dataclass
class Player:
    """State of a show being played; it changes through the methods below, up to `trying`."""

    show: Show
    output: Output = "COLD"
    mode: Mode = "WRITE"
    standby: str = ""
    newest: str = ""
    newest_at: int | None = None
    tried_at: int = -1  # sample of the newest try
    did_at: int = 0  # sample of the newest thing that happened by itself
    held_at: int | None = None
    ready_until: int = -1
    states: dict[str, CueState] = field(default_factory=dict)  # resting cues are not in it
    runs: dict[str, Run] = field(default_factory=dict)
    past: dict[str, Run] = field(default_factory=dict)  # the newest run of each cue that is done
    plans: dict[str, BeamPlan] = field(default_factory=dict)
    barred: Mapping[str, str] = field(default_factory=dict)  # cue → why
    once: Once = field(default_factory=Once)

    def __post_init__(self) -> None:
        self.rate_hz = self.show.rig.rate_hz
        self.locks = Locks(bool(self.show.house.block))
        speed = sound_speed_m_s(Air(**self.show.house.air.model_dump()))
        for name, beam in self.show.sheet.beam.items():
            wavenumber = 2.0 * np.pi * self.show.rig.panel[beam.panel].carrier_hz / speed
            swing = swing_of(self.show.cells[beam.panel], wavenumber)
            self.plans[name] = BeamPlan(name, self.rate_hz, swing, BeamState(self.rate_hz))
        self.cues = {cue.ref: cue for cue in self.show.sheet.cue}
        self._targets: dict[Act, Target] = {}
        self.aim_at(self.show.sheet.cue)

    def handle(self, event: events.Event, sample: int) -> list[Record]:
        """Records that answer `event` at `sample`, after those of all that was due before it.

        What `advance` did ahead of `sample` is on its way already, so an event that moves beams
        waits for it: else a fall would be undone by the record of a later sample.
        """
        records = self.advance(sample)
        if isinstance(event, MOVES_BEAMS):
            sample = max(sample, self.did_at)
        return records + HANDLERS[type(event)](self, event, sample)

    def advance(self, until: int) -> list[Record]:
        """Records of all that is due by itself before sample `until`, in order."""
        records: list[Record] = []
        while (due := firing.next_due(self)) is not None and due[0] < until:
            self.did_at, deed = due
            records += firing.settle(self, self.did_at)
            records += deed(self.did_at)
        return records + firing.settle(self, until)

    def adopt(
        self,
        show: Show,
        sample: int,
        edited: Collection[str] = (),
        renamed: Mapping[str, str] = MappingProxyType({}),
    ) -> list[Record]:
        """Go on by an edited sheet: records of what changes at `sample`.

        edited   references of the cues that were changed or added, as the new sheet has them;
                 those that are gone are found without
        renamed  old reference → new one, of cues that only bear another number

        What sounds follows the edit without a click, over 0.2 s or what is left of the glide that
        was changed; acts whose time has passed are not made up for. A deleted cue is tailed.
        ValueError when rig, house or beams differ: then another player is needed. That the sounds
        are ready to be played is the caller's to know.
        """
        records = self.advance(sample)
        sample = max(sample, self.did_at)
        return records + adopting.adopt(self, show, sample, edited, renamed)

    def sink(self, event: str, sample: int) -> list[Record]:
        """What the sink or its engine did: "sink-open", "sink-lost", "host-over", "sink-close".

        A new engine is told silently what the beams had. What looped when the last one went comes
        back when somebody arms; all else that ran then is over.
        """
        if (goal := OUTPUT.get((self.output, event))) is None:
            return []
        records = self.to(goal, sample, event)
        if event == "sink-lost":
            self._cut(sample)
        if event == "sink-open":
            for plan in self.plans.values():
                records += plan.set_up(sample)
        return records

    def trip(self, reason: str, sample: int, event: str = "trip") -> list[Record]:
        """The guard ended what sounds, or its lease ran out ("lease-over")."""
        if (goal := OUTPUT.get((self.output, event))) is None:
            return []
        self.locks.tripped = self.locks.tripped or reason
        told = Record(sample, "trip", who="guard", args={"reason": reason})
        return [told, opening.shut(self, sample), *self.to(goal, sample, event, "guard")]

    def moved(self, records: Iterable[Record], by: int) -> None:
        """The engine took these records `by` samples late: what hangs on them moves along."""
        for ref in {record.cue for record in records if record.cue}:
            if (run := self.runs.get(ref)) is not None:
                run.settles_at += by
                run.shift(by)
                if ref == self.newest and self.newest_at is not None:
                    self.newest_at += by
            for plan in self.plans.values():
                if plan.owner == ref and plan.ends_at is not None:
                    plan.ends_at += by

    def state(self, ref: str) -> CueState:
        """State of a cue of the sheet; one that sounds already can still be tailed when barred."""
        state = self.states.get(ref, "resting")
        return "barred" if ref in self.barred and state not in ("running", "tailing") else state

    @property
    def locked(self) -> bool:
        """True in SHOW: no edit and no try."""
        return self.mode == "SHOW"

    @property
    def trying(self) -> tuple[str, ...]:
        """Names of the beams that `SoundNow` sounds."""
        return tuple(plan.name for plan in self.plans.values() if plan.trying)

    # -- for the files that say what an event does -------------------------------------------

    def turn(self, ref: str, event: str) -> None:
        """Take cue `ref` to its next state by the table."""
        state = CUE[self.states.pop(ref, "resting"), event]
        if state != "resting":
            self.states[ref] = state

    def stand(self, ref: str) -> None:
        """Let cue `ref` stand by, "" for none."""
        if self.states.get(self.standby) == "standing by":
            self.turn(self.standby, "stand-down")
        self.standby = ref
        if ref and (self.state(ref), "stand-by") in CUE:
            self.turn(ref, "stand-by")

    def to(self, goal: Output, sample: int, why: str, who: str = "") -> list[Record]:
        """Take the output to `goal`, and say so when that is a change."""
        before, self.output = self.output, goal
        if before == goal:
            return []
        args = {"from": before, "to": goal, "by": why}
        return [Record(sample, "output", who=who, args=args)]

    def refuse(self, event: events.Event, sample: int, reason: Reason, text: str) -> list[Record]:
        """The record that answers an event with no."""
        args: dict[str, Any] = {"asked": type(event).__name__.lower(), "reason": reason}
        return [Record(sample, "refused", who=event.who, args=args | {"text": text})]

    def lengthen(self, ref: str, records: Iterable[Record]) -> None:
        """Cue `ref` is not done before these records have run their course."""
        if ref in self.runs:
            for record in records:
                self.runs[ref].lasts(record.sample + int(record.args.get("n", 0)))

    def aim_at(self, cues: Iterable[Cue]) -> None:
        """Find the targets of these cues' acts, so that no GO waits for it."""
        for cue in cues:
            for act in cue.act:
                self.target(act)

    def clock(self, sample: int) -> int:
        """Where the clocks of what is under way stand at `sample`."""
        return sample if self.held_at is None else self.held_at

    def target(self, act: Act) -> Target | None:
        """Where an act of the sheet aims its beam; None when it does not aim."""
        if not act.aims:
            return None
        if act not in self._targets:
            panel = self.show.rig.panel[self.show.panel_of(act.beam)]
            self._targets[act] = target_of(act, self.show.house, panel)
        return self._targets[act]

    def _cut(self, sample: int) -> None:
        for run in self.runs.values():
            run.cut(self.clock(sample), sample)
        self.ready_until, self.held_at = -1, None
        for plan in self.plans.values():
            plan.lose(sample)


MOVES_BEAMS = (
    events.Go | events.Hold | events.CarryOn | events.Tail | events.SoundNow | events.SoundOff
)
HANDLERS: dict[type[events.Event], Callable[[Player, Any, int], list[Record]]] = {
    events.Go: firing.go,
    events.StandBy: stand_by,
    events.Step: step,
    events.Ready: opening.ready,
    events.Confirm: opening.confirm,
    events.Restore: opening.restore,
    events.Hush: opening.hush,
    events.Hold: underway.hold,
    events.CarryOn: underway.carry_on,
    events.Tail: underway.tail,
    events.Acknowledge: underway.acknowledge,
    events.Clear: opening.clear,
    events.Vouch: opening.vouch,
    events.Mode: modes.change,
    events.SoundNow: trying.sound_now,
    events.SoundOff: trying.sound_off,
    events.SetAir: readings.set_air,
}
