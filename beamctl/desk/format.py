"""What the desk writes, as plain rows of spans; no terminal library is needed to read or test it.

A role says what a span means. It only repeats what the words, marks and places already say.
"""

from __future__ import annotations

import textwrap
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal, NamedTuple

from rich.cells import cell_len, set_cell_size

from beamctl.desk.box import Box
from beamctl.desk.keymap import DEFAULT, Keymap
from beamctl.desk.link import Draft
from beamctl.snapshot import Answer, CueLevel, SeatLevel, SheetView, Snapshot

Role = Literal[
    "dim", "text", "live", "attention", "alarm", "big", "big-live", "big-attention", "big-alarm"
]


class Span(NamedTuple):
    """A piece of one row."""

    text: str
    role: Role = "dim"


Row = tuple[Span, ...]
BLANK: Row = ()


@dataclass(frozen=True, slots=True)
class View:
    """Everything the rows are made from."""

    sheet: SheetView
    snapshot: Snapshot
    stale_s: float | None = None  # age of the picture once it may no longer be trusted
    answer: tuple[str, Answer] | None = None  # title of the newest action, and what became of it
    asks_leave: bool = False
    asks_word: bool = False  # after a trip, the first of the two keys that open the box
    box: Box | None = None
    levels: tuple[SeatLevel, ...] | None = None  # None while none came, or those that did are old
    draft: Draft | None = None  # the show as edited; None while it has not come
    cue_levels: tuple[CueLevel, ...] = ()
    log: tuple[str, ...] = ()
    keymap: Keymap = DEFAULT
    dot: str = "█"


def clean(text: str) -> str:
    """`text` without anything that could move the cursor or colour the screen."""
    if text.isprintable():
        return text
    return "".join(sign if sign.isprintable() else "?" for sign in text)


def cut(text: str, width: int) -> str:
    """`text` in at most `width` cells, its end given up and marked when it is too long."""
    text = clean(text)
    if cell_len(text) <= width:
        return text
    return set_cell_size(text, max(width - 2, 0)).rstrip() + ".." if width > 2 else ""


def pad(text: str, width: int) -> str:
    """`text` in exactly `width` cells."""
    return set_cell_size(cut(text, width), width)


def wrap(text: str, width: int, rows: int) -> list[str]:
    """`text` in at most `rows` lines of `width` cells; what does not fit is marked."""
    lines = textwrap.wrap(clean(text), max(width, 1)) if width > 0 else []
    if len(lines) > rows:
        lines = [*lines[: rows - 1], cut(" ".join(lines[rows - 1 :]), width)] if rows else []
    return lines


def fit(row: Iterable[Span], width: int) -> Row:
    """`row` in at most `width` cells."""
    out: list[Span] = []
    left = width
    for text, role in row:
        text = cut(text, left)
        out.append(Span(text, role))
        left -= cell_len(text)
    return tuple(span for span in out if span.text)


def length(row: Iterable[Span]) -> int:
    """Cells that `row` takes."""
    return sum(cell_len(span.text) for span in row)


def two_ends(left: Row, right: Row, width: int) -> Row:
    """`left` from the left edge and `right` to the right edge; `right` is never cut first."""
    right = fit(right, width)
    room = width - length(right)
    left = fit(left, max(room - 2, 0))
    return (*left, Span(" " * (room - length(left))), *right)


def beside(left: list[Row], right: list[Row], at: int, width: int) -> list[Row]:
    """Both side by side, as high as the higher: `right` begins at cell `at`."""
    rows = max(len(left), len(right))
    left, right = ([*part, *[BLANK] * (rows - len(part))] for part in (left, right))
    both = []
    for start, end in zip(left, right, strict=True):
        start = fit(start, at)
        both.append(fit((*start, Span(" " * (at - length(start))), *end), width))
    return both


def clock(seconds: float) -> str:
    """A duration: 12.3, then 1:23, then 1:02:03; cut, not rounded up, as a clock does."""
    seconds = max(seconds, 0.0)
    if seconds < 60.0:
        return f"{int(seconds * 10 + 1e-6) / 10:.1f}"
    minutes, whole = divmod(int(seconds), 60)
    hours, minutes = divmod(minutes, 60)
    return f"{hours}:{minutes:02}:{whole:02}" if hours else f"{minutes}:{whole:02}"


def signed(value: float) -> str:
    """One decimal with its sign; no minus before a zero."""
    return f"{round(value, 1) + 0.0:+.1f}"


def level(value_db: float | None) -> str:
    """A level to 0.1 dB, or two dashes for exact silence."""
    return "--" if value_db is None else f"{round(value_db, 1) + 0.0:.1f}"
