"""Which cue stands by next: after a GO, and when the operator moves along the sheet."""

from __future__ import annotations

from collections.abc import Callable

from beamctl.show.sheet import Sheet
from beamctl.show.states import CUE, CueState

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
