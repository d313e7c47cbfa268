"""The two pages of the desk."""

from __future__ import annotations

from textual.app import ComposeResult
from textual.screen import Screen

from beamctl.desk.format import Row, View
from beamctl.desk.lines import Lines
from beamctl.desk.parts import (
    beam_rows,
    help_rows,
    legend_rows,
    notice_row,
    panel_rows,
    sink_row,
)
from beamctl.desk.plan import plan
from beamctl.desk.readings import HEIGHT, readings
from beamctl.desk.sheetrows import sheet_rows
from beamctl.desk.theme import Form


class DeskPage(Screen[None], inherit_bindings=False):
    """The show: readings, sheet, beams, panels, sink, notices and keys."""

    PARTS = ("readings", "sheet", "beams", "panels", "sink", "notices", "legend")

    def __init__(self, form: Form) -> None:
        super().__init__()
        self._parts = {name: Lines(name, form) for name in self.PARTS}

    def compose(self) -> ComposeResult:
        """All parts from top to bottom."""
        yield from self._parts.values()

    def show(self, view: View | None, gone: bool) -> None:
        """Draw `view`; None while nothing has come from the host yet."""
        width, height = self.size
        legend = legend_rows(width)
        self._put("notices", [notice_row(view, width, gone)])
        self._put("legend", legend)
        if view is None:
            return
        share = plan(height, len(legend), len(view.snapshot.panels))
        stale = view.stale_s is not None
        self._put("readings", readings(view, width)[:HEIGHT], stale)
        self._put("sheet", sheet_rows(view, width, share.sheet), stale, share.gap)
        self._put("beams", beam_rows(view, width, share.beams), stale, share.gap)
        self._put("panels", panel_rows(view, width, share.panels), stale)
        self._put("sink", [sink_row(view, width)], stale, share.gap)

    def _put(self, name: str, rows: list[Row], stale: bool = False, gap: int = 0) -> None:
        part = self._parts[name]
        if part.styles.height is None or part.styles.height.value != len(rows):
            part.styles.height = len(rows)
        if part.styles.margin.top != gap:
            part.styles.margin = (gap, 0, 0, 0)
        part.show(rows, stale)


class HelpPage(Screen[None], inherit_bindings=False):
    """Keys, marks and the caution."""

    def __init__(self, form: Form) -> None:
        super().__init__()
        self._lines = Lines("help", form)

    def compose(self) -> ComposeResult:
        """One part over the whole page."""
        yield self._lines

    def show(self, view: View | None, gone: bool) -> None:
        """Draw the help; the notices are read in full here."""
        width, height = self.size
        notices = view.snapshot.notices if view else ()
        last = notice_row(view, width, gone)
        rows = help_rows(width, height - 1, notices)
        self._lines.show([*rows, *[()] * (height - 1 - len(rows)), last])
