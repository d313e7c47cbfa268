"""How the cells of the terminal are shared out; the same for every picture of one show."""

from __future__ import annotations

from dataclasses import dataclass

from beamctl.desk.rows.groundplan import LEAST

READINGS_FROM = 34  # rows; a shorter Guard screen has the readings in one line
PLAN_FROM = 110  # cells; a narrower Desk has no ground plan
PLAN_SHARE, WIDEST_PLAN = 0.3, 72
GAP = 2  # cells between the sheet and the plan


@dataclass(frozen=True, slots=True)
class Plan:
    """Heights in rows; `gap` is the blank rows above sheet, beams and sink."""

    sheet: int
    beams: int
    panels: int
    gap: int
    wire: int = 0


def plan(height: int, panels: int) -> Plan:
    """Share out what the sink leaves of `height` rows, those between the guard and the notices."""
    room = height - 1
    gap = wire = 1 if room >= 14 else 0
    room = max(room - 3 * gap - wire, 0)
    panel_rows = min(panels, max(1, room // 8), room)
    beams = min(max(2, room // 4), room - panel_rows)
    return Plan(room - panel_rows - beams, beams, panel_rows, gap, wire)


def plan_width(width: int, rows: int) -> int:
    """Cells of the ground plan beside `rows` rows of the sheet; 0 where it would tell nothing."""
    if width < PLAN_FROM or rows < LEAST[1]:
        return 0
    return min(round(width * PLAN_SHARE), WIDEST_PLAN)
