"""How the rows of the terminal are shared out; the same for every picture of one show."""

from __future__ import annotations

from dataclasses import dataclass

READINGS_FROM = 34  # rows; a shorter Guard screen has the readings in one line


@dataclass(frozen=True, slots=True)
class Plan:
    """Heights in rows; `gap` is the blank rows above sheet, beams and sink."""

    sheet: int
    beams: int
    panels: int
    gap: int


def plan(height: int, panels: int) -> Plan:
    """Share out what the sink leaves of `height` rows, those between the guard and the notices."""
    room = height - 1
    gap = 1 if room >= 14 else 0
    room = max(room - 3 * gap, 0)
    panel_rows = min(panels, max(1, room // 8), room)
    beams = min(max(2, room // 4), room - panel_rows)
    return Plan(room - panel_rows - beams, beams, panel_rows, gap)
