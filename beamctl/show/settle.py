"""What the beams do after a cue, and while its acts run, by the sheet alone: nothing is played.

The state after a cue: every cue of the sheet up to it done in order, all glides at their ends,
one-shot sounds over, loops sounding. So any cue can be gone back to, and looked at beforehand.
One thing the sheet alone does not tell: a focus that follows a travel which angles cut short stays
half-way when played; here it is at the travel's end.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from itertools import groupby
from math import inf

from beamctl.show.plan import END_FALL_S, END_PAD_S, SLOWED_S
from beamctl.show.settled import FRESH, Settled, after_act
from beamctl.show.sheet import Act
from beamctl.show.show import Show
from beamctl.show.targets import Target, target_of

TargetOf = Callable[[Act], Target | None]


@dataclass(frozen=True, slots=True)
class Moment:
    """The beams once the acts at `at_s` after the GO of cue `ref` are given.

    beams    where each beam is going; a one-shot sound counts until it falls or has ended
    leaving  beam → the states it may still be on its way from; what it sounds then lies between
             them and `beams`. A beam that falls is silent in `beams` and sounds here until it ends.
    """

    ref: str
    at_s: float
    beams: dict[str, Settled]
    leaving: dict[str, tuple[Settled, ...]]


@dataclass(slots=True)
class _Beam:
    """A beam while the acts of a cue are walked through, in seconds after its GO."""

    now: Settled = FRESH
    ends_s: float | None = None  # one-shot sounds: when their carrier begins to fall
    left: tuple[tuple[float, Settled], ...] = ()  # (until, state it comes from)

    def at(self, second: float) -> None:
        """Let what is over by `second` be over."""
        if self.ends_s is not None and self.ends_s <= second:
            self.left += ((self.ends_s + END_FALL_S, self.now),)
            self.now, self.ends_s = replace(self.now, sound=""), None
        self.left = tuple((until, state) for until, state in self.left if until > second)

    def take(self, act: Act, show: Show, target: Target | None) -> None:
        """Do one act at its time."""
        self.at(act.at_s)
        before, self.now = self.now, after_act(self.now, act, target)
        until = act.at_s + max(act.over_s, act.fall_s or 0.0) + SLOWED_S
        if before.sound and before != self.now:
            self.left += ((until, before),)
        elif not before.sound:  # what still falls takes the change along, a longer fall as well
            self.left += tuple(
                (
                    end if act.fall_s is None else max(end, until),
                    replace(self.now, sound=old.sound, trim_db=old.trim_db),
                )
                for end, old in self.left
            )
        if act.fall_s is not None:
            self.ends_s = None
        elif act.sound is not None:
            end_s = act.at_s + show.sounds[act.sound].seconds + END_PAD_S
            self.ends_s = None if act.loop else end_s


def state_after(show: Show, ref: str) -> dict[str, Settled]:
    """Every beam after cue `ref`, by its name; "" is the state before the first cue.

    KeyError when the sheet has no such cue.
    """
    last = show.sheet.position(ref) if ref else -1
    beams = {name: _Beam() for name in show.sheet.beam}
    for cue in show.sheet.cue[: last + 1]:
        for act in cue.in_time():
            beams[act.beam].take(act, show, _target(act, show))
        _pass(beams, inf)
    return {name: beam.now for name, beam in beams.items()}


def led_to(show: Show, ref: str, act: Act, target: TargetOf) -> tuple[Settled, bool]:
    """The beam of one act of cue `ref` when that act is given, and whether its sound repeats.

    `target` gives the target of each act that aims: a whole sheet of them is soon asked for.
    """
    beam = _Beam()
    for cue in show.sheet.cue[: show.sheet.position(ref) + 1]:
        beam.at(inf)
        for one in cue.in_time():
            if one.beam == act.beam:
                beam.take(one, show, target(one))
            if cue.ref == ref and one is act:
                break
    return beam.now, beam.ends_s is None


def acts_of(show: Show) -> Iterator[Moment]:
    """Every moment of every cue at which acts are given, in the order of the sheet.

    Before its first act a cue finds the state after the one that stands before it in the sheet.
    """
    beams = {name: _Beam() for name in show.sheet.beam}
    for cue in show.sheet.cue:
        for at_s, acts in groupby(cue.in_time(), key=lambda act: act.at_s):
            _pass(beams, at_s)
            for act in acts:
                beams[act.beam].take(act, show, _target(act, show))
            leaving = {n: tuple(s for _, s in b.left) for n, b in beams.items() if b.left}
            yield Moment(cue.ref, at_s, {n: b.now for n, b in beams.items()}, leaving)
        _pass(beams, inf)


def _pass(beams: dict[str, _Beam], second: float) -> None:
    for beam in beams.values():
        beam.at(second)


def _target(act: Act, show: Show) -> Target | None:
    if not act.aims:
        return None
    return target_of(act, show.house, show.rig.panel[show.panel_of(act.beam)])
