"""The fields of a cue and of an act as they are told: what stands there, and what it expects."""

from __future__ import annotations

from functools import cache
from typing import NamedTuple

from beamctl.desk.rows.sheetwords import follow_on, target_words
from beamctl.desk.sheetplace import ACT_FIELDS
from beamctl.show.expected import Expected
from beamctl.show.sheet import Act, Cue

UNSET = "--"
TARGET = "a seat, a spot, point X Y Z in metres, or angles AZIMUTH ELEVATION in degrees"
THEN = "the cue that follows by itself, and how many seconds after this GO, as in 13 9.0"
_NAMED = {
    "beam": "a beam of this sheet",
    "sound": "a sound file; what does not name one goes on sounding",
    "loop": "true repeats the sound",
    "target": TARGET,
    "via": "a surface to bounce off",
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
    return [Told(key, _now(act, key), expects(key)) for key in ACT_FIELDS]


@cache
def expects(key: str) -> str:
    """What a field of an act wants."""
    return _NAMED.get(key) or Expected(Act).at((key,))


def _now(act: Act, key: str) -> str:
    if key == "target":
        return target_words(act) or UNSET
    value = getattr(act, key)
    if value is None or value is False:
        return UNSET
    return "true" if value is True else f"{value:g}" if isinstance(value, float) else str(value)
