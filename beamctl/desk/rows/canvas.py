"""A picture of the room in signs: what is put first keeps its cell."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import get_args

from numpy.typing import ArrayLike

from beamctl.desk.format import Role, Row, Span, clean
from beamctl.desk.projection import Cell, Projection

Sign = tuple[str, Role]

# A role as one sign, to find runs of cells by; any other sign is a dim one.
_CODES: dict[Role, str] = {role: chr(number) for number, role in enumerate(get_args(Role))}
_ROLES = {code: role for role, code in _CODES.items()}
_RUNS = re.compile("|".join([*(f"{code}+" for code in _ROLES), f"[^{''.join(_ROLES)}]+"]))


class Canvas:
    """Signs and names over a ground that fills the rest."""

    def __init__(self, projection: Projection) -> None:
        self.projection = projection
        self._signs: dict[Cell, Sign] = {}
        self._names: list[tuple[Cell, str, Role]] = []

    def put(self, point_m: ArrayLike, sign: str, role: Role = "dim", name: str = "") -> None:
        """A sign at a point (3,) of the room, with its name beside it where there is room."""
        cell = self.projection.cell(point_m)
        if self.projection.shows(cell) and self._signs.setdefault(cell, (sign, role)) and name:
            self._names.append((cell, clean(name), role))

    def line(self, a_m: ArrayLike, b_m: ArrayLike, sign: str = "", role: Role = "dim") -> None:
        """A straight line; without a sign it is drawn by its slope on the screen."""
        cells = self.projection.between(a_m, b_m)
        if cells and not sign:
            sign = _slope(cells[0], cells[-1])
        for cell in cells:
            self._signs.setdefault(cell, (sign, role))

    def under(self, other: Canvas) -> None:
        """Put all that another canvas of the same projection has under what is here."""
        self._signs = other._signs | self._signs
        self._names += other._names

    def rows(
        self, ground: list[str] | None = None, roles: Mapping[str, Role] | None = None
    ) -> list[Row]:
        """`height` rows; `ground` are as many texts of `width` cells for what nothing was put on,
        and `roles` the signs in it that are not dim."""
        width, height = self.projection.width, self.projection.height
        codes = {ord(sign): _CODES[role] for sign, role in (roles or {}).items()}
        texts = [list(text) for text in ground or [" " * width] * height]
        kinds = [list("".join(text).translate(codes)) for text in texts]
        signs = dict(self._signs)
        for name in self._names:
            self._write(signs, *name)
        for (x, y), (sign, role) in signs.items():
            texts[y][x], kinds[y][x] = sign, _CODES[role]
        return [_row("".join(text), "".join(kind)) for text, kind in zip(texts, kinds, strict=True)]

    def _write(self, signs: dict[Cell, Sign], cell: Cell, name: str, role: Role) -> None:
        """Write a name right of its cell or left of it, unless there is no room for it."""
        column, row = cell
        for first in (column + 2, column - 1 - len(name)):
            cells = [(first + n, row) for n in range(len(name))]
            beside = [(first - 1, row), (first + len(name), row)]
            free = all(there not in signs for there in (*cells, *beside) if there != cell)
            if free and all(map(self.projection.shows, cells)):
                signs.update(zip(cells, ((sign, role) for sign in name), strict=True))
                return


def _row(text: str, kinds: str) -> Row:
    """A row of spans, one for every run of cells of one role."""
    return tuple(
        Span(text[run.start() : run.end()], _ROLES.get(run[0][0], "dim"))
        for run in _RUNS.finditer(kinds)
    )


def _slope(a: Cell, b: Cell) -> str:
    """The sign that looks most like a line from a to b; rows are twice as high as columns wide."""
    across, up = abs(b[0] - a[0]), 2 * abs(b[1] - a[1])
    if across > 2 * up:
        return "-"
    if up > 2 * across:
        return "|"
    return "/" if (b[0] - a[0]) * (b[1] - a[1]) < 0 else "\\"
