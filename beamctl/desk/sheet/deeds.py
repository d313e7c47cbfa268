"""What the verbs of the Sheet do with the cue or the act under the cursor, and with what is lifted.

Each returns what there is to say when it cannot be done, or "".
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from beamctl.desk.box import Box
from beamctl.desk.sheet.beams import beams
from beamctl.desk.sheet.changes import change_cue, emptied, fitted
from beamctl.desk.sheet.here import Here
from beamctl.desk.sheet.lifted import Lifted
from beamctl.desk.sheet.moves import NO_CUE, lift, move, set_down
from beamctl.desk.sheet.place import Place
from beamctl.desk.verbs import sheet as verbs
from beamctl.show import writing
from beamctl.show.settle import state_after


def new_cue(here: Here) -> str:
    """Ask for a title, then write a cue after this one."""
    after = here.cue.ref if here.cue else ""
    ref = writing.free_ref(here.sheet, after)

    def use(title: str) -> str:
        if not title:
            return "It wants a title."
        edit = writing.new_cue(here.sheet, after, title)
        return here.asking.edit(edit, lambda: here.stand(ref, Place()))

    about = f"It is called {ref}" + (f", and stands after {after}." if after else ".")
    here.asking.open(Box("A NEW CUE", about, "its title", use=use))
    return ""


def new_act(here: Here) -> str:
    """Ask for a beam, then write an act after this one and stand on what it aims at."""
    cue, act = here.cue, here.act
    if cue is None:
        return NO_CUE
    number = len(cue.act) if here.place.act is None else here.place.act + 1
    table: dict[str, Any] = {"at_s": act.at_s} if act is not None and act.at_s else {}

    def use(beam: str) -> str:
        if not beam:
            return "Nothing matches."
        edit = writing.put_act(here.sheet, cue.ref, number, table | {"beam": beam})
        place = here.place.at_act(number, "target")
        return here.asking.edit(edit, lambda: here.stand(cue.ref, place))

    title, names = f"ACT {number + 1} OF CUE {cue.ref}", tuple(here.sheet.beam)
    here.asking.open(Box(title, "", "its beam", use=use, choices=names, strict=True))
    return ""


def copy(here: Here) -> str:
    """Write the cue, or the act the cursor is on, once more after itself."""
    cue, number = here.cue, here.place.act
    if cue is None:
        return NO_CUE
    if number is None:
        ref = writing.free_ref(here.sheet, cue.ref)
        edit = writing.copy_cue(here.sheet, cue.ref, cue.ref)
        return here.asking.edit(edit, lambda: here.stand(ref, Place()))
    edit = writing.copy_act(here.sheet, cue.ref, number)
    return here.asking.edit(edit, lambda: here.stand(cue.ref, here.place.at_act(number + 1)))


def split(here: Here) -> str:
    """Begin a new cue with the act under the cursor."""
    cue, number = here.cue, here.place.act
    if cue is None or number is None:
        return "stand on the act that is to begin the new cue"
    edit = writing.split_cue(here.sheet, cue.ref, number)
    ref = writing.free_ref(here.sheet, cue.ref)
    return here.asking.edit(edit, lambda: here.stand(ref, here.place.at_act(0)))


def renumber(here: Here) -> str:
    """Ask for a first number and a step, for the lifted cues or all from this one on."""
    if here.cue is None:
        return NO_CUE
    lifted = here.lifted.cues
    refs = lifted or tuple(cue.ref for cue in here.sheet.cue[here.place.cue :])

    def use(text: str) -> str:
        start, _, step = text.partition(" ")
        try:
            edit = writing.renumber(here.sheet, refs, start, step or "1")
        except ValueError as error:
            return str(error)
        here.hold(Lifted())
        return here.asking.edit(edit)

    about = f"The {len(refs)} lifted" if lifted else f"All {len(refs)} from {refs[0]} on"
    about += " are counted anew; what follows them by itself follows along."
    here.asking.open(Box("RENUMBER", about, "the first number and the step, as in 20 1", use=use))
    return ""


def take_away(here: Here) -> str:
    """Take the cue or the act away, or empty the field under the cursor."""
    cue, number, key = here.cue, here.place.act, here.place.key
    if cue is None:
        return NO_CUE
    if key:
        edit = emptied(cue, number, key)
        return here.asking.edit(edit) if edit is not None else ""
    if number is not None:
        return here.asking.edit(writing.delete_acts(here.sheet, [(cue.ref, number)]))
    return here.asking.edit(writing.delete_cues(here.sheet, [cue.ref]))


def fit(here: Here) -> str:
    """Take the trim that the guard found to fit."""
    cue, level = here.cue, here.level
    if cue is None or level is None or level.fits_db is None:
        return "the guard has found no trim that would fit here"
    index = here.place.cue
    before = state_after(here.draft.show, here.sheet.cue[index - 1].ref if index else "")
    edit = fitted(cue, level.beam, before[level.beam].trim_db, level.fits_db)
    if edit is None:
        return f"no act of this cue has {level.beam} above {level.fits_db:.1f} dB"
    return here.asking.edit(edit)


def title(here: Here) -> str:
    """Ask for the title of the cue."""
    return NO_CUE if here.cue is None else change_cue(here, here.cue, "title")


def note(here: Here) -> str:
    """Ask for the note of the cue."""
    return NO_CUE if here.cue is None else change_cue(here, here.cue, "note")


DEEDS: dict[str, Callable[[Here], str]] = {
    verbs.NEW_CUE.name: new_cue,
    verbs.NEW_ACT.name: new_act,
    verbs.COPY.name: copy,
    verbs.SPLIT.name: split,
    verbs.RENUMBER.name: renumber,
    verbs.EARLIER.name: lambda here: move(here, -1),
    verbs.LATER.name: lambda here: move(here, 1),
    verbs.LIFT.name: lift,
    verbs.SET_DOWN.name: set_down,
    verbs.TAKE_AWAY.name: take_away,
    verbs.TITLE.name: title,
    verbs.NOTE.name: note,
    verbs.BEAMS.name: beams,
    verbs.FIT.name: fit,
}
