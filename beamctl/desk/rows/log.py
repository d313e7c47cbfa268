"""The journal in rows, the newest at the bottom."""

from __future__ import annotations

import textwrap
from dataclasses import dataclass

from beamctl.desk.format import BLANK, Role, Row, Span, clean, fit

INDENT = "          "  # a line that goes on stands under its words, not under its time
_MOST = 6  # rows of one line
LOUD = ("refused", "trip", "blind", "fault", "lost", "late")


@dataclass(frozen=True, slots=True)
class Window:
    """What part of the log shows; `top` is None while it follows the newest row."""

    top: int | None = None

    def first(self, rows: int, height: int) -> int:
        """The first row that shows."""
        last = max(rows - height, 0)
        return last if self.top is None else max(0, min(self.top, last))

    def moved(self, by: int, rows: int, height: int) -> Window:
        """`by` rows on; at the end it follows again."""
        top = self.first(rows, height) + by
        return Window() if top >= rows - height else Window(max(top, 0))

    def kept(self, gone: int) -> Window:
        """The same rows, after `gone` rows were dropped from the top."""
        return self if self.top is None else Window(max(self.top - gone, 0))


def line_rows(lines: tuple[str, ...], width: int) -> list[Row]:
    """Every line in as many rows as it takes; what went wrong is lit."""
    rows: list[Row] = []
    for line in lines:
        role: Role = "text" if any(word in line.casefold() for word in LOUD) else "dim"
        texts = textwrap.wrap(clean(line), max(width, 1), subsequent_indent=INDENT)
        rows += [fit((Span(text, role),), width) for text in texts[:_MOST]]
    return rows


def narrowed(lines: tuple[str, ...], word: str) -> tuple[str, ...]:
    """The lines that have all words of `word` in them, whatever their case."""
    words = word.casefold().split()
    return tuple(line for line in lines if all(one in line.casefold() for one in words))


def dropped(before: tuple[str, ...], now: tuple[str, ...]) -> int:
    """How many lines went from the top of a log that only grows below."""
    head = now[:3]
    return next((n for n in range(len(before)) if before[n : n + len(head)] == head), len(before))


def window_rows(rows: list[Row], window: Window, word: str, width: int, height: int) -> list[Row]:
    """`height` rows, the last of them saying where they stand and what they are narrowed to."""
    room = max(height - 1, 0)
    first = window.first(len(rows), room)
    shown = rows[first : first + room]
    where = f"rows {first + 1} to {first + len(shown)} of {len(rows)}" if rows else "no row"
    more = "" if window.top is None else "  newer ones below"
    only = f'  only with "{word}"' if word else ""
    status = fit((Span(f"{where}{only}"), Span(more, "text")), width)
    return [*[BLANK] * (room - len(shown)), *shown, status][: max(height, 0)]
