"""The player: events and time in, records out. It reads no clock: `sample` is always an argument.

`handle` answers an event at once; `advance` does what is due by itself up to a sample: acts placed
after their GO, follow-ons, the ends of one-shot sounds. Both return records in sample order per
beam; a refusal is a record too, with its reason.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from functools import partial
from typing import Any

import numpy as np

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.show import events
from beamctl.show.beamstate import MIN_GLIDE_S, BeamState
from beamctl.show.locks import Locks
from beamctl.show.once import Once
from beamctl.show.plan import BeamPlan, swing_of
from beamctl.show.records import Record
from beamctl.show.run import Run
from beamctl.show.sheet import Act
from beamctl.show.show import Show
from beamctl.show.standby import after_go, stepped
from beamctl.show.states import CUE, OUTPUT, CueState, Output, Reason, refusal
from beamctl.show.targets import Target, target_of

READY_S = 5.0
RESTORE_RISE_S = 0.25


@dataclass
class Player:
    """State of a show being played; every change goes through `handle` and `advance`."""

    show: Show
    output: Output = "COLD"
    standby: str = ""
    newest: str = ""
    newest_at: int | None = None
    did_at: int = 0  # sample of the newest thing that happened by itself
    held_at: int | None = None
    ready_until: int = -1
    states: dict[str, CueState] = field(default_factory=dict)  # resting cues are not in it
    runs: dict[str, Run] = field(default_factory=dict)
    plans: dict[str, BeamPlan] = field(default_factory=dict)
    barred: Mapping[str, str] = field(default_factory=dict)  # cue → why
    _once: Once = field(default_factory=Once)

    def __post_init__(self) -> None:
        self.rate_hz = self.show.rig.rate_hz
        self.locks = Locks(bool(self.show.house.block))
        self._cues = {cue.ref: cue for cue in self.show.sheet.cue}
        speed = sound_speed_m_s(Air(**self.show.house.air.model_dump()))
        for name, beam in self.show.sheet.beam.items():
            wavenumber = 2.0 * np.pi * self.show.rig.panel[beam.panel].carrier_hz / speed
            swing = swing_of(self.show.cells[beam.panel], wavenumber)
            self.plans[name] = BeamPlan(name, self.rate_hz, swing, BeamState(self.rate_hz))
        self._targets: dict[Act, Target] = {}
        for cue in self.show.sheet.cue:
            for act in cue.act:
                if act.aims:
                    panel = self.show.rig.panel[self.show.panel_of(act.beam)]
                    self._targets[act] = target_of(act, self.show.house, panel)

    # -- what may be asked -------------------------------------------------------------------

    def handle(self, event: events.Event, sample: int) -> list[Record]:
        """Records that answer `event` at `sample`, after those of all that was due before it.

        What `advance` did ahead of `sample` is on its way already, so an event that moves beams
        waits for it: else a fall would be undone by the record of a later sample.
        """
        records = self.advance(sample)
        if isinstance(event, events.Go | events.Hold | events.CarryOn | events.Tail):
            sample = max(sample, self.did_at)
        return records + _HANDLERS[type(event)](self, event, sample)

    def advance(self, until: int) -> list[Record]:
        """Records of all that is due by itself before sample `until`, in order."""
        records: list[Record] = []
        while (due := self._next_due()) is not None and due[0] < until:
            self.did_at, deed = due
            records += self._settle(self.did_at)
            records += deed(self.did_at)
        return records + self._settle(until)

    def sink(self, event: str, sample: int) -> list[Record]:
        """What the sink or its engine did: "sink-open", "sink-lost", "host-over", "sink-close".

        A new engine is told silently what the beams had. What looped when the last one went comes
        back when somebody arms; all else that ran then is over.
        """
        if (goal := OUTPUT.get((self.output, event))) is None:
            return []
        records = self._to(goal, sample, event)
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
        return [told, self._shut(sample), *self._to(goal, sample, event, "guard")]

    def moved(self, records: Iterable[Record], by: int) -> None:
        """The engine took these records `by` samples late: what hangs on them moves along."""
        for ref in {record.cue for record in records if record.cue in self.runs}:
            run = self.runs[ref]
            run.started += by
            run.settles_at += by
            run.shift(by)
            if ref == self.newest and self.newest_at is not None:
                self.newest_at += by
            for plan in self.plans.values():
                if plan.owner == ref and plan.ends_at is not None:
                    plan.ends_at += by

    def _cut(self, sample: int) -> None:
        self.ready_until, self.held_at = -1, None
        for run in self.runs.values():
            run.cut(sample)
        for plan in self.plans.values():
            plan.lose(sample)

    # -- events ------------------------------------------------------------------------------

    def _go(self, event: events.Go, sample: int) -> list[Record]:
        ref = event.ref or self.standby
        if self._once.used(event.token):
            return self._refuse(event, sample, "repeat", f"token {event.token} was used")
        if (self.output, "go") not in OUTPUT:
            why = f"{self.output}: * then Enter opens the output"
            return self._refuse(event, sample, refusal(self.output), why)
        if not ref:
            return self._refuse(event, sample, "not-standing-by", "no cue stands by")
        if ref not in self._cues:
            return self._refuse(event, sample, "unknown-ref", f"no cue {ref} in the sheet")
        if ref in self.barred:
            return self._refuse(event, sample, "barred", f"cue {ref}: {self.barred[ref]}")
        if self.held_at is not None:
            return self._refuse(event, sample, "busy", "the show is held; carry on first")
        if (self.state(ref), "go") not in CUE:
            return self._refuse(event, sample, "busy", f"cue {ref} is {self.state(ref)}")
        self._once.take(event.token)
        records = self._fire(ref, sample, event.who)
        if ref == self.standby or not self.standby:
            self._stand(after_go(self.show.sheet, ref, self.state))
        return records

    def _fire(self, ref: str, sample: int, who: str) -> list[Record]:
        """Start cue `ref`: its GO record and the acts that are due at once."""
        cue = self._cues[ref]
        for run in self.runs.values():
            if run.follow is not None and run.follow[1] == ref:
                run.drop_follow(sample)
        self._turn(ref, "go")
        acts = sorted(cue.act, key=lambda act: act.at_s)
        at = deque((sample + round(act.at_s * self.rate_hz), act) for act in acts)
        follow = cue.then and (sample + round((cue.then_at_s or 0.0) * self.rate_hz), cue.then)
        self.runs[ref] = Run(ref, sample, at, follow or None, sample)
        self.newest, self.newest_at = ref, sample
        records = [Record(sample, "go", cue=ref, who=who)]
        while self.runs[ref].due() == sample:
            records += self._act(ref, sample)
        return records

    def _act(self, ref: str, sample: int) -> list[Record]:
        run = self.runs[ref]
        _, act = run.acts.popleft()
        run.lasts(sample)
        plan = self.plans[act.beam]
        seconds = self.show.sounds[act.sound].seconds if act.sound is not None else 0.0
        owner = plan.owner
        records = plan.perform(act, sample, ref, self._targets.get(act), seconds)
        self._lengthen(ref, records)
        if plan.owner != owner:
            self._lengthen(owner, records)
        return records

    def _end(self, plan: BeamPlan, sample: int) -> list[Record]:
        owner = plan.owner
        records = plan.end(sample)
        self._lengthen(owner, records)
        return records

    def _lengthen(self, ref: str, records: list[Record]) -> None:
        """Cue `ref` is not done before these records have run their course."""
        if ref in self.runs:
            for record in records:
                self.runs[ref].lasts(record.sample + int(record.args.get("n", 0)))

    def _stand_by(self, event: events.StandBy, sample: int) -> list[Record]:
        if event.ref and event.ref not in self._cues:
            return self._refuse(event, sample, "unknown-ref", f"no cue {event.ref} in the sheet")
        if event.ref and (self.state(event.ref), "stand-by") not in CUE:
            if event.ref == self.standby:
                return []
            reason: Reason = "barred" if event.ref in self.barred else "busy"
            what = f"cue {event.ref} is {self.state(event.ref)}"
            return self._refuse(event, sample, reason, what)
        self._stand(event.ref)
        return [Record(sample, "standby", cue=event.ref, who=event.who)]

    def _step(self, event: events.Step, sample: int) -> list[Record]:
        goal = stepped(self.show.sheet, self.standby, event.by, self.state)
        return self._stand_by(events.StandBy(event.who, goal), sample) if goal else []

    def _ready(self, event: events.Ready, sample: int) -> list[Record]:
        if self.output not in ("SHUT", "HUSHED"):
            why = f"nothing to arm or restore while {self.output}"
            return self._refuse(event, sample, refusal(self.output), why)
        if refused := self.locks.refusal(opening=False):
            return self._refuse(event, sample, *refused)
        self.ready_until = sample + round(READY_S * self.rate_hz)
        return [Record(sample, "ready", who=event.who)]

    def _confirm(self, event: events.Confirm, sample: int) -> list[Record]:
        if sample > self.ready_until:
            return self._refuse(event, sample, "not-armed", "press * first, then Enter within 5 s")
        self.ready_until = -1
        return self._open("arm" if self.output == "SHUT" else "restore", event, sample)

    def _restore(self, event: events.Restore, sample: int) -> list[Record]:
        return self._open("restore", event, sample)

    def _open(self, act: str, event: events.Event, sample: int) -> list[Record]:
        goal = OUTPUT.get((self.output, act))
        if goal is None:
            why = f"cannot {act} while {self.output}"
            return self._refuse(event, sample, refusal(self.output), why)
        if refused := self.locks.refusal():
            return self._refuse(event, sample, *refused)
        rise = round((RESTORE_RISE_S if act == "restore" else MIN_GLIDE_S) * self.rate_hz)
        gate = Record(sample, "gate", args={"open": 1, "n": rise})
        if act == "arm" and not self.standby and self.show.sheet.cue:
            self._stand(self.show.sheet.cue[0].ref)
        records = [*self._to(goal, sample, act, event.who), gate]
        for plan in self.plans.values():
            records += plan.bring_back(sample, RESTORE_RISE_S)
        return records

    def _clear(self, event: events.Clear, sample: int) -> list[Record]:
        if (goal := OUTPUT.get((self.output, "clear"))) is None:
            return self._refuse(event, sample, "busy", f"nothing to clear while {self.output}")
        if refused := self.locks.clear(event.word):
            return self._refuse(event, sample, *refused)
        return [Record(sample, "clear", who=event.who), *self._to(goal, sample, "clear", event.who)]

    def _vouch(self, event: events.Vouch, sample: int) -> list[Record]:
        if refused := self.locks.vouch(event.name):
            return self._refuse(event, sample, *refused)
        self.ready_until = -1
        return [Record(sample, "vouch", who=event.who, args={"name": self.locks.vouched})]

    def _hush(self, event: events.Hush, sample: int) -> list[Record]:
        goal = OUTPUT[self.output, "hush"]
        return [self._shut(sample), *self._to(goal, sample, "hush", event.who)]

    def _shut(self, sample: int) -> Record:
        """The record that shuts the gate; what was to come by itself does not."""
        self.ready_until = -1
        for run in self.runs.values():
            run.drop_follow(sample)
        return Record(sample, "gate", args={"open": 0, "n": round(MIN_GLIDE_S * self.rate_hz)})

    def _hold(self, event: events.Hold, sample: int) -> list[Record]:
        if self.held_at is not None:
            return self._refuse(event, sample, "busy", "the show is held already")
        self.held_at = sample
        for run in self.runs.values():
            run.frozen = max(0, run.settles_at - sample)
        records = [Record(sample, "hold", who=event.who)]
        for plan in self.plans.values():
            if plan.sounding(sample):
                records += plan.freeze(sample)
        return records

    def _carry_on(self, event: events.CarryOn, sample: int) -> list[Record]:
        if self.held_at is None:
            return self._refuse(event, sample, "busy", "the show is not held")
        wait, self.held_at = sample - self.held_at, None
        for run in self.runs.values():
            run.shift(wait)
            if run.frozen:
                run.lasts(sample + run.frozen)
                run.frozen = 0
        told = [Record(sample, "carry-on", who=event.who)]
        return told + [r for p in self.plans.values() for r in p.thaw(sample)]

    def _tail(self, event: events.Tail, sample: int) -> list[Record]:
        running = [r.ref for r in self.runs.values() if self.state(r.ref) == "running"]
        ref = event.ref or (running[-1] if running else "")
        if ref not in self._cues:
            what = f"no cue {ref} in the sheet" if ref else "no cue is running"
            return self._refuse(event, sample, "unknown-ref" if ref else "busy", what)
        if (self.state(ref), "tail") not in CUE:
            return self._refuse(event, sample, "busy", f"cue {ref} is {self.state(ref)}")
        self._turn(ref, "tail")
        self.runs[ref].cut(sample + round(event.fall_s * self.rate_hz))
        records = [Record(sample, "tail", cue=ref, who=event.who)]
        for plan in self.plans.values():
            if plan.owner == ref:
                records += plan.fall(sample, event.fall_s, ref)
        return records

    def _acknowledge(self, event: events.Acknowledge, sample: int) -> list[Record]:
        return [Record(sample, "acknowledge", who=event.who)]

    # -- what happens by itself ---------------------------------------------------------------

    def _next_due(self) -> tuple[int, Callable[[int], list[Record]]] | None:
        """Sample and deed of what happens next by itself; while held, sounds still end."""
        due: list[tuple[int, Callable[[int], list[Record]]]] = []
        for run in self.runs.values() if self.held_at is None else ():
            if (at := run.due()) is not None:
                due.append((at, partial(self._act, run.ref)))
            if run.follow is not None:
                due.append((run.follow[0], partial(self._follow_on, run)))
        for plan in self.plans.values():
            if plan.ends_at is not None:
                due.append((plan.ends_at, partial(self._end, plan)))
        return min(due, key=lambda item: item[0], default=None)

    def _follow_on(self, run: Run, sample: int) -> list[Record]:
        ref = run.follow[1] if run.follow else ""
        run.follow = None
        run.lasts(sample)
        return self._go(events.Go(f"follow-on of {run.ref}", ref), sample)

    def _settle(self, sample: int) -> list[Record]:
        """Finish the cues that have nothing left to do."""
        records = []
        for run in list(self.runs.values()):
            sounds = any(p.owner == run.ref for p in self.plans.values())
            if run.acts or run.follow or run.frozen or sounds or run.settles_at >= sample:
                continue
            del self.runs[run.ref]
            self._turn(run.ref, "settled")
            records.append(Record(run.settles_at, "done", cue=run.ref))
        return records

    # -- small things ---------------------------------------------------------------------------

    def state(self, ref: str) -> CueState:
        """State of a cue of the sheet; one that sounds already can still be tailed when barred."""
        state = self.states.get(ref, "resting")
        return "barred" if ref in self.barred and state not in ("running", "tailing") else state

    def _turn(self, ref: str, event: str) -> None:
        state = CUE[self.states.pop(ref, "resting"), event]
        if state != "resting":
            self.states[ref] = state

    def _stand(self, ref: str) -> None:
        if self.states.get(self.standby) == "standing by":
            self._turn(self.standby, "stand-down")
        self.standby = ref
        if ref and (self.state(ref), "stand-by") in CUE:
            self._turn(ref, "stand-by")

    def _to(self, goal: Output, sample: int, why: str, who: str = "") -> list[Record]:
        before, self.output = self.output, goal
        if before == goal:
            return []
        args = {"from": before, "to": goal, "by": why}
        return [Record(sample, "output", who=who, args=args)]

    def _refuse(self, event: events.Event, sample: int, reason: Reason, text: str) -> list[Record]:
        args: dict[str, Any] = {"asked": type(event).__name__.lower(), "reason": reason}
        return [Record(sample, "refused", who=event.who, args=args | {"text": text})]


_HANDLERS: dict[type[events.Event], Callable[[Player, Any, int], list[Record]]] = {
    events.Go: Player._go,
    events.StandBy: Player._stand_by,
    events.Step: Player._step,
    events.Ready: Player._ready,
    events.Confirm: Player._confirm,
    events.Restore: Player._restore,
    events.Hush: Player._hush,
    events.Hold: Player._hold,
    events.CarryOn: Player._carry_on,
    events.Tail: Player._tail,
    events.Acknowledge: Player._acknowledge,
    events.Clear: Player._clear,
    events.Vouch: Player._vouch,
}
