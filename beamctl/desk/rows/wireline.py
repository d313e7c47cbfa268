"""The wire and the edits in one line, for whoever runs the show."""

from __future__ import annotations

from beamctl.desk.format import Row, Span, View, fit


def wire_row(view: View, width: int) -> Row:
    """Whether anything listens, which edits are not on disk, and what is being worked out."""
    wire, edit = view.snapshot.wire, view.snapshot.edit
    words = [f"wire listens at {wire.listen}, {wire.state}" if wire.listen else "wire off"]
    if edit.unsaved:
        words.append(f"{edit.unsaved} edit{'s' if edit.unsaved > 1 else ''} not on disk")
    if edit.waits:
        words.append(edit.waits)
    return fit((Span("   ".join(words)),), width)
