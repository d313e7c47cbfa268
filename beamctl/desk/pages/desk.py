"""The Desk: the show as it runs, for the operator in the dark."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.desk import Desk
from beamctl.desk.format import Span, View, beside, two_ends
from beamctl.desk.link import Draft
from beamctl.desk.pages.page import Page, Rows, spaced
from beamctl.desk.rows.cues import sheet_rows
from beamctl.desk.rows.groundplan import beam_trace, plan_rows
from beamctl.desk.rows.guardline import guard_row
from beamctl.desk.rows.parts import beam_rows, panel_rows, sink_row
from beamctl.desk.rows.readings import HEIGHT, readings
from beamctl.desk.rows.shares import GAP, plan, plan_width
from beamctl.desk.rows.wireline import wire_row
from beamctl.forecast.landing import Room


class DeskPage(Page):
    """Readings, guard, sheet and ground plan, beams, panels, sink, wire."""

    NAME = "desk"
    PARTS: ClassVar = ("sheet", "beams", "panels", "sink")

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self._room: tuple[Draft, Room] | None = None
        self._planned: tuple[object, Rows] | None = None

    def head(self, view: View, width: int) -> Rows:
        """The four readings; the guard in one line, and the mode."""
        mode = Span(view.snapshot.mode, "text")
        guard = guard_row(view.snapshot.guard, width - len(mode.text) - GAP)
        return [*readings(view, width)[:HEIGHT], two_ends(guard, (mode,), width)]

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """What stands by and runs; a box that is open takes its rows from here."""
        share = plan(height, len(view.snapshot.panels))
        below = [sink_row(view, width), wire_row(view, width)][: 1 + share.wire]
        return {
            "sheet": spaced(self._sheet(view, width, share.sheet), share.gap),
            "beams": spaced(beam_rows(view, width, share.beams), share.gap),
            "panels": panel_rows(view, width, share.panels),
            "sink": spaced(below, share.gap),
        }

    def _sheet(self, view: View, width: int, height: int) -> Rows:
        """The next cues, and the ground plan with the live beams where there is room for it."""
        wide = plan_width(width, height)
        if not wide or view.draft is None:
            return sheet_rows(view, width, height)
        at = width - wide
        cues = sheet_rows(view, at - GAP, height)
        return beside(cues, self._plan(view, view.draft, wide, height), at, width)

    def _plan(self, view: View, draft: Draft, width: int, height: int) -> Rows:
        """Drawn anew only when a beam points elsewhere, or the room is another."""
        if self._room is None or self._room[0] is not draft:
            self._room = draft, Room(draft.show)
        panels = draft.show.rig.panel
        beams = [b for b in view.snapshot.beams if b.sound and b.panel in panels]
        key = draft, width, height, tuple((b.panel, b.peak_deg or b.aim_deg) for b in beams)
        if self._planned is None or self._planned[0] != key:
            traces = [beam_trace(draft.show, self._room[1], beam) for beam in beams]
            self._planned = key, plan_rows(draft.show, width, height, traces=traces)
        return self._planned[1]
