"""The journal as people read it while it is written: a line for whatever tells something."""

from __future__ import annotations

from collections import deque
from collections.abc import Callable, Iterable
from datetime import datetime

from beamctl.report.words import band, level, plain
from beamctl.show.records import Record

KEPT = 1_000


class Log:
    """Remembers the newest lines."""

    def __init__(self) -> None:
        self._lines: deque[str] = deque(maxlen=KEPT)

    def take(self, records: Iterable[Record]) -> None:
        """Put records into words, as of now."""
        for record in records:
            if (words := WORDS.get(record.what)) is not None:
                clock = f"{datetime.now():%H:%M:%S.%f}"[:-5]
                who = f" ({plain(record.who)})" if record.who else ""
                self._lines.append(f"{clock} {plain(words(record))}{who}")

    def newest(self, most: int) -> list[str]:
        """At most so many of the newest lines, oldest first."""
        return list(self._lines)[-most:] if most > 0 else []


def _cue(what: str) -> Callable[[Record], str]:
    return lambda record: f"{what} {record.cue}"


def _said(what: str) -> Callable[[Record], str]:
    return lambda record: what.format(**record.args)


def _refused(record: Record) -> str:
    return "{asked} refused, {reason}: {text}".format(**record.args)


def _held(record: Record) -> str:
    args = record.args
    if not args["began"]:
        return f"{args['panel']} is held no more"
    return (
        f"{args['panel']} held by {args['held_db']:.1f} dB, cue {record.cue or '-'}: "
        f"{args['seat']}, {level(args['level_db'])} in the {band(args['band_hz'])} band"
    )


def _mode(record: Record) -> str:
    by = f", {name}" if (name := record.args["name"]) else ""
    return f"mode {record.args['from']} to {record.args['to']}{by}"


def _try(record: Record) -> str:
    args = record.args
    what = f"cue {args['of']} act {args['act'] + 1} at trim {args['trim_db']:g} dB"
    return f"{record.beam} sounds {what}, by itself"


def _gate(record: Record) -> str:
    return f"the way out {'opens' if record.args['open'] else 'shuts'}, {record.args['why']}"


def _fault(record: Record) -> str:
    return "fault: " + ", ".join(f"{name} on feed {feed}" for name, feed in record.args.items())


WORDS: dict[str, Callable[[Record], str]] = {
    "go": _cue("GO"),
    "done": _cue("done"),
    "tail": _cue("tail"),
    "standby": lambda record: f"stand-by {record.cue or 'off'}",
    "hold": _said("hold"),
    "carry-on": _said("carry on"),
    "ready": _said("ready"),
    "acknowledge": _said("notice taken off"),
    "refused": _refused,
    "output": _said("{from} to {to}: {by}"),
    "trip": _said("TRIPPED, {reason}"),
    "clear": _said("trip cleared"),
    "vouch": _said("{name} answers for a house without seats"),
    "cap": _held,
    "gate": _gate,
    "dry": _said("the ring ran dry"),
    "fault": _fault,
    "mode": _mode,
    "try": _try,
    "try-end": lambda record: f"{record.beam}: the try ends",
    "air": _said("air {temperature_c:g} °C, {humidity_pct:g} %, {pressure_kpa:g} kPa"),
    "edit": _said("edit {version}, {mode}: {label}"),
    "save": _said("saved, version {version}"),
    "texts": _said("engine and guard start anew with what was edited"),
    "stream": lambda record: f"samples begin at {record.sample}",
    "left": _said("samples end: {read} left of {written}"),
}
