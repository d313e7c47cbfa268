"""The Desk: the show as it runs, for the operator in the dark."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.format import View, fit
from beamctl.desk.pages.page import Page, Rows, spaced
from beamctl.desk.rows.cues import sheet_rows
from beamctl.desk.rows.guardline import guard_row
from beamctl.desk.rows.parts import beam_rows, panel_rows, sink_row
from beamctl.desk.rows.readings import HEIGHT, readings
from beamctl.desk.rows.shares import plan


class DeskPage(Page):
    """Readings, guard, sheet, beams, panels, sink."""

    NAME = "desk"
    PARTS: ClassVar = ("sheet", "beams", "panels", "sink")

    def head(self, view: View, width: int) -> Rows:
        """The four readings, and the guard in one line."""
        return [*readings(view, width)[:HEIGHT], fit(guard_row(view.snapshot.guard, width), width)]

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """What stands by and runs; a box that is open takes its rows from here."""
        share = plan(height, len(view.snapshot.panels))
        return {
            "sheet": spaced(sheet_rows(view, width, share.sheet), share.gap),
            "beams": spaced(beam_rows(view, width, share.beams), share.gap),
            "panels": panel_rows(view, width, share.panels),
            "sink": spaced([sink_row(view, width)], share.gap),
        }
