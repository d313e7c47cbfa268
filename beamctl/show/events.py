"""Events: what keys, OSC, command lines and timers ask for, all in the same words."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Event:
    """Base of all events; `who` names the key, sender or timer that made it."""

    who: str = ""


@dataclass(frozen=True, slots=True)
class Go(Event):
    """Fire a cue: `ref`, or the one standing by when it is empty. A token fires once only."""

    ref: str = ""
    token: int = 0


@dataclass(frozen=True, slots=True)
class StandBy(Event):
    """Put cue `ref` on stand-by; an empty `ref` takes stand-by off."""

    ref: str = ""


@dataclass(frozen=True, slots=True)
class Step(Event):
    """Move stand-by along the sheet by `by` cues."""

    by: int = 1


@dataclass(frozen=True, slots=True)
class Ready(Event):
    """First of the two acts that arm or restore; the second must follow within five seconds."""


@dataclass(frozen=True, slots=True)
class Confirm(Event):
    """Second act: arms from SHUT, restores from HUSHED; refused unless Ready came just before."""


@dataclass(frozen=True, slots=True)
class Hush(Event):
    """Silence now."""


@dataclass(frozen=True, slots=True)
class Restore(Event):
    """Return from HUSHED in one request, for a show system that cannot press two keys."""


@dataclass(frozen=True, slots=True)
class Hold(Event):
    """Freeze every glide and every follow-on clock."""


@dataclass(frozen=True, slots=True)
class CarryOn(Event):
    """Carry on with what hold froze."""


@dataclass(frozen=True, slots=True)
class Tail(Event):
    """End what a running cue sounds: `ref`, or the newest running one when it is empty."""

    ref: str = ""
    fall_s: float = 1.0


@dataclass(frozen=True, slots=True)
class Acknowledge(Event):
    """Take the oldest notice off the screen."""


@dataclass(frozen=True, slots=True)
class Clear(Event):
    """Take a trip away, by a typed word; what tripped must be over, and nothing sounds by it."""

    word: str = ""


@dataclass(frozen=True, slots=True)
class Vouch(Event):
    """Somebody answers by name for a house without seats, in which nothing can be measured."""

    name: str = ""


@dataclass(frozen=True, slots=True)
class Mode(Event):
    """Change the mode to WRITE, WALK or SHOW: into SHOW by a word, out of it by one and a name."""

    to: str = ""
    word: str = ""
    name: str = ""


@dataclass(frozen=True, slots=True)
class SoundNow(Event):
    """Sound what act number `act` (from 0) of cue `ref` leads to, at `trim_db`, outside any cue."""

    ref: str = ""
    act: int = 0
    trim_db: float = -60.0


@dataclass(frozen=True, slots=True)
class SoundOff(Event):
    """End what `SoundNow` began on a beam, or on all of them when `beam` is empty."""

    beam: str = ""


@dataclass(frozen=True, slots=True)
class SetAir(Event):
    """Air readings as somebody took them."""

    temperature_c: float = 20.0
    humidity_pct: float = 50.0
    pressure_kpa: float = 101.325
