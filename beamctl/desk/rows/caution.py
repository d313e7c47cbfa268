"""The caution over the whole screen, shown when a show is first opened on this computer."""

from __future__ import annotations

from beamctl.caution import CAUTION_TEXT
from beamctl.desk.format import BLANK, Row, Span, fit, wrap

_HUSHES = "0, Insert and F12 hush here too."


def caution_rows(width: int, height: int, output: str, readable: bool) -> list[Row]:
    """`height` rows; in a small terminal the way to go on is kept, and the end of the text goes."""
    how = "Enter: I have read this" if readable else "Please read. Enter works in a moment."
    state = f"   output {output}" if output else ""
    foot: list[Row] = [BLANK, (Span(how, "attention"),), (Span(_HUSHES + state),)]
    lines = ["CAUTION", "", *CAUTION_TEXT.splitlines()]
    text: list[Row] = [
        (Span(part, "text"),) for line in lines for part in wrap(line, width, 3) or [""]
    ]
    rows = [*text[: max(height - len(foot), 0)], *foot][-max(height, 1) :]
    above: list[Row] = [BLANK] * ((height - len(rows)) // 3)
    rows = [fit(row, width) for row in (*above, *rows)]
    return [*rows, *[BLANK] * (height - len(rows))][: max(height, 0)]
