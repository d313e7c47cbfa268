"""The lists of a report: every hold, trip, refusal, GO, output state and fault."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterator, Sequence
from itertools import groupby

from beamctl.report.evening import Entry, Evening
from beamctl.report.findings import count
from beamctl.report.words import Times, band, length, level, plain


def holds(evening: Evening, times: Times) -> Iterator[str]:
    """Every time a panel was held under its cap."""
    for held in evening.held:
        until = times.clock(held.ended) if held.ended else "the journal's end"
        at_cue = f"cue {plain(held.cue)}" if held.cue else "no cue"
        yield (
            f"{times.clock(held.began):<12} {plain(held.panel)}, {at_cue}: held by up to "
            f"{held.held_db:.1f} dB for {length(evening.held_s(held))}, until {until}; "
            f"for {plain(held.seat)}, {level(held.level_db)} in the {band(held.band_hz)} band"
        )


def trips(evening: Evening, times: Times) -> Iterator[str]:
    """Every trip, how it was cleared, by whom, and when sound came back."""
    opened = [e.at for e in evening.outputs if e.record.args.get("to") == "OPEN"]
    for trip in evening.trips:
        yield f"{times.clock(trip.at):<12} {plain(trip.reason)}"
        if trip.cleared is None:
            yield f"{'':<12} NOT CLEARED"
            continue
        cleared = trip.cleared
        back = next((at for at in opened if at.sample >= cleared.sample), None)
        open_again = f"open again at {times.clock(back)}" if back else "not opened again"
        yield (
            f"{times.clock(cleared):<12} cleared by {plain(trip.cleared_by)} with the typed word; "
            f"{open_again}"
        )


def refusals(evening: Evening, times: Times) -> Iterator[str]:
    """Every refusal; the same one time after time is one line with its number."""

    def same(entry: Entry) -> tuple[str, ...]:
        record = entry.record
        asked = record.args.get("asked", record.args.get("action", ""))
        texts = (asked, record.args.get("reason", ""), record.args.get("text", ""), record.who)
        return tuple(map(str, texts))

    for those in _runs(evening.refused, same):
        asked, reason, text, who = same(those[0])
        yield (
            f"{times.clock(those[0].at):<12} {plain(asked)} refused, {plain(reason)}: {plain(text)}"
            f"{_by(who)}{_times(those, times)}"
        )


def acts(evening: Evening, times: Times) -> Iterator[str]:
    """Every GO with its time, and what else was done to running cues."""
    for entry in evening.called:
        record = entry.record
        what = "GO" if record.what == "go" else record.what
        words = (what, record.cue, evening.heading.cues.get(record.cue, ""))
        said = "  ".join(plain(word) for word in words if word)
        yield f"{times.clock(entry.at):<12} {said}{_by(record.who)}"


def states(evening: Evening, times: Times) -> Iterator[str]:
    """Every output state, and every sink that was opened or left."""
    yield f"Sink asked   {plain(evening.heading.sink)}"
    for entry in evening.outputs:
        record, args = entry.record, entry.record.args
        if record.what == "output":
            what = f"{args.get('from', '?')} to {args.get('to', '?')}: {args.get('by', '?')}"
        elif record.what == "stream":
            told = [f"{key} {args[key]}" for key in ("sink", "route", "priority") if key in args]
            what = f"samples begin at {record.sample}{': ' if told else ''}{', '.join(told)}"
        else:
            what = f"samples end: {args.get('read', '?')} left of {args.get('written', '?')}"
        yield f"{times.clock(entry.at):<12} {plain(what)}{_by(record.who)}"


def faults(evening: Evening, times: Times) -> Iterator[str]:
    """Every fault and dry ring, and the last counters."""

    def same(entry: Entry) -> tuple[str, str]:
        return entry.record.what, str(sorted(entry.record.args.items()))

    for those in _runs(evening.faults, same):
        record = those[0].record
        if record.what == "dry":
            what = "the ring ran dry: zeros, then a rise"
        else:
            what = ", ".join(f"{name} on feed {feed}" for name, feed in record.args.items())
        yield f"{times.clock(those[0].at):<12} {plain(what)}{_times(those, times)}"
    if evening.counters is not None:
        args = evening.counters.record.args
        told = ", ".join(f"{key} {value}" for key, value in args.items())
        yield f"Counters     {plain(told)}"


def _runs(entries: Sequence[Entry], same: Callable[[Entry], Hashable]) -> Iterator[Sequence[Entry]]:
    """Neighbours that tell the same thing."""
    for _, those in groupby(entries, same):
        yield list(those)


def _times(those: Sequence[Entry], times: Times) -> str:
    if len(those) == 1:
        return ""
    return f"; {count(len(those), 'time')}, the last at {times.clock(those[-1].at)}"


def _by(who: str) -> str:
    return f" ({plain(who)})" if who else ""
