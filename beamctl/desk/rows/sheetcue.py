"""One cue of the Sheet in full: its fields, what the guard found, its acts as sentences."""

from __future__ import annotations

from collections.abc import Collection
from typing import NamedTuple

from beamctl.desk.format import BLANK, Role, Row, Span, fit, pad, wrap
from beamctl.desk.rows.sheetfields import Told, act_fields, cue_fields
from beamctl.desk.rows.sheetlist import AT, LIFTED, kept_in
from beamctl.desk.rows.sheetwords import found_words, sentence
from beamctl.desk.sheet.place import CUE_FIELDS, Place
from beamctl.show.sheet import Act, Cue
from beamctl.snapshot import CueLevel

_MOST = 40  # rows of one text
_KEY, _NOW = 10, 16  # cells


class Line(NamedTuple):
    """A row, and where a click on it leads: a line of the cue, and a field of its act."""

    row: Row
    line: int | None = None
    field: int | None = None


class Found(NamedTuple):
    """What was found when one cue was looked at.

    level    by the guard
    barred   why, and the trim that fits
    remarks  of the reader
    """

    level: CueLevel | None = None
    barred: str = ""
    remarks: tuple[str, ...] = ()


def cue_lines(
    cue: Cue, place: Place, found: Found, lifted: Collection[int], width: int
) -> list[Line]:
    """All of `cue`, however long; the act under the cursor is opened into its fields."""
    lines = [
        line
        for number, told in enumerate(cue_fields(cue))
        for line in _field_lines(told, number, place.line == number, width)
    ]
    lines += [Line(row) for row in _found_rows(found, width)]
    lines.append(Line(BLANK))
    if not cue.act:
        lines.append(Line(fit((Span("  no act yet: New act begins one"),), width)))
    for number, act in enumerate(cue.act):
        lines += _act_lines(act, number, place, number in lifted, width)
    return lines


def top_of(lines: list[Line], place: Place, top: int, height: int) -> int:
    """The first row that shows, so that what the cursor is on is among `height` of them.

    With a field of an act its sentence shows as well, where there is room for both.
    """
    at = [n for n, line in enumerate(lines) if line.line == place.line]
    if place.line is None or not at:
        return 0
    first, last = max(at[0] - 1, 0), min(at[-1] + 1, len(lines) - 1)
    if place.field is not None:
        field = next(n for n in at if lines[n].field == place.field)
        last = min(field + 1, last)
        first = at[0] if last - at[0] < height else field - 1
    return min(kept_in(top, first, last, height), max(len(lines) - height, 0))


def _field_lines(told: Told, number: int, at: bool, width: int) -> list[Line]:
    """A field of the cue; a long note takes as many rows as it needs."""
    lit: Role = "text" if at or told.key == "title" else "dim"
    texts = wrap(told.now, width - 2 - _KEY, _MOST) or [""]
    heads = [f"{AT if at else ' '} {pad(told.key, _KEY)}", *[" " * (2 + _KEY)] * len(texts)]
    rows = [fit((Span(h), Span(t, lit)), width) for h, t in zip(heads, texts, strict=False)]
    return [Line(row, number) for row in rows]


def _found_rows(found: Found, width: int) -> list[Row]:
    level, rows = found.level, []
    if level is None:
        rows += _text_rows("guard", "nothing is found yet, or nothing sounds", "dim", width)
    elif not found.barred or level.level_db <= level.cap_db:  # else what bars it says the same
        rows += _text_rows("guard", found_words(level), "dim", width)
    if found.barred:
        rows += _text_rows("barred", found.barred, "attention", width)
    return rows + [
        row for text in found.remarks for row in _text_rows("remark", text, "text", width)
    ]


def _text_rows(key: str, text: str, role: Role, width: int) -> list[Row]:
    texts = wrap(text, width - 2 - _KEY, _MOST)
    heads = [f"  {pad(key, _KEY)}", *[" " * (2 + _KEY)] * len(texts)]
    return [fit((Span(h), Span(t, role)), width) for h, t in zip(heads, texts, strict=False)]


def _act_lines(act: Act, number: int, place: Place, lifted: bool, width: int) -> list[Line]:
    """The sentence of an act, and its fields while the cursor is on it or in it."""
    here = place.act == number
    line = len(CUE_FIELDS) + number
    lit: Role = "text" if here else "dim"
    mark = f"{AT if here and place.field is None else ' '}{LIFTED if lifted else ' '}"
    first, *more = wrap(sentence(act), width - 4, _MOST) or [""]
    rows = [(Span(mark, "text"), Span(first, lit)), *[(Span(f"    {t}", lit),) for t in more]]
    lines = [Line(fit(row, width), line) for row in rows]
    if here:
        fields = enumerate(act_fields(act))
        lines += [Line(_field_row(t, place.field == n, width), line, n) for n, t in fields]
    return lines


def _field_row(told: Told, at: bool, width: int) -> Row:
    lit: Role = "text" if at else "dim"
    head = f"  {AT if at else ' '} {pad(told.key, _KEY)}"
    now = pad(told.now, max(_NOW, len(told.now) + 1))
    return fit((Span(head, lit), Span(now, lit), Span(told.expects)), width)
