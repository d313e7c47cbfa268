"""The caps: what the venue allows, field by field; reached from the Guard."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.format import View
from beamctl.desk.pages.page import Rows
from beamctl.desk.pages.tables import TablesPage
from beamctl.desk.rows.caps import cap_rows
from beamctl.desk.tables.place import TablePlace
from beamctl.desk.tables.tables import Table, cap_tables
from beamctl.show.show import Show


class CapsPage(TablesPage):
    """guard.toml as a table, and the caps that it leads to."""

    NAME: ClassVar = "caps"
    TITLE: ClassVar = "Caps"

    def tables(self, show: Show) -> tuple[Table, ...]:
        """One table."""
        return cap_tables(show)

    def picture(self, view: View, table: Table, width: int, height: int) -> Rows:
        """What holds now."""
        return [] if view.draft is None else cap_rows(view.draft.show, width, height)

    def out(self, place: TablePlace, tables: tuple[Table, ...]) -> None:
        """Back to the Guard."""
        self.desk.turn_to("guard")
