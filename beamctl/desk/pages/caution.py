"""The caution, over the whole screen, until somebody has read it."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.desk import Desk
from beamctl.desk.format import View
from beamctl.desk.pages.page import Page, Rows
from beamctl.desk.rows.caution import caution_rows
from beamctl.desk.rows.parts import notice_row


class CautionPage(Page):
    """Shown when a show is first opened on this computer."""

    NAME = "caution"
    PARTS: ClassVar = ("caution",)

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self.readable = False  # it has stood long enough to be read, and Enter closes it

    def show(self, view: View | None, gone: bool) -> None:
        """Draw the caution, the output's state and the notices."""
        width, height = self.size
        output = view.snapshot.output if view is not None else ""
        self._put("caution", caution_rows(width, height - 1, output, self.readable))
        self._put("notices", [notice_row(view, width, gone)])

    def head(self, view: View, width: int) -> Rows:
        """Nothing."""
        return []

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """Nothing: it is drawn before there is a view, too."""
        return {}
