"""How the Sheet shares its room: the cues and the one under the cursor, and the line above both."""

from __future__ import annotations

from dataclasses import dataclass

from beamctl.desk.format import BLANK, Row, Span, View, beside, fit, two_ends
from beamctl.desk.rows.readings import between

BESIDE_FROM = 100  # cells; in a narrower terminal the cue stands below the list
_LIST, _WIDEST_LIST = 0.42, 76
_GAP = 2
_NARROWED = 3  # rows that the list keeps while the cursor is inside a cue


@dataclass(frozen=True, slots=True)
class Frame:
    """Cells and rows of both; `at` is where the cue begins, None when it stands below the list."""

    at: int | None
    list_width: int
    list_height: int
    cue_width: int
    cue_height: int

    def joined(self, cues: list[Row], cue: list[Row], width: int) -> list[Row]:
        """Both as one picture; `cues` has `list_height` rows and `cue` has `cue_height`."""
        if self.at is not None:
            return beside(cues, cue, self.at, width)
        rule = [fit((Span("-" * width),), width)] if self.cue_height else []
        return [*cues, *rule, *cue]

    def part_at(self, x: int, y: int) -> tuple[bool, int]:
        """Whether cell `x` of row `y` belongs to the list, and which row of its part it is."""
        if self.at is not None:
            return x < self.at - _GAP, y
        return y < self.list_height, y if y < self.list_height else y - self.list_height - 1


def frame(width: int, height: int, inside: bool) -> Frame:
    """Room for both in `height` rows; a cue that is being worked on gets most of a small one."""
    height = max(height, 0)
    if width >= BESIDE_FROM:
        wide = min(round(width * _LIST), _WIDEST_LIST)
        return Frame(wide + _GAP, wide, height, width - wide - _GAP, height)
    part = min(_NARROWED if inside else (height + 1) // 2, height)
    return Frame(None, width, part, width, max(height - part - 1, 0))


def heading_row(view: View, place: str, width: int) -> Row:
    """The sheet and the cursor's place in it, or what became of the newest deed; mode and edits."""
    edit = view.snapshot.edit
    title = view.sheet.title if view.draft is None else view.draft.show.sheet.title
    left = between(view) or (Span(title), Span(f"  {place}"))
    right = (
        Span(f"{edit.waits}  " if edit.waits else "", "attention"),
        Span(f"{_edits(edit.unsaved)} not on disk  " if edit.unsaved else ""),
        Span(view.snapshot.mode, "text"),
    )
    return two_ends(left, right, width)


def _edits(number: int) -> str:
    return "1 edit" if number == 1 else f"{number} edits"


def windowed(rows: list[Row], top: int, height: int) -> list[Row]:
    """`height` rows from row `top` on; the last says when there are more below."""
    shown = rows[top : top + height]
    if len(rows) > top + height > 0 and shown:
        shown[-1] = (Span(f"  ... {len(rows) - top - height + 1} more rows below"),)
    return [*shown, *[BLANK] * (height - len(shown))]
