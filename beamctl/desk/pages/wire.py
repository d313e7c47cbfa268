"""The Wire."""

from __future__ import annotations

from beamctl.desk.format import View
from beamctl.desk.pages.page import Page, Rows, filled
from beamctl.desk.rows.guard import status_rows


class WirePage(Page):
    """To be built."""

    NAME = "wire"

    def head(self, view: View, width: int) -> Rows:
        """The show in one line."""
        return status_rows(view, width)

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """Nothing yet."""
        return {"body": filled([], height)}
