"""What stands on the Guard screen: plan and worst seats, who signed, what is held and barred."""

from __future__ import annotations

from itertools import groupby

from beamctl.caution import CAUTION_LINE
from beamctl.desk.format import (
    BLANK,
    Role,
    Row,
    Span,
    View,
    clock,
    fit,
    length,
    level,
    pad,
    wrap,
)
from beamctl.desk.rows.cues import MARKS
from beamctl.desk.rows.guardline import held_words, is_signed
from beamctl.desk.rows.parts import flow
from beamctl.desk.rows.seatplan import KEY, left_db, plan_rows, sign_of, urgency
from beamctl.snapshot import GuardView, SeatLevel

TABLE = 46  # cells of the table of worst seats
_GAP = 2
_MOST_OF_A_BLOCK = 5
_NAME = 14
_HEADING = f"  {pad('seat', _NAME)}{'band':>6}{'dB':>6}{'cap':>6}{'left':>6}{'dose':>6}"
_ROLES: dict[str, Role] = {"!": "alarm", "3": "attention"}


def status_rows(view: View, width: int) -> list[Row]:
    """What Enter would fire and where the output is, in place of the big readings."""
    seen = view.snapshot
    title = next((cue.title for cue in view.sheet.cues if cue.ref == seen.standby), "")
    since = "no GO yet" if seen.since_go_s is None else f"{clock(seen.since_go_s)} since GO"
    stands: Row = (Span("nothing stands by"),)
    if seen.standby:
        mark = MARKS["barred" if seen.states.get(seen.standby) == "barred" else "standing by"]
        stands = (Span(f"{mark} stand by {seen.standby}", "text"), Span(f"  {title}"))
    right = (Span(seen.output, _output_role(seen.output)), Span(f"  {since}"))
    room = max(width - length(right) - _GAP, 0)
    left = fit(stands, room)
    return [fit((*left, Span(" " * (room + _GAP - length(left))), *right), width)]


def seat_rows(seats: tuple[SeatLevel, ...] | None, width: int, height: int) -> list[Row]:
    """`height` rows: the plan, and the worst seats beside it where both find room."""
    if not seats:
        why = "waiting for levels" if seats is None else "no seat is declared: nothing is measured"
        row = fit((Span(why, "dim" if seats is None else "attention"),), width)
        return [row, *[BLANK] * (height - 1)][: max(height, 0)]
    table = worst_rows(seats, height)
    table += [BLANK] * (height - len(table))
    room = width - TABLE - _GAP
    if room < TABLE // 3:  # too narrow for both
        return [fit(row, width) for row in table]
    plan = plan_rows(seats, room, height)
    return [
        fit((*row, Span(" " * (room - length(row) + _GAP)), *beside), width)
        for row, beside in zip(plan, table, strict=True)
    ]


def standing_rows(view: View, width: int, most: int) -> list[Row]:
    """The key of the plan, who signed, dose, what is held, the barred cues, in `most` rows or as
    many as it takes to say that there are more; the caution."""
    guard = view.snapshot.guard
    role: Role = "dim" if is_signed(guard.signed) else "attention"
    rows: list[Row] = [(Span(KEY),)]
    rows.append((Span(guard.signed or "UNSIGNED", role), Span(f"  margin {guard.margin_db:g} dB")))
    rows.append((Span(_dose(guard)),))
    if guard.held_db:
        held = sorted(guard.held_db.items())
        rows += flow([(Span(held_words(*panel), "attention"),) for panel in held], width)
    rows += _barred(view.snapshot.barred, width, max(most - len(rows) - 1, 1))
    return [fit(row, width) for row in (*rows, (Span(CAUTION_LINE),))]


def worst_rows(seats: tuple[SeatLevel, ...], height: int) -> list[Row]:
    """A heading and the worst seats of every block, the worst block first; blocks left out are
    counted in the last row."""
    blocks = _by_block(seats)
    if height < 2 or not blocks:
        return []
    each = min(max((height - 1) // len(blocks), 1), _MOST_OF_A_BLOCK)
    rows: list[Row] = [(Span(_HEADING),)]
    rows += [worst_row(seat) for block in blocks for seat in block[:each]]
    if len(rows) > height:
        rows = [*rows[: height - 1], (Span(f"and {len(rows) - height + 1} more blocks", "text"),)]
    return rows


def worst_row(seat: SeatLevel) -> Row:
    """One seat: sign of the plan, name, band, level, cap and what is left in dB, dose."""
    sign = sign_of(seat)
    left = left_db(seat)
    name = f"{seat.block} {seat.name.removeprefix(f'{seat.block} ')}"
    band = f"{seat.band_hz / 1000.0:g}k" if left is not None else ""
    numbers = f"{band:>6}{level(seat.level_db):>6}{level(seat.cap_db):>6}{level(left):>6}"
    numbers += f"{f'{seat.dose_pct:.0f}%':>6}"
    role = _ROLES.get(sign, "dim")
    return Span(f"{sign} ", role), Span(pad(name, _NAME)), Span(numbers, role)


def _dose(guard: GuardView) -> str:
    most = f"dose {guard.dose_pct:.0f} % of its window"
    return f"{most} at {guard.dose_seat}, the most of any seat" if guard.dose_seat else most


def _barred(barred: dict[str, str], width: int, height: int) -> list[Row]:
    """Every barred cue and why, in full or in one row each; those beyond `height` are counted."""
    if not barred:
        return [(Span("no cue is barred"),)]
    for lines in (3, 1):
        rows = [row for cue in barred.items() for row in _barred_cue(*cue, width, lines)]
        if len(rows) <= height:
            return rows
    more = len(barred) - height + 1
    return [*rows[: height - 1], (Span(f"{MARKS['barred']} and {more} more", "attention"),)]


def _barred_cue(ref: str, why: str, width: int, lines: int) -> list[Row]:
    head = f"{MARKS['barred']} {pad(ref, 6)} "
    first, *more = wrap(why, width - len(head), lines) or [""]
    return [
        (Span(head, "attention"), Span(first)),
        *[(Span(" " * len(head) + line),) for line in more],
    ]


def _by_block(seats: tuple[SeatLevel, ...]) -> list[list[SeatLevel]]:
    """The seats of each block, the worst first, and the block with the worst seat first."""
    named = sorted(seats, key=lambda seat: seat.block)
    blocks = [
        sorted(block, key=urgency) for _, block in groupby(named, key=lambda seat: seat.block)
    ]
    return sorted(blocks, key=lambda block: urgency(block[0]))


def _output_role(output: str) -> Role:
    looks: dict[str, Role] = {
        "OPEN": "live",
        "HUSHED": "attention",
        "TRIPPED": "alarm",
        "LOST": "alarm",
    }
    return looks.get(output, "text")
