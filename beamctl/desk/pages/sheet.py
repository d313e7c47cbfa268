"""The Sheet: the cues, and the one under the cursor in full, for whoever writes the show."""

from __future__ import annotations

from dataclasses import replace
from typing import ClassVar

from beamctl.desk import sheetdeeds
from beamctl.desk.desk import Desk
from beamctl.desk.format import Row, View, fit
from beamctl.desk.pages.page import Page, Rows, filled
from beamctl.desk.rows.guard import status_rows
from beamctl.desk.rows.sheetcue import Found, Line, cue_lines
from beamctl.desk.rows.sheetframe import Frame, frame, heading_row, windowed
from beamctl.desk.rows.sheetlist import Signs, kept_in, list_rows
from beamctl.desk.sheetdeeds import Here
from beamctl.desk.sheetplace import Lifted, Place
from beamctl.desk.verbs import sheet as verbs


class SheetPage(Page):
    """Moves the cursor and draws; what changes the show is in `sheetdeeds`."""

    NAME = "sheet"
    PARTS: ClassVar = ("sheet",)

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self._place = Place()
        self._lifted = Lifted()
        self._known = ("", 0)  # the shared cursor as this page left it
        self._tops = [0, 0]  # first row that shows, of the list and of the cue
        self._frame = frame(0, 0, False)
        self._lines: list[Line] = []
        self._drawn: tuple[object, Rows] | None = None
