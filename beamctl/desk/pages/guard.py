"""The Guard: what every seat gets, the caps, who signed, what is held and barred."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.format import View
from beamctl.desk.pages.page import Page, Rows
from beamctl.desk.rows.guard import seat_rows, standing_rows, status_rows
from beamctl.desk.rows.guardline import guard_row
from beamctl.desk.rows.readings import between, readings
from beamctl.desk.rows.shares import READINGS_FROM
from beamctl.snapshot import SeatLevel

Drawn = tuple[tuple[SeatLevel, ...] | None, int, int]


class GuardPage(Page):
    """The plan of levels and the worst seats; all keys of a show work here too."""

    NAME = "guard"
    PARTS: ClassVar = ("seats", "standing")
    _drawn: tuple[Drawn, Rows] | None = None

    def head(self, view: View, width: int) -> Rows:
        """The big readings where the terminal is tall enough, else a line of them."""
        tall = self.size.height >= READINGS_FROM
        head = readings(view, width) if tall else [*status_rows(view, width), between(view)]
        return [*head, guard_row(view.snapshot.guard, width)]

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """The plan is drawn anew only when levels came or the room changed: it is the dearest."""
        below = standing_rows(view, width, max(height // 2, 1))[:height]
        key = view.levels, width, height - len(below)
        if self._drawn is None or self._drawn[0] != key:
            self._drawn = key, seat_rows(*key)
        return {"seats": self._drawn[1], "standing": below}

    def do(self, verb: str, view: View) -> None:
        """Its one verb opens the caps."""
        self.desk.turn_to("caps")
