"""A journal's first line and records, gathered into an `Evening`.

Samples become wall time by the newest `clock` record before them; a journal without one counts from
the moment it was begun, which is early by the time that the engine took to start.
"""

from __future__ import annotations

import json
import math
from collections import Counter
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field, replace
from datetime import UTC, datetime, timedelta
from pathlib import PurePath
from typing import Any

from beamctl.report.evening import (
    Caps,
    Entry,
    Evening,
    Heading,
    Held,
    Moment,
    Reading,
    SeatBlock,
    Trip,
)
from beamctl.show.records import Record

CLASSES = ("seats", "crew")
CALLED = ("go", "tail", "hold", "carry-on")
RUNNING = ("SHUT", "OPEN", "HUSHED", "TRIPPED")
JUMP_S = 2.0


def heading(line: bytes) -> Heading:
    """The first line of a journal; ValueError, LookupError or TypeError when it is none."""
    row: dict[str, Any] = json.loads(line)
    folder = str(row["folder"])
    if int(row["rate_hz"]) <= 0:
        raise ValueError(row["rate_hz"])
    return Heading(
        title=str(row.get("title", PurePath(folder).name)),
        folder=folder,
        version=str(row["beamctl"]),
        began=_utc(row["began"]),
        sink=str(row["sink"]),
        rate_hz=int(row["rate_hz"]),
        feeds=int(row["channels"]),
        digests={str(k): str(v) for k, v in row["digests"].items()},
        cues={str(k): str(v) for k, v in row.get("cues", {}).items()},
    )


def gather(head: Heading, records: Iterable[Record], problems: Iterable[str] = ()) -> Evening:
    """All that a report tells of a journal. `problems` says what of it could not be read."""
    kept = list(records)
    gathering = _Gathering(head, kept)
    for record in kept:
        gathering.take(record)
    return gathering.evening(tuple(problems))


def _utc(text: str) -> datetime:
    read = datetime.fromisoformat(text)
    return read.astimezone(UTC) if read.tzinfo else read.replace(tzinfo=UTC)


@dataclass
class _Gathering:
    head: Heading
    records: list[Record]
    output: str = "COLD"
    opened: float | None = None
    open_s: float = 0.0
    last: Moment | None = None
    caps: list[Caps] = field(default_factory=list)
    readings: list[Reading] = field(default_factory=list)
    holding: dict[str, Held] = field(default_factory=dict)
    held: list[Held] = field(default_factory=list)
    trips: list[Trip] = field(default_factory=list)
    entries: list[Entry] = field(default_factory=list)  # in the order of the journal
    jumps: list[str] = field(default_factory=list)
    odd: Counter[str] = field(default_factory=Counter)

    def __post_init__(self) -> None:
        clocks = [r for r in self.records if r.what == "clock"]
        streams = [r for r in self.records if r.what == "stream"]
        self.live = bool(clocks) or not streams or any(r.args for r in streams)
        self.clock = (0, self.head.began)
        if clocks:
            self._quietly(lambda: self._set_clock(clocks[0]))
        self.rate_hz, self.counted = self.head.rate_hz, (0, 0.0)  # at that rate since when
        self.steady = False  # samples have run without a break since the newest clock record
        self.first = self.moment(0)

    def moment(self, sample: int) -> Moment:
        """Wall time of a sample by the newest clock."""
        at, utc = self.clock
        now = utc + timedelta(seconds=(sample - at) / self.rate_hz) if self.live else None
        since, second = self.counted
        return Moment(sample, second + (sample - since) / self.rate_hz, now)

    def take(self, record: Record) -> None:
        """One record; what cannot be understood is counted."""
        if not self._quietly(lambda: self._take(record)):
            self.odd[record.what] += 1

    def _take(self, record: Record) -> None:
        at = self.moment(record.sample)
        if (handler := _HANDLERS.get(record.what)) is not None:
            if not isinstance(record.args, Mapping):
                raise TypeError(record.args)
            handler(self, at, record)
        if self.last is None or at.second >= self.last.second:
            self.last = at

    @staticmethod
    def _quietly(deed: Callable[[], None]) -> bool:
        try:
            deed()
        except (LookupError, TypeError, ValueError, AttributeError, OverflowError):
            return False
        return True

    # -- one kind of record each -------------------------------------------------------------

    def keep(self, at: Moment, record: Record) -> None:
        """Keep a record as it is."""
        self.entries.append(Entry(at, record))

    def tell_clock(self, at: Moment, record: Record) -> None:
        """A new reading of the wall clock; a jump of it is told."""
        self._set_clock(record)
        utc = self.clock[1]
        off_s = (utc - at.utc).total_seconds() if at.utc else 0.0
        if self.steady and abs(off_s) > JUMP_S:
            self.jumps.append(
                f"the machine's clock jumped by {off_s:+.0f} s to {utc:%Y-%m-%d %H:%M:%S} UTC"
            )
        self.steady = self.output in RUNNING

    def _set_clock(self, record: Record) -> None:
        self.clock = (record.sample, _utc(record.args["utc"]))

    def turn_output(self, at: Moment, record: Record) -> None:
        """The output entered another state."""
        self.output = str(record.args["to"])
        self.steady = self.steady and self.output in RUNNING
        if self.opened is not None:
            self.open_s += at.second - self.opened
        self.opened = at.second if self.output == "OPEN" else None
        self.keep(at, record)

    def begin_show(self, at: Moment, record: Record) -> None:
        """The next stream is of an edited show, which may have another rate."""
        rate_hz = int(record.args["rate_hz"])
        if rate_hz <= 0:
            raise ValueError(rate_hz)
        self.counted, self.rate_hz = (record.sample, at.second), rate_hz

    def begin_stream(self, at: Moment, record: Record) -> None:
        """An engine opened its sink."""
        self.steady = False
        self.keep(at, record)

    def tell_caps(self, at: Moment, record: Record) -> None:
        """What holds from now on, unless it held already."""
        args = record.args
        caps = Caps(
            at=at,
            limits_db={
                who: {_number(k): _number(v) for k, v in args[f"{who}_db"].items()}
                for who in CLASSES
            },
            tables={who: tuple(map(str, args["tables"][who])) for who in CLASSES},
            averaging_s=_number(args["averaging_s"]),
            dose_window_s=_number(args["dose_window_s"]),
            margin_db={str(k): _number(v) for k, v in args["margin_db"].items()},
            measured={str(k): str(v) for k, v in args.get("measured", {}).items()},
            classes={str(k): str(v) for k, v in args.get("blocks", {}).items()},
            signed_by=str(args["signed_by"]),
            signed_on=str(args["signed_on"]),
            unsigned=str(args["unsigned"]),
        )
        if not self.caps or replace(caps, at=self.caps[-1].at) != self.caps[-1]:
            self.caps.append(caps)

    def read(self, at: Moment, record: Record) -> None:
        """The guard's reading of a second."""
        args = record.args
        held = {str(k): _number(v) for k, v in args["held_db"].items()}
        blocks = {str(name): _seat_block(row) for name, row in args["blocks"].items()}
        self.readings.append(Reading(at, str(args["state"]), held, blocks))
        for panel, held_db in held.items():
            if (now := self.holding.get(panel)) is not None and held_db > now.held_db:
                self.holding[panel] = replace(now, held_db=held_db)

    def hold(self, at: Moment, record: Record) -> None:
        """A panel begins or ends being held."""
        args = record.args
        panel, held_db = str(args["panel"]), _number(args["held_db"])
        before = self.holding.pop(panel, None)
        if before is not None:
            most_db = before.held_db if args["began"] else max(before.held_db, held_db)
            self.held.append(replace(before, ended=at, held_db=most_db))
        if args["began"]:
            level_db = None if args["level_db"] is None else _number(args["level_db"])
            seat, band_hz = str(args["seat"]), _number(args["band_hz"])
            self.holding[panel] = Held(panel, record.cue, seat, band_hz, level_db, held_db, at)
        elif before is None:
            raise ValueError("nothing held this panel")

    def trip(self, at: Moment, record: Record) -> None:
        """The guard silenced the show."""
        self.trips.append(Trip(at, str(record.args["reason"])))

    def clear(self, at: Moment, record: Record) -> None:
        """Somebody cleared all that had tripped."""
        self.trips = [
            trip if trip.cleared else replace(trip, cleared=at, cleared_by=record.who)
            for trip in self.trips
        ]

    # -- the whole ---------------------------------------------------------------------------

    def evening(self, problems: tuple[str, ...]) -> Evening:
        """What was gathered; what still runs at the end of the journal runs up to it."""
        last = self.last or self.first
        if self.opened is not None:
            self.open_s += last.second - self.opened
        odd = [f"{n} '{what}' records not understood" for what, n in sorted(self.odd.items())]
        held = sorted([*self.held, *self.holding.values()], key=lambda h: h.began.sample)
        return Evening(
            heading=self.head,
            first=self.first,
            last=last,
            closed=self._closed(),
            problems=(*problems, *odd, *self.jumps),
            open_s=self.open_s,
            caps=tuple(self.caps),
            readings=tuple(self.readings),
            held=tuple(held),
            trips=tuple(self.trips),
            air=self._kept("air"),
            vouched=self._kept("vouch"),
            refused=self._kept("refused"),
            called=self._kept(*CALLED),
            outputs=self._kept("output", "stream", "left"),
            faults=self._kept("fault", "dry"),
            counters=next(reversed(self._kept("counters")), None),
        )

    def _kept(self, *kinds: str) -> tuple[Entry, ...]:
        return tuple(entry for entry in self.entries if entry.record.what in kinds)

    def _closed(self) -> bool:
        if self.records and self.records[-1].what == "left":
            return True
        newest = next(reversed(self._kept("output")), None)
        return newest is not None and newest.record.args.get("by") == "sink-close"


def _number(value: Any) -> float:
    """A finite number; ValueError or TypeError when it is none."""
    number = float(value)
    if not math.isfinite(number):
        raise ValueError(value)
    return number


def _seat_block(row: Mapping[str, Any]) -> SeatBlock:
    return SeatBlock(
        seat=str(row["seat"]),
        level_db=None if row["level_db"] is None else _number(row["level_db"]),
        band_hz=_number(row["band_hz"]),
        cap_db=_number(row["cap_db"]),
        dose_pct=_number(row["dose_pct"]),
        dose_seat=str(row["dose_seat"]),
    )


_HANDLERS: dict[str, Callable[[_Gathering, Moment, Record], None]] = {
    "clock": _Gathering.tell_clock,
    "output": _Gathering.turn_output,
    "stream": _Gathering.begin_stream,
    "texts": _Gathering.begin_show,
    "caps": _Gathering.tell_caps,
    "guard": _Gathering.read,
    "cap": _Gathering.hold,
    "trip": _Gathering.trip,
    "clear": _Gathering.clear,
    **dict.fromkeys(
        ("air", "vouch", "refused", *CALLED, "left", "fault", "dry", "counters"), _Gathering.keep
    ),
}
