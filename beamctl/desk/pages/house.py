"""The House: the room as the show knows it, and the air in it."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.box import Box
from beamctl.desk.format import View
from beamctl.desk.forms import fields, read, written
from beamctl.desk.pages.page import Rows
from beamctl.desk.pages.tables import TablesPage
from beamctl.desk.rows.house import air_row, house_rows
from beamctl.desk.tables import deeds
from beamctl.desk.tables.tables import Table, house_tables
from beamctl.desk.verbs import tables as verbs
from beamctl.show.house import AirSpec
from beamctl.show.show import Show
from beamctl.snapshot import AirView

KINDS = ("block", "spot", "surface")


class HousePage(TablesPage):
    """house.toml as tables, and the ground plan with what every seat has left."""

    NAME: ClassVar = "house"
    TITLE: ClassVar = "House"

    def tables(self, show: Show) -> tuple[Table, ...]:
        """Air, spots, blocks, surfaces."""
        return house_tables(show)

    def picture(self, view: View, table: Table, width: int, height: int) -> Rows:
        """The ground plan."""
        if view.draft is None:
            return []
        return house_rows(view.draft.show, view.levels, table.title, width, height)

    def pictured(self, view: View) -> tuple[object, ...]:
        """The levels at the seats."""
        return (view.levels,)

    def foot(self, view: View, table: Table, width: int) -> Rows:
        """The air now."""
        return [air_row(view.snapshot.air, width)]

    def begin(self, show: Show) -> None:
        """Ask for a block, a spot or a surface."""
        deeds.begin(self.asking, show, KINDS, self.go_to)

    def do(self, verb: str, view: View) -> None:
        """As on every page of tables; and the air is asked for."""
        if verb == verbs.AIR_NOW.name:
            self.desk.open(self._air_box(view.snapshot.air))
        else:
            super().do(verb, view)

    def _air_box(self, now: AirView) -> Box:
        """Asks for all readings in one line."""

        def use(text: str) -> str:
            typed = text.replace(",", " ").split()
            if len(typed) != len(keys):
                return "It wants three numbers: degrees Celsius, percent, kilopascals."
            try:
                readings = {
                    key: read(AirSpec, key, word) for key, word in zip(keys, typed, strict=True)
                }
            except ValueError as error:
                return str(error)
            self.desk.ask("air", **readings)
            return ""

        keys = [field.key for field in fields(AirSpec)]
        text = "Beams and guard reckon with it once nothing sounds; house.toml stays as it is."
        wants = "temperature in C, humidity in %, pressure in kPa"
        typed = " ".join(written(getattr(now, key)) for key in keys)
        return Box("THE AIR NOW", text, wants, use=use, typed=typed, prefilled=True)
