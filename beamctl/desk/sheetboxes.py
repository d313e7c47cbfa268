"""What the Sheet asks for a field: which box, what may be picked, and which edit is made of it."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, get_args

from beamctl.desk.box import Box
from beamctl.desk.link import Draft
from beamctl.desk.rows.sheetfields import TARGET, THEN, UNSET, act_fields, expects
from beamctl.desk.rows.sheetwords import sentence
from beamctl.show.edits import Edit, Place, Rename, Set
from beamctl.show.house import House
from beamctl.show.sheet import Act, Cue, Law

SHEET = "sheet.toml"
TARGETS = ("seat", "spot", "point_m", "azimuth_deg", "elevation_deg")

Deed = Callable[[str], Edit | None]  # None when nothing changes; ValueError says what is wrong


@dataclass(frozen=True, slots=True)
class Question:
    """A box, and the edit that is made of what is typed or picked in it."""

    box: Box
    deed: Deed


def cue_question(key: str, cue: Cue, draft: Draft) -> Question:
    """Asks for a field of a cue."""
    place: Place = ("cue", cue.ref)
    about = f"Cue {cue.ref}, {cue.title}."
    if key == "ref":
        box = Box("CALL THE CUE", about, "its number as it is called, such as 12, 12.5 or 12A")
        return Question(box, lambda text: _renamed(cue, text))
    if key == "then":
        now = f"{cue.then} {cue.then_at_s:g}" if cue.then else UNSET
        box = Box("WHAT FOLLOWS BY ITSELF", f"{about} Now: {now}.", THEN)
        return Question(box, lambda text: _edit(place, cue, _follow_on(text, draft), f"then {text}"))
    box = Box(f"{key.upper()} OF CUE {cue.ref}", "", "the words", typed=getattr(cue, key))
    return Question(box, lambda text: _edit(place, cue, {key: text or None}, f"{key} {text}"))


def act_question(key: str, cue: Cue, number: int, draft: Draft) -> Question:
    """Asks for a field of an act."""
    act = cue.act[number]
    place: Place = ("cue", cue.ref, "act", number)
    now = next(told.now for told in act_fields(act) if told.key == key)
    picks = choices(key, act, draft)
    strict = key in ("beam", "sound", "loop", "via", "law")
    if strict and now in picks:  # Enter on an untouched box leaves what is there
        picks = (now, *(pick for pick in picks if pick != now))
    box = Box(
        f"{key.upper()} OF ACT {number + 1}, CUE {cue.ref}",
        f"{sentence(act).capitalize()}. Now: {now}.",
        expects(key),
        choices=picks,
        strict=strict,
    )
    return Question(box, lambda text: _edit(place, act, values(key, text, act, draft), f"{key} {text}"))
