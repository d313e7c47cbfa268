"""The Log: the journal of this evening in words."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.box import Box
from beamctl.desk.desk import Desk
from beamctl.desk.format import Row, View
from beamctl.desk.pages.page import Page, Rows
from beamctl.desk.rows.guard import status_rows
from beamctl.desk.rows.heading import heading_row
from beamctl.desk.rows.log import Window, dropped, line_rows, narrowed, window_rows
from beamctl.desk.verbs import tables as verbs

FAR = 100_000  # rows; more than there are


class LogPage(Page):
    """Follows the newest line, until somebody moves back."""

    NAME: ClassVar = "log"
    PARTS: ClassVar = ("log",)

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self._window, self._word = Window(), ""
        self._key: tuple[tuple[str, ...], str, int] = ((), "", 0)
        self._kept: tuple[str, ...] = ()
        self._rows: list[Row] = []
        self._height = 1

    def head(self, view: View, width: int) -> Rows:
        """The show in one line, then what became of the newest deed."""
        return [*status_rows(view, width), heading_row(view, "Log", width)]

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """The rows around the place that was moved to."""
        self._height = max(height - 1, 1)
        if self._key != (key := (view.log, self._word, width)):
            self._take(*key)
        return {"log": window_rows(self._rows, self._window, self._word, width, height)}

    def _take(self, log: tuple[str, ...], word: str, width: int) -> None:
        """Make the rows anew; those that show keep their place when old lines go."""
        lines = narrowed(log, word)
        if (word, width) == self._key[1:]:
            gone = self._kept[: dropped(self._kept, lines)]
            self._window = self._window.kept(len(line_rows(gone, width)))
        else:
            self._window = Window()
        self._kept, self._rows = lines, line_rows(lines, width)
        self._key = log, word, width

    def do(self, verb: str, view: View) -> None:
        """Move, or narrow."""
        page = max(self._height - 1, 1)
        moves = {
            verbs.LOG_UP.name: -1,
            verbs.LOG_DOWN.name: 1,
            verbs.LOG_PAGE_UP.name: -page,
            verbs.LOG_PAGE_DOWN.name: page,
            verbs.LOG_FIRST.name: -FAR,
            verbs.LOG_LAST.name: FAR,
        }
        if verb in moves:
            self.scroll(moves[verb], view)
        elif verb == verbs.LOG_NARROW.name:
            self.desk.open(self._word_box())

    def scroll(self, by: int, view: View) -> None:
        """Move so many rows."""
        self._window = self._window.moved(by, len(self._rows), self._height)

    def _word_box(self) -> Box:
        def use(text: str) -> str:
            self._word = text
            return ""

        text = "Only rows that have it are shown; empty shows all."
        return Box("NARROW THE LOG", text, "a word or a few", use=use, typed=self._word)
