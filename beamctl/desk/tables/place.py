"""Where the cursor is among tables and their fields, and how it moves. Nothing here draws."""

from __future__ import annotations

from dataclasses import dataclass, replace

from beamctl.desk.tables.tables import Line, Table

Tables = tuple[Table, ...]


@dataclass(frozen=True, slots=True)
class TablePlace:
    """A table and a line of it, None for the table itself.

    The title wins over the number: a cursor may wait for a table that is yet to come.
    """

    at: int = 0
    title: str = ""
    line: int | None = None

    def within(self, tables: Tables) -> TablePlace:
        """The nearest place that there is; in a table that stands alone it is always a line."""
        titles = [table.title for table in tables]
        at = titles.index(self.title) if self.title in titles else min(self.at, len(tables) - 1)
        lines = len(tables[at].lines)
        line = 0 if self.line is None and len(tables) == 1 else self.line
        line = None if line is None or not lines else max(min(line, lines - 1), 0)
        return TablePlace(at, self.title or titles[at], line)

    def moved(self, by: int, tables: Tables) -> TablePlace:
        """`by` tables on, or `by` lines."""
        if self.line is not None:
            return replace(self, line=max(self.line + by, 0)).within(tables)
        at = max(min(self.at + by, len(tables) - 1), 0)
        return TablePlace(at, tables[at].title)

    def inside(self, tables: Tables) -> TablePlace:
        """On the first line of the table."""
        return replace(self, line=self.line or 0).within(tables)

    def outside(self, tables: Tables) -> TablePlace:
        """On the table."""
        return replace(self, line=None).within(tables)

    def table(self, tables: Tables) -> Table:
        """The table it is on."""
        return tables[self.at]

    def field(self, tables: Tables) -> Line | None:
        """The line it is on."""
        return None if self.line is None else tables[self.at].lines[self.line]
