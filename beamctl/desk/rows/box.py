"""How a box looks: an outline, what it is about, what to type or pick, and how to get out of it."""

from __future__ import annotations

from beamctl.desk.box import Box
from beamctl.desk.format import BLANK, Role, Row, Span, cut, fit, pad, wrap

WIDEST = 100
TALLEST = 16  # rows
_HINT = "Enter sends it. Escape closes the box, nothing else. Insert and F12 hush"


def box_height(box: Box, width: int) -> int:
    """Rows that a box would like to have."""
    room = min(width, WIDEST) - 4
    lines = [*wrap(box.text, room, TALLEST), *wrap(box.complaint, room, 3)[1:]]
    return min(len(lines) + len(box.choices) + 4, TALLEST)


def box_rows(box: Box, width: int, height: int) -> list[Row]:
    """`height` rows; in a small room the text gives way, the line that is typed in never does."""
    wide = min(width, WIDEST)
    room = max(wide - 4, 0)
    typed = Span(f"Type {box.wants}: {box.typed}_", "attention")
    if height < 4:
        return [(Span(cut(typed.text, width), typed.role),), *[BLANK] * (height - 1)][:height]
    hints = [Span(line, "attention") for line in wrap(box.complaint, room, min(height - 3, 3))]
    hints = hints or [Span(_hint(box))]
    spare = height - 3 - len(hints)
    lines = len(wrap(box.text, room, TALLEST))
    most = max(spare - lines, (spare + 1) // 2)  # of the rows, at least half are the choices'
    choices = _choices(box, most) if box.choices else []
    about = [Span(line, "text") for line in wrap(box.text, room, spare - len(choices))]
    inner = [*about, typed, *choices, *hints]
    rows = [_edge(f" {box.title} ", wide), *[_line(span, room) for span in inner], _edge("", wide)]
    return [*[fit(row, width) for row in rows], *[BLANK] * (height - len(rows))]


def _hint(box: Box) -> str:
    hush = "." if box.digits else "; 0 does too."
    pick = " Arrows pick, Tab fills in." if box.choices else ""
    fresh = " Typing replaces it." if box.prefilled and box.typed else ""
    return _HINT + hush + pick + fresh


def _choices(box: Box, rows: int) -> list[Span]:
    """The choices around the picked one; marked by `>`."""
    matching = box.matching
    if not matching:
        return [Span("  nothing matches")][:rows]
    picked = box.picked if box.picked is not None else (0 if box.strict else -1)
    first = max(0, min(picked - rows // 2, len(matching) - rows))
    shown = matching[first : first + rows]
    return [
        Span(f"> {text}", "text") if first + n == picked else Span(f"  {text}")
        for n, text in enumerate(shown)
    ]


def _line(span: Span, room: int) -> Row:
    edge: Role = "attention"
    return Span("| ", edge), Span(pad(span.text, room), span.role), Span(" |", edge)


def _edge(title: str, wide: int) -> Row:
    return (Span(cut(f"+-{title}".ljust(max(wide - 1, 0), "-") + "+", wide), "attention"),)
