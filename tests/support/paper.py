"""What a terminal shows, worked out from what a program writes to it."""

from __future__ import annotations

import codecs
import re

_TOKEN = re.compile(
    r"\x1b\[(?P<figures>[0-9;?<>=]*)[ -/]*(?P<does>[@-~])|\x1b\][^\x07\x1b]*(?:\x07|\x1b\\)"
    r"|\x1b[^\[\]]|(?P<end>[\r\n])|(?P<signs>[^\x00-\x1f\x7f]+)|."
)
_BEGUN = re.compile(r"\x1b(?:\[[^@-~]*|\][^\x07\x1b]*\x1b?)?\Z")
_OWN_SCREEN = "?1049"


class Paper:
    """Signs in rows, as far as prompts and the desk need it: places, and ends of lines."""

    def __init__(self, columns: int, rows: int) -> None:
        self._blank = " " * columns
        self._rows = [self._blank] * rows
        self._x = self._y = 0
        self._decoder = codecs.getincrementaldecoder("utf-8")(errors="replace")
        self._rest = ""

    @property
    def lines(self) -> list[str]:
        """The rows, without the blanks at their ends."""
        return [row.rstrip() for row in self._rows]

    def write(self, data: bytes) -> None:
        """Write on; a sign or an escape that has only begun waits for the rest of it."""
        text = self._rest + self._decoder.decode(data)
        begun = _BEGUN.search(text)
        until = begun.start() if begun else len(text)
        self._rest = text[until:]
        for token in _TOKEN.finditer(text, 0, until):
            if token["signs"]:
                self._signs(token["signs"])
            elif token["end"]:
                self._end(token["end"])
            elif token["does"] == "H":
                y, x = [int(figure) for figure in token["figures"].split(";") if figure] or [1, 1]
                self._x, self._y = x - 1, y - 1
            elif token["figures"] == _OWN_SCREEN:
                self._rows = [self._blank] * len(self._rows)

    def _signs(self, signs: str) -> None:
        row = self._rows[self._y]
        self._rows[self._y] = row[: self._x] + signs + row[self._x + len(signs) :]
        self._x += len(signs)

    def _end(self, sign: str) -> None:
        if sign == "\r":
            self._x = 0
        elif self._y < len(self._rows) - 1:
            self._y += 1
        else:
            self._rows = [*self._rows[1:], self._blank]
