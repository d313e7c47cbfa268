"""The Rig: the panels as they hang, their cells, feeds and looms."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.format import View
from beamctl.desk.pages.page import Rows
from beamctl.desk.pages.tables import TablesPage
from beamctl.desk.rows import parts
from beamctl.desk.rows.rig import panel_rows
from beamctl.desk.tables import deeds
from beamctl.desk.tables.tables import Table, rig_tables
from beamctl.show.show import Show

MOST_DRIVES = 4  # rows of panels below


class RigPage(TablesPage):
    """rig.toml as tables, the chosen panel's cells, and how hard every panel is driven."""

    NAME: ClassVar = "rig"
    TITLE: ClassVar = "Rig"

    def tables(self, show: Show) -> tuple[Table, ...]:
        """The panels, then what holds for all of them."""
        return rig_tables(show)

    def picture(self, view: View, table: Table, width: int, height: int) -> Rows:
        """The panel under the cursor."""
        if view.draft is None or not table.named:
            return []
        return panel_rows(view.draft.show, str(table.place[-1]), width, height)

    def foot(self, view: View, table: Table, width: int) -> Rows:
        """Drive now."""
        return parts.panel_rows(view, width, min(len(view.snapshot.panels), MOST_DRIVES))

    def begin(self, show: Show) -> None:
        """Ask for the name of a panel."""
        deeds.begin(self.asking, show, ("panel",), self.go_to)
