"""The fields of a cue and of an act as they are told: what stands there, and what it expects."""

from __future__ import annotations

from typing import NamedTuple

from beamctl.desk.forms import UNSET, field_of, is_written, value_of, written
from beamctl.desk.rows.sheetwords import follow_on, target_words
from beamctl.desk.sheet.place import ACT_FIELDS
from beamctl.show.sheet import Act, Cue

TARGET = "seat B4, spot NAME, point X Y Z or angles AZ EL"
THEN = "a cue and the seconds after this GO, as in 13 9.0"
_NAMED = {
    "beam": "a beam of this sheet",
    "sound": "a sound file of the show",
    "loop": "true repeats the sound",
    "target": TARGET,
    "via": "a surface to bounce off",
    "reach": "far, aim (on the target), or metres",
}


class Told(NamedTuple):
    """One field."""

    key: str
    now: str
    expects: str


def cue_fields(cue: Cue) -> list[Told]:
    """In the order of the cursor."""
    return [
        Told("ref", cue.ref, 'a number as it is called: "12", "12.5", "12A"'),
        Told("title", cue.title, "a few words"),
        Told("note", cue.note or UNSET, "what the caller says, what to look out for"),
        Told("then", follow_on(cue) or UNSET, THEN),
    ]


def act_fields(act: Act) -> list[Told]:
    """In the order of the cursor; dashes for what the act does not name."""
    return [Told(key, _now(act, key), _expects(key)) for key in ACT_FIELDS]


def _expects(key: str) -> str:
    return _NAMED.get(key) or field_of(Act, key).expects


def _now(act: Act, key: str) -> str:
    if key == "target":
        return target_words(act) or UNSET
    return written(value_of(act, key)) if is_written(act, key) else UNSET
