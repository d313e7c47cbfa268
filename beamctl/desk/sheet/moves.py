"""Cues and acts in other places: one step earlier or later, or lifted and set down."""

from __future__ import annotations

from beamctl.desk.sheet.here import Here
from beamctl.desk.sheet.lifted import Lifted
from beamctl.desk.sheet.place import Place
from beamctl.show import writing
from beamctl.show.edits import Edit, Rename

NO_CUE = "there is no cue yet"


def move(here: Here, by: int) -> str:
    """Move the cue, or the act the cursor is on, one place up (-1) or down (1)."""
    cue, number = here.cue, here.place.act
    if cue is None:
        return NO_CUE
    refs = [one.ref for one in here.sheet.cue]
    at, last = (here.place.cue, len(refs) - 1) if number is None else (number, len(cue.act) - 1)
    if not 0 <= at + by <= last:
        return f"it is the {'first' if by < 0 else 'last'} already"
    if number is not None:
        edit = writing.move_acts(here.sheet, [(cue.ref, at)], cue.ref, at + (by if by < 0 else 2))
        place = here.place.at_act(at + by, here.place.key)
        return here.asking.edit(edit, lambda: here.stand(cue.ref, place))
    after = refs[at + 1] if by > 0 else refs[at - 2] if at > 1 else ""
    edit = writing.move_cues(here.sheet, [cue.ref], after)
    return here.asking.edit(edit, lambda: here.stand(_called(edit, cue.ref), here.place))


def lift(here: Here) -> str:
    """Lift the cue, or the act the cursor is on, or let go of it."""
    if here.cue is None:
        return NO_CUE
    if here.act is not None and here.place.act is not None:
        here.hold(here.lifted.with_act(here.cue.ref, here.place.act, here.act))
    else:
        here.hold(here.lifted.with_cue(here.cue.ref))
    return ""


def set_down(here: Here) -> str:
    """Put what is lifted after the cursor."""
    cue = here.cue
    if cue is None:
        return NO_CUE
    if here.lifted.cues:
        edit = writing.move_cues(here.sheet, here.lifted.cues, cue.ref)
        ref, place = _called(edit, here.lifted.cues[-1]), Place()
    elif here.lifted.acts:
        number = len(cue.act) if here.place.act is None else here.place.act + 1
        acts = [(ref, n) for ref, n, _ in here.lifted.acts]
        edit = writing.move_acts(here.sheet, acts, cue.ref, number)
        gone = sum(n < number for n in here.lifted.acts_of(cue.ref))
        ref, place = cue.ref, here.place.at_act(number - gone)
    else:
        return "nothing is lifted"
    here.hold(Lifted())
    return here.asking.edit(edit, lambda: here.stand(ref, place))


def _called(edit: Edit, ref: str) -> str:
    """What cue `ref` is called after the edit."""
    for step in edit.steps:
        if isinstance(step, Rename) and step.place == ("cue", ref):
            return step.name
    return ref
