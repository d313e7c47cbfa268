"""The house in a picture: seats signed by what is left to their caps, and the air now."""

from __future__ import annotations

from beamctl.desk.format import Role, Row, Span, fit, wrap
from beamctl.desk.rows import groundplan, seatplan
from beamctl.desk.rows.groundplan import Mark, Trace
from beamctl.desk.rows.guard import worst_rows
from beamctl.forecast.landing import corners_m
from beamctl.show.house import Block
from beamctl.show.show import Show
from beamctl.snapshot import AirView, SeatLevel

OLD_S = 30 * 60.0
PLAN = 11  # rows that the plan has before the worst seats get any
WORST = 6  # rows of their table, at most


def air_row(air: AirView, width: int) -> Row:
    """The air that beams and guard reckon with, where it comes from, and how old it is."""
    now = f"air {air.temperature_c:.1f} C  {air.humidity_pct:.0f} %  {air.pressure_kpa:.1f} kPa"
    if air.age_s is None:
        return fit((Span(now, "text"), Span(f"  from {air.source}, not read since")), width)
    minutes = int(air.age_s // 60)
    read = (
        f"  read {minutes} min ago by {air.source}" if air.source else f"  read {minutes} min ago"
    )
    old = Span("  AIR OLD", "attention") if air.age_s > OLD_S else Span("")
    return fit((Span(now, "text"), Span(read), old), width)


def house_rows(
    show: Show, levels: tuple[SeatLevel, ...] | None, chosen: str, width: int, height: int
) -> list[Row]:
    """`height` rows: the ground plan, its key, and the worst seats where there is room.

    `chosen` is the title of the table that the cursor is on; what it says stands out.
    """
    below = _key_rows(levels, width)
    spare = min(height - len(below) - PLAN, WORST)
    below += worst_rows(levels, spare) if levels else []
    marks = [*_spots(show, chosen), *_seats(show, levels, chosen)]
    room = height - len(below)
    plan = groundplan.plan_rows(show, width, room, marks, _surfaces(show, chosen))
    return [*plan, *[fit(row, width) for row in below]][: max(height, 0)]


def _key_rows(levels: tuple[SeatLevel, ...] | None, width: int) -> list[Row]:
    """What the signs mean; seats are signed by their levels once there are any."""
    words = seatplan.KEY if levels else groundplan.KEY
    return [(Span(line),) for line in wrap(words, width, 2)]


def _seats(show: Show, levels: tuple[SeatLevel, ...] | None, chosen: str) -> list[Mark]:
    """Every seat by what is left to its cap, those of the chosen block lit."""
    if not levels:
        name = chosen.removeprefix("block ")
        block = show.house.block.get(name) if name != chosen else None
        return [Mark(at_m, _plain(block)) for at_m in block.seat_points().values()] if block else []
    return [
        Mark(
            seat.at_m, sign := seatplan.sign_of(seat), _role(sign, f"block {seat.block}" == chosen)
        )
        for seat in sorted(levels, key=seatplan.urgency)
    ]


def _plain(block: Block) -> str:
    return groundplan.CREW if block.class_ == "crew" else groundplan.SEAT


def _role(sign: str, chosen: bool) -> Role:
    role = seatplan.ROLES.get(sign, "dim")
    return "text" if chosen and role == "dim" else role


def _spots(show: Show, chosen: str) -> list[Mark]:
    found = ((name, spot) for name, spot in show.house.spot.items() if f"spot {name}" == chosen)
    return [Mark(spot.at_m, groundplan.SPOT, "text", name) for name, spot in found]


def _surfaces(show: Show, chosen: str) -> list[Trace]:
    """The outline of the chosen surface."""
    found = []
    for name, surface in show.house.surface.items():
        if f"surface {name}" == chosen:
            a, b, c, d = (tuple(corner.tolist()) for corner in corners_m(surface))
            sign = groundplan.SURFACE
            found.append(Trace((a, b, c, d, a), sign, "text", name, sign))
    return found
