"""The line above a screen that edits: where its cursor is, how the edits stand, and the mode."""

from __future__ import annotations

from beamctl.desk.format import Row, Span, View, two_ends
from beamctl.desk.rows.readings import between


def heading_row(view: View, place: str, width: int) -> Row:
    """The cursor's place, then the show or what became of the newest deed; edits and mode last."""
    edit = view.snapshot.edit
    title = view.sheet.title if view.draft is None else view.draft.show.sheet.title
    left = (Span(f"{place}  "), *(between(view) or (Span(title),)))
    right = (
        Span(f"{edit.waits}  " if edit.waits else "", "attention"),
        Span(f"{_edits(edit.unsaved)} not on disk  " if edit.unsaved else ""),
        Span(view.snapshot.mode, "text"),
    )
    return two_ends(left, right, width)


def _edits(number: int) -> str:
    return "1 edit" if number == 1 else f"{number} edits"
