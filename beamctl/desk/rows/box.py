"""How a box looks: an outline, what it is about, what to type, and how to get out of it."""

from __future__ import annotations

from beamctl.desk.box import Box
from beamctl.desk.format import BLANK, Role, Row, Span, cut, fit, pad, wrap

WIDEST = 100
_HINT = "Enter sends it. Escape closes the box, nothing else. 0, Insert, F12 hush."


def box_rows(box: Box, width: int, height: int) -> list[Row]:
    """`height` rows; in a small room the text gives way, the line that is typed in never does."""
    wide = min(width, WIDEST)
    room = max(wide - 4, 0)
    typed = Span(f"Type {box.wants}: {box.typed}_", "attention")
    hint = Span(box.complaint, "attention") if box.complaint else Span(_HINT)
    about = [Span(line, "text") for line in wrap(box.text, room, max(height - 4, 0))]
    inner = [*about, typed, hint][-max(height - 2, 1) :]
    if height < 4:
        return [(Span(cut(typed.text, width), typed.role),), *[BLANK] * (height - 1)][:height]
    rows = [_edge(f" {box.title} ", wide), *[_line(span, room) for span in inner], _edge("", wide)]
    return [*[fit(row, width) for row in rows], *[BLANK] * (height - len(rows))]


def _line(span: Span, room: int) -> Row:
    edge: Role = "attention"
    return Span("| ", edge), Span(pad(span.text, room), span.role), Span(" |", edge)


def _edge(title: str, wide: int) -> Row:
    return (Span(cut(f"+-{title}".ljust(max(wide - 1, 0), "-") + "+", wide), "attention"),)
