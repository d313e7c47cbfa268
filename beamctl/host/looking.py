"""Which cues may fire as far as their forecast goes: what was found, and what is still looked at.

An edit can change what later cues find: none that it does that to fires before it was looked at
anew. Pure; the looking itself is a process of its own.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Set
from dataclasses import dataclass, field
from itertools import groupby, pairwise, takewhile
from typing import Any

from beamctl.show.settle import acts_of
from beamctl.show.settled import Settled
from beamctl.show.sheet import Cue, Sheet
from beamctl.show.show import Show

Sounding = Mapping[str, tuple[object, ...]]  # cue → what sounds while it runs
BEING_LOOKED_AT = "being looked at after an edit"


@dataclass(slots=True)
class Looking:
    """What is known of one show's cues.

    newest  number of the newest look that was heard of; the guard's own, before all edits, is 0
    cues    every one where it comes nearest to a cap, as rows of `snapshot.CueLevel`
    doubts  cue → number of the look that will settle it
    """

    newest: int = 0
    cues: list[dict[str, Any]] = field(default_factory=list)
    doubts: dict[str, int] = field(default_factory=dict)
    _found: Mapping[str, str] = field(default_factory=dict)

    def doubt(self, refs: Iterable[str], number: int) -> None:
        """These cues wait for look `number`."""
        self.doubts |= dict.fromkeys(refs, number)

    def take(self, number: int, found: Mapping[str, str], cues: list[dict[str, Any]]) -> None:
        """Look `number` barred the cues `found`, with why; one that is older than known is not."""
        if number < self.newest:
            return
        self.newest = number
        self._found, self.cues = found, cues
        self.doubts = {ref: n for ref, n in self.doubts.items() if n > number}

    @property
    def barred(self) -> dict[str, str]:
        """Cue → why it may not fire."""
        return {**self._found, **dict.fromkeys(self.doubts, BEING_LOOKED_AT)}


def sounding(show: Show) -> Sounding:
    """What sounds when each cue is fired and at every moment of it, by the sheet alone."""
    moments = {ref: list(told) for ref, told in groupby(acts_of(show), lambda moment: moment.ref)}
    found: dict[str, tuple[object, ...]] = {}
    left: dict[str, Settled] = {}  # beam → what goes on after the cue before
    loops: set[str] = set()
    for cue in show.sheet.cue:
        told = moments.get(cue.ref, [])
        found[cue.ref] = (left, *((m.at_s, _heard(m.beams), m.leaving) for m in told))
        for act in cue.in_time():
            if act.sound is not None:
                (loops.add if act.loop else loops.discard)(act.beam)
        if told:
            left = {name: s for name, s in _heard(told[-1].beams).items() if name in loops}
    return found


def doubtful(before: Sheet, was: Sounding, after: Sheet, now: Sounding) -> tuple[str, ...]:
    """Cues of a sheet whose forecast may not be what it was in the sheet before an edit.

    Those that were changed, and those that find or do something else by it. Where the sheet alone
    does not tell what a cue finds, all from the first changed one on.
    """
    old = {cue.ref: cue for cue in before.cue}
    changed = {
        cue.ref
        for cue in after.cue
        if cue.ref not in old or _deeds(old[cue.ref]) != _deeds(cue) or was[cue.ref] != now[cue.ref]
    }
    touched = changed | (old.keys() - {cue.ref for cue in after.cue})
    if not any(_is_open(sheet, touched) for sheet in (before, after)):
        return tuple(cue.ref for cue in after.cue if cue.ref in changed)
    pairs = zip(before.cue, after.cue, strict=False)
    same = sum(1 for _ in takewhile(lambda pair: _deeds(pair[0]) == _deeds(pair[1]), pairs))
    later = [cue.ref for cue in after.cue[same:]]
    follow = {cue.ref: cue.then for cue in after.cue}
    for ref in later:
        if (then := follow[ref]) is not None and then not in later:
            later.append(then)
    return tuple(later)


def _is_open(sheet: Sheet, touched: Set[str]) -> bool:
    """True when only playing the sheet tells what cues find, once these were touched.

    With a follow-on among them, which finds its leader under way, or one that is played in another
    order than the sheet's; and with a focus that follows travels which angles may cut short.
    """
    following = {cue.ref: cue.then for cue in sheet.cue if cue.then is not None}
    if not touched.isdisjoint((*following, *following.values())):
        return True
    nexts = {cue.ref: later.ref for cue, later in pairwise(sheet.cue)}
    if any(nexts.get(ref) != then for ref, then in following.items()):
        return True
    acts = [act for cue in sheet.cue for act in cue.act]
    turned = {
        act.beam for act in acts if act.azimuth_deg is not None or act.elevation_deg is not None
    }
    return any(act.reach == "aim" and act.beam in turned for act in acts)


def _heard(beams: Mapping[str, Settled]) -> dict[str, Settled]:
    return {name: state for name, state in beams.items() if state.sound}


def _deeds(cue: Cue) -> tuple[object, ...]:
    return cue.ref, cue.act, cue.then, cue.then_at_s
