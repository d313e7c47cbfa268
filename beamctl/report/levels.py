"""Level and dose of each seat block: the whole evening in a line, then its course."""

from __future__ import annotations

from collections.abc import Iterator

from beamctl.report.evening import Evening, SeatBlock
from beamctl.report.findings import most_dose, nearest
from beamctl.report.stretches import nearest_cap, step_for, stretches
from beamctl.report.words import Times, band, length, plain, seat_in

ROWS = 24  # of a block


def worst_of_blocks(evening: Evening, times: Times) -> Iterator[str]:
    """Per block, when it was nearest its cap, and its most dose."""
    blocks = evening.class_of
    if blocks:
        yield (
            f"{'block':<12} {'class':<5} {'nearest its cap':<16} {'seat':<9} {'band':>8} "
            f"{'level':>6} {'cap':>6} {'headroom':>8} {'dose %':>6} at"
        )
    for block, who in blocks.items():
        most = most_dose(evening, block)
        dose = f"{most.seats.dose_pct:6.1f} {seat_in(block, most.seats.dose_seat)}" if most else ""
        lead = f"{plain(block):<12} {plain(who) or '?':<5}"
        if (worst := nearest(evening, block)) is None:
            yield f"{lead} {'never heard':<16} {'':40} {dose}"
        else:
            at, figures = times.clock(worst.reading.at), _figures(block, worst.seats)
            yield f"{lead} {at:<16} {figures} {dose}"


def over_time(evening: Evening, times: Times) -> Iterator[str]:
    """Per block, the reading nearest its cap in each stretch of the evening."""
    if not evening.readings:
        return
    step_s = step_for(evening.readings, ROWS)
    yield f"In every {length(step_s)}: the reading nearest its cap, the most dose, and the most"
    yield "that any panel was held. Every single reading is in the CSV file."
    for block in evening.class_of:
        yield ""
        yield (
            f"{plain(block):<16} {'seat':<9} {'band':>8} {'level':>6} {'cap':>6} {'headroom':>8} "
            f"{'dose %':>6} {'held dB':>7}"
        )
        for stretch in stretches(evening.readings, step_s):
            told = [r.blocks[block] for r in stretch if block in r.blocks]
            if told:
                worst = nearest_cap(told)
                held_db = max((h for r in stretch for h in r.held_db.values()), default=0.0)
                dose_pct = max(seats.dose_pct for seats in told)
                held = f"{held_db:7.1f}" if held_db else ""
                at = times.clock(stretch[0].at)
                yield f"{at:<16} {_figures(block, worst)} {dose_pct:6.1f} {held}"


def _figures(block: str, seats: SeatBlock) -> str:
    """Seat, band, level, cap and headroom in their columns."""
    if seats.level_db is None or seats.headroom_db is None:
        return f"{'quiet':<9} {'':31}"
    return (
        f"{seat_in(block, seats.seat):<9} {band(seats.band_hz):>8} {seats.level_db:6.2f} "
        f"{seats.cap_db:6.1f} {seats.headroom_db:8.2f}"
    )
