"""An evening as its journal tells it: what held, what sounded, what was stopped and by whom.

Levels in dB re 20 µPa in a one-third-octave band, as the guard counted them: averaged as the caps
are, and louder by a panel's margin. Dose is per cent: 100 is the cap for the whole dose window.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime

from beamctl.show.records import Record


@dataclass(frozen=True, slots=True)
class Heading:
    """The first line of a journal."""

    title: str
    folder: str
    version: str
    began: datetime
    sink: str
    rate_hz: int
    feeds: int
    digests: Mapping[str, str]  # SHA-256 by the file's name in the show folder
    cues: Mapping[str, str]  # titles by cue, as far as the journal has them


@dataclass(frozen=True, slots=True)
class Moment:
    """When something happened; `utc` is None in a journal that was rendered without a clock."""

    sample: int
    second: float  # of sound, since sample 0
    utc: datetime | None


@dataclass(frozen=True, slots=True)
class Entry:
    """A record and its moment."""

    at: Moment
    record: Record


@dataclass(frozen=True, slots=True)
class SeatBlock:
    """A block of seats at one reading: its worst seat, and the seat with the most dose."""

    seat: str
    level_db: float | None  # None: nothing was heard
    band_hz: float
    cap_db: float
    dose_pct: float
    dose_seat: str

    @property
    def headroom_db(self) -> float | None:
        """Cap minus level; below zero it was over its cap."""
        return None if self.level_db is None else self.cap_db - self.level_db


@dataclass(frozen=True, slots=True)
class Reading:
    """What the guard told, once a second while the output was open."""

    at: Moment
    state: str
    held_db: Mapping[str, float]  # by panel
    blocks: Mapping[str, SeatBlock]


@dataclass(frozen=True, slots=True)
class Caps:
    """What the guard held the show to from a moment on."""

    at: Moment
    limits_db: Mapping[str, Mapping[float, float]]  # "seats", "crew" → by nominal band
    tables: Mapping[str, tuple[str, ...]]  # "seats", "crew" → names of the tables
    averaging_s: float
    dose_window_s: float
    margin_db: Mapping[str, float]  # by panel
    measured: Mapping[str, str]  # panel → its measurement file, "" for none; {} when not told
    classes: Mapping[str, str]  # block → "seats" or "crew"; {} when not told
    signed_by: str
    signed_on: str
    unsigned: str  # why it counts as unsigned, "" when signed


@dataclass(frozen=True, slots=True)
class Held:
    """A panel held under its cap, from when to when and by how much at most."""

    panel: str
    cue: str
    seat: str
    band_hz: float
    level_db: float | None
    held_db: float
    began: Moment
    ended: Moment | None = None  # None: the journal ends first


@dataclass(frozen=True, slots=True)
class Trip:
    """The guard silenced the show; who cleared it, if anybody did."""

    at: Moment
    reason: str
    cleared: Moment | None = None
    cleared_by: str = ""


@dataclass(frozen=True, slots=True)
class Evening:
    """Everything a report tells; entries in the order of the journal."""

    heading: Heading
    first: Moment
    last: Moment
    closed: bool  # the journal has its proper end
    problems: tuple[str, ...]  # what of the journal could not be read
    open_s: float  # how long the output was open
    caps: tuple[Caps, ...]
    readings: tuple[Reading, ...]
    held: tuple[Held, ...]
    trips: tuple[Trip, ...]
    air: tuple[Entry, ...]
    vouched: tuple[Entry, ...]
    refused: tuple[Entry, ...]
    called: tuple[Entry, ...]  # go, tail, hold, carry-on
    outputs: tuple[Entry, ...]  # output, stream, left
    faults: tuple[Entry, ...]  # fault, dry
    counters: Entry | None

    @property
    def class_of(self) -> dict[str, str]:
        """Block → "seats", "crew", or "" where the journal does not tell."""
        told = self.caps[-1].classes if self.caps else {}
        return {name: told.get(name, "") for r in self.readings for name in r.blocks}

    def held_s(self, held: Held) -> float:
        """How long a panel was held, in seconds; up to the journal's end if nothing ended it."""
        return (held.ended or self.last).second - held.began.second
