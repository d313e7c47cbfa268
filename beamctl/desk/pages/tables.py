"""A page of tables: which there are, what the chosen one says, and a picture of them."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.asking import Asking
from beamctl.desk.desk import Desk
from beamctl.desk.format import Span, View
from beamctl.desk.pages.page import Page, Rows, filled
from beamctl.desk.rows.guard import status_rows
from beamctl.desk.rows.heading import heading_row
from beamctl.desk.rows.tables import Shares, field_at, field_rows, list_rows, shares, table_at
from beamctl.desk.tables import deeds
from beamctl.desk.tables.place import TablePlace
from beamctl.desk.tables.tables import Table
from beamctl.desk.verbs import tables as verbs
from beamctl.show.show import Show

MOVES = {verbs.UP.name: -1, verbs.DOWN.name: 1, verbs.FIRST.name: -9999, verbs.LAST.name: 9999}


class TablesPage(Page):
    """What House, Rig, Wire and the caps have in common.

    TITLE     of the page
    PICTURED  whether there is a picture beside the tables
    """

    PARTS: ClassVar = ("tables", "foot")
    TITLE: ClassVar[str] = ""
    PICTURED: ClassVar[bool] = True

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self.asking = Asking(desk)
        self._place = TablePlace()
        self._shares, self._height = Shares(0, 0, 0), 0
        self._drawn: tuple[object, Rows] | None = None

    # -- what each page has of its own ---------------------------------------------------------

    def tables(self, show: Show) -> tuple[Table, ...]:
        """The tables, in the order of the list; never none."""
        raise NotImplementedError

    def picture(self, view: View, table: Table, width: int, height: int) -> Rows:
        """Rows at the right; drawn anew when the show or what `pictured` names has changed."""
        return []

    def pictured(self, view: View) -> tuple[object, ...]:
        """What the picture is drawn from besides the show."""
        return ()

    def foot(self, view: View, table: Table, width: int) -> Rows:
        """Rows below everything, which may change at any time."""
        return []

    def begin(self, show: Show) -> None:
        """Ask what to begin; only called where the verb works."""

    # -- drawing -------------------------------------------------------------------------------

    def head(self, view: View, width: int) -> Rows:
        """The show in one line, then what became of the newest deed."""
        return [*status_rows(view, width), heading_row(view, self.TITLE, width)]

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """What changes with the show and the cursor, and the rows below it."""
        if view.draft is None:
            return {"tables": filled([(Span("waiting for the show"),)], height)}
        tables = self.tables(view.draft.show)
        self._place = self._place.within(tables)
        table = self._place.table(tables)
        foot = self.foot(view, table, width)[: max(height - 1, 0)]
        height -= len(foot)
        key = (view.draft, self._place, view.snapshot.mode, width, height, *self.pictured(view))
        if self._drawn is None or self._drawn[0] != key:
            self._drawn = key, self._rows(view, tables, width, height)
        return {"tables": self._drawn[1], "foot": foot}

    def _rows(self, view: View, tables: tuple[Table, ...], width: int, height: int) -> Rows:
        place, table = self._place, self._place.table(tables)
        inside = place.line is not None and view.snapshot.mode != "SHOW"
        cells = shares(tables, width, inside, self.PICTURED)
        self._shares, self._height = cells, height
        listed = list_rows(tables, place.at, cells.tables, height)
        fields = field_rows(table, place.line, cells.fields, height)
        picture = self.picture(view, table, cells.picture, height) if cells.picture else []
        return filled(cells.joined(listed, fields, picture, width), height)

    # -- deeds ---------------------------------------------------------------------------------

    def do(self, verb: str, view: View) -> None:
        """Move, or change the show."""
        if view.draft is None:
            return
        tables = self.tables(view.draft.show)
        place = self._place.within(tables)
        field = place.field(tables)
        if verb in MOVES:
            self._place = place.moved(MOVES[verb], tables)
        elif verb == verbs.OUT.name:
            self.out(place, tables)
        elif verb == verbs.NEW.name:
            self.begin(view.draft.show)
        elif verb == verbs.RENAME.name:
            deeds.rename(self.asking, self.desk, place.table(tables), self.go_to)
        elif verb == verbs.TAKE_AWAY.name:
            deeds.take_away(self.asking, self.desk, place.table(tables), field)
        elif verb == verbs.IN.name and field is not None:
            deeds.ask_field(self.asking, place.table(tables), field)
        elif verb == verbs.IN.name:
            self._place = place.inside(tables)

    def out(self, place: TablePlace, tables: tuple[Table, ...]) -> None:
        """Step out of the table."""
        self._place = place.outside(tables)

    def go_to(self, title: str) -> None:
        """Put the cursor on a table once the show has it."""
        self._place = TablePlace(self._place.at, title)

    def point(self, part: str, x: int, y: int, view: View) -> None:
        """A click moves the cursor."""
        if part != "tables" or view.draft is None:
            return
        tables = self.tables(view.draft.show)
        place = self._place.within(tables)
        if self._shares.part_at(x) == "tables":
            at = table_at(y, place.at, len(tables), self._height)
            self._place = place.outside(tables).moved(at - place.at, tables)
        elif self._shares.part_at(x) == "fields":
            line = field_at(y, place.table(tables), place.line, self._shares.fields, self._height)
            if line is not None:
                self._place = TablePlace(place.at, place.title, line)

    def scroll(self, by: int, view: View) -> None:
        """The wheel moves the cursor."""
        if view.draft is not None:
            tables = self.tables(view.draft.show)
            self._place = self._place.within(tables).moved(by, tables)
