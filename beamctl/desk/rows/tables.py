"""Tables and their fields in rows: the list, the fields of the chosen one, and a picture."""

from __future__ import annotations

from dataclasses import dataclass

from beamctl.desk.format import BLANK, Role, Row, Span, beside, fit, length, pad, wrap
from beamctl.desk.forms import UNSET, written
from beamctl.desk.tables.tables import Line, Table

AT = ">"
GAP = 2
LIST, FIELDS = (8, 22), (40, 60)  # cells: at least, at most
DEFAULT = "  by default"
SMALLEST_PICTURE = 30  # cells; in less room it takes turns with the fields


@dataclass(frozen=True, slots=True)
class Shares:
    """Cells of each part from left to right, 0 for what has no room."""

    tables: int
    fields: int
    picture: int

    def joined(
        self, tables: list[Row], fields: list[Row], picture: list[Row], width: int
    ) -> list[Row]:
        """The parts side by side, in rows of at most `width` cells."""
        rows, at = tables, 0
        for cells, part in ((self.tables, tables), (self.fields, fields), (self.picture, picture)):
            if cells:
                rows = beside(rows, part, at, width) if at else part
                at += cells + GAP
        return rows

    def part_at(self, x: int) -> str:
        """Which part cell `x` belongs to."""
        if x < self.tables:
            return "tables"
        fields_at = self.tables + GAP if self.tables else 0
        return "fields" if fields_at <= x < fields_at + self.fields else "picture"


def shares(tables: tuple[Table, ...], width: int, inside: bool, pictured: bool) -> Shares:
    """Room for each part; one table alone needs no list.

    `inside` is whether the cursor is among the fields, `pictured` whether there is a picture.
    """
    titles = max((len(table.title) for table in tables), default=0) + len(AT) + 1
    listed = min(max(titles, LIST[0]), LIST[1], width) if len(tables) > 1 else 0
    room = width - listed - (GAP if listed else 0)
    if not pictured:
        return Shares(listed, max(room, 0), 0)
    needed = max((_needed(table) for table in tables), default=0)
    for fields in (min(max(FIELDS[0], needed), FIELDS[1]), FIELDS[0]):
        if room - fields - GAP >= SMALLEST_PICTURE:
            return Shares(listed, fields, room - fields - GAP)
    return Shares(listed, max(room, 0), 0) if inside else Shares(listed, 0, max(room, 0))


def list_rows(tables: tuple[Table, ...], at: int, width: int, height: int) -> list[Row]:
    """`height` rows of titles around number `at`."""
    first = top(at, len(tables), height)
    rows: list[Row] = []
    for number, table in enumerate(tables[first : first + max(height, 0)], first):
        lit: Role = "text" if number == at else "dim"
        rows.append(fit((Span(f"{AT if number == at else ' '} {table.title}", lit),), width))
    return [*rows, *[BLANK] * (height - len(rows))]


def table_at(y: int, at: int, count: int, height: int) -> int:
    """The number of the title in row `y` of `list_rows`."""
    return min(top(at, count, height) + y, count - 1)


def field_rows(table: Table, at: int | None, width: int, height: int) -> list[Row]:
    """`height` rows: the title, every key and what stands there, and what the one at `at` wants."""
    told, first = _frame(table, at, width, height)
    shown = list(enumerate(table.lines))[first : first + max(height - 1 - len(told), 0)]
    wide = _keys(table)
    rows = [fit((Span(table.title, "text"), Span(f"  {table.file}")), width)]
    rows += [_field(line, number == at, wide, width) for number, line in shown]
    if not table.lines:
        rows.append((Span("  nothing yet"),))
    rows += told
    return [*rows, *[BLANK] * (height - len(rows))][: max(height, 0)]


def field_at(y: int, table: Table, at: int | None, width: int, height: int) -> int | None:
    """The number of the line in row `y` of `field_rows`, None where there is none."""
    _, first = _frame(table, at, width, height)
    return first + y - 1 if 0 < y <= len(table.lines) - first else None


def top(at: int, count: int, height: int) -> int:
    """The first of `count` rows to show in `height` so that row `at` is among them."""
    return max(0, min(at - height // 2, count - height))


def _frame(table: Table, at: int | None, width: int, height: int) -> tuple[list[Row], int]:
    """What is said of the line at `at`, and the first line that shows."""
    told = [] if at is None else _expects(table.lines[at], width)[: max(height - 2, 0)]
    return told, top(at or 0, len(table.lines), max(height - 1 - len(told), 0))


def _needed(table: Table) -> int:
    """Cells of its widest line."""
    wide = _keys(table)
    return max((length(_field(line, False, wide, 999)) for line in table.lines), default=0)


def _keys(table: Table) -> int:
    return max((len(line.key) for line in table.lines), default=0)


def _field(line: Line, here: bool, wide: int, width: int) -> Row:
    text = written(line.now)
    lit: Role = "text" if here else "dim"
    row = Span(f"{AT if here else ' '} {pad(line.key, wide)}  ", lit), Span(text, "text")
    return fit((*row, Span("" if line.given or text == UNSET else DEFAULT)), width)


def _expects(line: Line, width: int) -> list[Row]:
    """A blank row, what may be typed, and whether it may be left out."""
    what = f"one of {len(line.choices)} names" if line.choices else line.field.expects
    left_out = "; may be left out" if line.field.optional else ""
    return [BLANK, *[(Span(text),) for text in wrap(f"expects {what}{left_out}", width, 4)]]
