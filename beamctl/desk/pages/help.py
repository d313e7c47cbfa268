"""Help: what the keys do on the screen it was called from, the marks, notices and the caution."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.desk import Desk
from beamctl.desk.format import Span, View
from beamctl.desk.pages.page import Page, Rows, filled
from beamctl.desk.rows.parts import help_rows


class HelpPage(Page):
    """The notices are read in full here."""

    NAME = "help"
    PARTS: ClassVar = ("help",)

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self.about = "desk"  # the screen whose keys it tells
        self._first = self._last = 0

    def head(self, view: View, width: int) -> Rows:
        """Nothing."""
        return []

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """As much of it as there is room for; arrows move the rest in."""
        helps = self.desk.keymap.helps(self.about, view.snapshot.mode != "SHOW")
        rows = help_rows(helps, width, view.snapshot.notices)
        self._last = max(len(rows) - height + 1, 0) if len(rows) > height else 0
        self._first = min(self._first, self._last)
        if not self._last:
            return {"help": filled(rows, height)}
        shown = rows[self._first : self._first + height - 1]
        more = f"rows {self._first + 1} to {self._first + len(shown)} of {len(rows)}: arrows move"
        return {"help": [*filled(shown, height - 1), (Span(more, "text"),)]}

    def legend(self, view: View | None, width: int) -> Rows:
        """The page itself tells the keys."""
        return []

    def scroll(self, by: int, view: View) -> None:
        """Move the text."""
        self._first = max(0, min(self._first + by, self._last))
