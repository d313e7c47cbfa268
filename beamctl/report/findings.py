"""What of an evening somebody must know first, each in one sentence."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from typing import NamedTuple

from beamctl.report.evening import Evening, Reading, SeatBlock
from beamctl.report.words import Times, band, length, level, place, plain

UNTOLD_S = 2.0  # how much of the open time may lack a reading: one at each end
BY_ITSELF = {"lease-over": "the lease ran out", "sink-lost": "the sink or its engine was lost"}


class Finding(NamedTuple):
    """One line; `asks` when somebody has to look into it."""

    asks: bool
    about: str
    text: str


class Worst(NamedTuple):
    """A block at the reading that matters most."""

    reading: Reading
    block: str
    seats: SeatBlock


def findings(evening: Evening, times: Times) -> list[Finding]:
    """Everything found, in the order in which a reader needs it."""
    parts = (
        _journal,
        _signature,
        _levels,
        _dose,
        _held,
        _trips,
        _watched,
        _states,
        _silences,
        _counts,
    )
    return [found for part in parts for found in part(evening, times)]


def nearest(evening: Evening, block: str | None = None) -> Worst | None:
    """The reading with the least headroom, of one block or of all; None when all was quiet."""
    heard = (w for w in _all(evening, block) if w.seats.headroom_db is not None)
    return min(heard, key=lambda w: w.seats.headroom_db or 0.0, default=None)


def most_dose(evening: Evening, block: str | None = None) -> Worst | None:
    """The reading with the most dose, of one block or of all."""
    return max(_all(evening, block), key=lambda w: w.seats.dose_pct, default=None)


def _all(evening: Evening, block: str | None) -> Iterator[Worst]:
    for reading in evening.readings:
        for name, seats in reading.blocks.items():
            if block in (None, name):
                yield Worst(reading, name, seats)


def _journal(evening: Evening, times: Times) -> Iterator[Finding]:
    for problem in evening.problems:
        yield Finding(True, "Journal", plain(problem))
    if not evening.closed:
        text = "not closed: the show still runs, or the program or the machine ended without notice"
        yield Finding(True, "Journal", f"{text}. It tells up to {times.clock(evening.last)}")


def _signature(evening: Evening, times: Times) -> Iterator[Finding]:
    if not evening.caps:
        yield Finding(True, "Caps", "none recorded: this journal is not of a guarded show")
    for caps in evening.caps:
        since = f", from {times.clock(caps.at)}" if len(evening.caps) > 1 else ""
        if caps.unsigned:
            yield Finding(True, "Signature", f"UNSIGNED: {plain(caps.unsigned)}{since}")
        else:
            who = f"signed by {plain(caps.signed_by)} on {plain(caps.signed_on)}"
            yield Finding(False, "Signature", who + since)
    for entry in evening.vouched:
        who, name = plain(entry.record.who), plain(entry.record.args.get("name", ""))
        text = f"no seats were declared: {name or who} answered for that at"
        yield Finding(True, "Seats", f"{text} {times.clock(entry.at)} ({who})")


def _levels(evening: Evening, times: Times) -> Iterator[Finding]:
    worst = nearest(evening)
    if worst is None:
        if evening.readings:
            yield Finding(False, "Level", "nothing was heard at any seat")
        return
    seats = worst.seats
    head_db = seats.headroom_db or 0.0
    side = "under" if head_db >= 0.0 else "OVER"
    yield Finding(
        head_db < 0.0,
        "Nearest",
        f"{place(worst.block, seats.seat)}, {level(seats.level_db)} in the {band(seats.band_hz)} "
        f"band at {times.clock(worst.reading.at)}: {abs(head_db):.2f} dB {side} its cap of "
        f"{seats.cap_db:.1f} dB",
    )
    over = sum(
        any((b.headroom_db or 0.0) < 0.0 for b in reading.blocks.values())
        for reading in evening.readings
    )
    yield Finding(over > 0, "Over cap", f"{over} of {len(evening.readings)} readings")


def _dose(evening: Evening, times: Times) -> Iterator[Finding]:
    most = most_dose(evening)
    if most is None:
        return
    window = f" for {length(evening.caps[-1].dose_window_s)}" if evening.caps else ""
    where = place(most.block, most.seats.dose_seat)
    text = f"at most {most.seats.dose_pct:.1f} % of the cap{window}: {where}"
    yield Finding(most.seats.dose_pct > 100.0, "Dose", f"{text} at {times.clock(most.reading.at)}")


def _held(evening: Evening, times: Times) -> Iterator[Finding]:
    if not evening.held:
        yield Finding(False, "Held", "no panel was held under its cap")
    for panel in dict.fromkeys(held.panel for held in evening.held):
        those = [held for held in evening.held if held.panel == panel]
        most = max(those, key=lambda held: held.held_db)
        total_s = sum(evening.held_s(held) for held in those)
        yield Finding(
            True,
            "Held",
            f"{plain(panel)} {count(len(those), 'time')}, {length(total_s)} in all; most "
            f"{most.held_db:.1f} dB at {times.clock(most.began)}{cue(most.cue)}, for "
            f"{plain(most.seat)}",
        )


def _trips(evening: Evening, times: Times) -> Iterator[Finding]:
    if not evening.trips:
        yield Finding(False, "Tripped", "never")
    for trip in evening.trips:
        end = "NOT CLEARED"
        if trip.cleared is not None:
            end = f"cleared at {times.clock(trip.cleared)} by {plain(trip.cleared_by)}"
        yield Finding(True, "Tripped", f"{times.clock(trip.at)} {plain(trip.reason)}; {end}")


def _watched(evening: Evening, times: Times) -> Iterator[Finding]:
    told_s = float(len(evening.readings))
    text = f"open for {length(evening.open_s)}, {count(len(evening.readings), 'reading')} of levels"
    if evening.open_s - told_s > UNTOLD_S:
        without = length(evening.open_s - told_s)
        yield Finding(True, "Output", f"{text}: {without} WITHOUT ONE")
    else:
        yield Finding(False, "Output", text)


def _states(evening: Evening, times: Times) -> Iterator[Finding]:
    states = Counter(reading.state for reading in evening.readings)
    if states:
        told = ", ".join(f"{plain(state)} {number}" for state, number in states.most_common())
        yield Finding("BLIND" in states, "Guard", f"readings by its state: {told}")


def _silences(evening: Evening, times: Times) -> Iterator[Finding]:
    why = Counter(str(entry.record.args.get("by")) for entry in evening.outputs)
    for by, said in BY_ITSELF.items():
        if why[by]:
            yield Finding(True, "Silence", f"{said}: {count(why[by], 'time')}")


def _counts(evening: Evening, times: Times) -> Iterator[Finding]:
    refused, faults = len(evening.refused), len(evening.faults)
    gos = sum(entry.record.what == "go" for entry in evening.called)
    yield Finding(False, "Refused", count(refused, "request"))
    yield Finding(faults > 0, "Faults", f"{faults} (faults and dry rings)")
    yield Finding(False, "Cues", count(gos, "GO"))


def cue(ref: str) -> str:
    """Where a cue is said in a sentence; "" for none."""
    return f" in cue {plain(ref)}" if ref else ""


def count(number: int, what: str) -> str:
    """ "1 time", "3 times"."""
    return f"{number} {what}{'' if number == 1 else 's'}"
