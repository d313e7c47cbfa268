"""The pages of the desk. Each shows the rows that the other files make; none asks for anything."""

from __future__ import annotations

from typing import ClassVar

from textual.app import ComposeResult
from textual.screen import Screen

from beamctl.desk.boxrows import box_rows
from beamctl.desk.cautionrows import caution_rows
from beamctl.desk.format import Row, View
from beamctl.desk.guardline import guard_row
from beamctl.desk.guardrows import seat_rows, standing_rows, status_rows
from beamctl.desk.lines import Lines
from beamctl.desk.parts import (
    beam_rows,
    help_rows,
    legend_rows,
    notice_row,
    panel_rows,
    sink_row,
)
from beamctl.desk.plan import READINGS_FROM, plan
from beamctl.desk.readings import HEIGHT, between, readings
from beamctl.desk.sheetrows import sheet_rows
from beamctl.desk.theme import Form
from beamctl.snapshot import SeatLevel


class Page(Screen[None], inherit_bindings=False):
    """Rows in parts, one below the other; the last of them are notices and keys."""

    PARTS: ClassVar[tuple[str, ...]] = ()

    def __init__(self, form: Form) -> None:
        super().__init__()
        self._parts = {name: Lines(name, form) for name in self.PARTS}

    def compose(self) -> ComposeResult:
        """All parts from top to bottom."""
        yield from self._parts.values()

    def show(self, view: View | None, gone: bool) -> None:
        """Draw `view`; None while nothing has come from the host yet."""
        raise NotImplementedError

    def _foot(self, view: View | None, gone: bool) -> int:
        """Draw notices and legend, and return the rows that are left above them."""
        width, height = self.size
        legend = legend_rows(width)
        self._put("notices", [notice_row(view, width, gone)])
        self._put("legend", legend)
        return height - 1 - len(legend)

    def _put(self, name: str, rows: list[Row], stale: bool = False, gap: int = 0) -> None:
        part = self._parts[name]
        if part.styles.height is None or part.styles.height.value != len(rows):
            part.styles.height = len(rows)
        if part.styles.margin.top != gap:
            part.styles.margin = (gap, 0, 0, 0)
        part.show(rows, stale)


class DeskPage(Page):
    """The show: readings, guard, sheet, beams, panels, sink, notices and keys."""

    PARTS = ("readings", "guard", "sheet", "beams", "panels", "sink", "notices", "legend")

    def show(self, view: View | None, gone: bool) -> None:
        """Draw `view`; an open box stands where sheet, beams and panels do."""
        room = self._foot(view, gone)
        if view is None:
            return
        width = self.size.width
        share = plan(room, len(view.snapshot.panels))
        stale = view.stale_s is not None
        self._put("readings", readings(view, width)[:HEIGHT], stale)
        self._put("guard", [guard_row(view.snapshot.guard, width)], stale)
        if view.box is not None:
            boxed = share.sheet + share.beams + share.panels + share.gap
            self._put("sheet", box_rows(view.box, width, boxed), gap=share.gap)
            self._put("beams", [])
            self._put("panels", [])
        else:
            self._put("sheet", sheet_rows(view, width, share.sheet), stale, share.gap)
            self._put("beams", beam_rows(view, width, share.beams), stale, share.gap)
            self._put("panels", panel_rows(view, width, share.panels), stale)
        self._put("sink", [sink_row(view, width)], stale, share.gap)


class GuardPage(Page):
    """What every seat gets: plan, worst seats, caps and who signed, what is held and barred."""

    PARTS = ("readings", "guard", "seats", "standing", "notices", "legend")

    def __init__(self, form: Form) -> None:
        super().__init__(form)
        self._drawn: tuple[tuple[SeatLevel, ...] | None, int, int, bool] | None = None

    def show(self, view: View | None, gone: bool) -> None:
        """Draw `view`; the big readings stand here too where the terminal is tall enough."""
        room = self._foot(view, gone)
        if view is None:
            return
        width, stale = self.size.width, view.stale_s is not None
        tall = self.size.height >= READINGS_FROM
        head = readings(view, width) if tall else [*status_rows(view, width), between(view)]
        self._put("readings", head, stale)
        self._put("guard", [guard_row(view.snapshot.guard, width)], stale)
        gap = 1 if tall else 0
        body = max(room - len(head) - 1 - gap, 0)
        if view.box is not None:
            self._put("seats", box_rows(view.box, width, body), gap=gap)
            self._put("standing", [])
            self._drawn = None
            return
        below = standing_rows(view, width, max(body // 2, 1))[:body]
        self._put_seats(view.levels, body - len(below), stale, gap)
        self._put("standing", below, stale)

    def _put_seats(
        self, seats: tuple[SeatLevel, ...] | None, height: int, stale: bool, gap: int
    ) -> None:
        """Draw the plan anew only when levels came or the room changed: it is the dearest part."""
        drawn = (seats, self.size.width, height, stale)
        if drawn != self._drawn:
            self._drawn = drawn
            self._put("seats", seat_rows(seats, self.size.width, height), stale, gap)


class HelpPage(Page):
    """Keys, marks and the caution."""

    PARTS = ("help",)

    def show(self, view: View | None, gone: bool) -> None:
        """Draw the help; the notices are read in full here."""
        width, height = self.size
        notices = view.snapshot.notices if view else ()
        last = notice_row(view, width, gone)
        rows = help_rows(width, height - 1, notices)
        self._put("help", [*rows, *[()] * (height - 1 - len(rows)), last])


class CautionPage(Page):
    """The caution, over the whole screen, until somebody has read it."""

    PARTS = ("caution",)

    def __init__(self, form: Form) -> None:
        super().__init__(form)
        self.readable = False  # it has stood long enough to be read, and Enter closes it

    def show(self, view: View | None, gone: bool) -> None:
        """Draw the caution, the output's state and the notices."""
        width, height = self.size
        last = notice_row(view, width, gone)
        output = view.snapshot.output if view is not None else ""
        rows = caution_rows(width, height - 1, output, self.readable)
        self._put("caution", [*rows, last])
