"""The four readings for a reader two metres away, with their small print beside them."""

from __future__ import annotations

from beamctl.desk import glyphs
from beamctl.desk.format import BLANK, Role, Row, Span, View, clock, cut, fit, length, level, wrap
from beamctl.snapshot import CueText, PanelView, Snapshot

HEIGHT = 2 * glyphs.ROWS + 1
_STEADY = glyphs.width_of("-00.0")  # small print beside a running number must not jump about
_LEAST_PRINT = 8  # narrower small print than this is left out

_EMPTY = Span("")

_OUTPUT_ROLE: dict[str, Role] = {
    "OPEN": "big-live",
    "HUSHED": "big-attention",
    "TRIPPED": "big-alarm",
    "LOST": "big-alarm",
}


def readings(view: View, width: int) -> list[Row]:
    """HEIGHT rows: cue standing by and output above, seconds since GO and level below."""
    left = width * 11 // 20
    right = width - left
    upper = _beside(_standby(view, left), _output(view, right), left)
    lower = _beside(_since_go(view, left), _loudest(view, right), left)
    between = _beside([_left_word(view)], [_right_word(view.snapshot)], left)
    return [fit(row, width) for row in (*upper, *between, *lower)]


def loudest(panels: tuple[PanelView, ...]) -> PanelView | None:
    """The panel with the highest feed peak, None when no panel is driven."""
    driven = [panel for panel in panels if panel.peak_db is not None]
    return max(driven, key=lambda panel: panel.peak_db or 0.0, default=None)


def _standby(view: View, width: int) -> list[Row]:
    ref = view.snapshot.standby
    if not ref:
        return _block("--", "big", [Span("nothing stands by")], view.dot, width)
    cue = _cue(view, ref)
    barred = view.snapshot.states.get(ref) == "barred"
    caption = Span(f"BARRED {ref}", "attention") if barred else Span(f"stand by {ref}")
    role: Role = "big-attention" if barred else "big"
    small = [caption, *_small(cue.title, "text"), *_small(cue.note, "dim")]
    return _block(ref, role, small, view.dot, width)


def _output(view: View, width: int) -> list[Row]:
    word = view.snapshot.output
    return _block(word, _OUTPUT_ROLE.get(word, "big"), [Span("output")], view.dot, width)


def _since_go(view: View, width: int) -> list[Row]:
    seconds, newest = view.snapshot.since_go_s, view.snapshot.newest
    if seconds is None:
        small = [Span("no GO yet")]
    else:
        small = [Span("s since GO" if seconds < 60.0 else "since GO"), Span(f"newest {newest}")]
    reading = "--" if seconds is None else clock(seconds)
    return _block(reading, "big", [*small, *_answer(view)], view.dot, width, _STEADY)


def _loudest(view: View, width: int) -> list[Row]:
    panel = loudest(view.snapshot.panels)
    if panel is None:
        return _block("--", "big", [Span("exact zero")], view.dot, width, _STEADY)
    small = [Span("dB, loudest"), Span(f"panel {panel.name}")]
    return _block(level(panel.peak_db), "big", small, view.dot, width, _STEADY)


def _small(text: str, role: Role) -> list[Span]:
    return [Span(text, role)] if text else []


def _answer(view: View) -> list[Span]:
    if view.answer is None:
        return []
    title, answer = view.answer
    if answer.done:
        return [Span(f"{title}: {answer.text or 'done'}")]
    if not answer.reason:
        return [Span(f"{title}: {answer.text}", "attention")]
    why = f"{answer.reason}, {answer.text}" if answer.text else answer.reason
    return [Span(f"{title} REFUSED: {why}", "attention")]


def _left_word(view: View) -> Row:
    if view.stale_s is not None:
        return (Span(f"STALE: as it was {clock(view.stale_s)} s ago", "alarm"),)
    if view.snapshot.holding:
        return (Span("HOLDING: glides and follow-ons stand still", "attention"),)
    return BLANK


def _right_word(seen: Snapshot) -> Row:
    if not seen.arming:
        return BLANK
    what = "restores" if seen.output == "HUSHED" else "arms"
    return (Span(f"READY: Enter {what}", "attention"),)


def _cue(view: View, ref: str) -> CueText:
    return next((cue for cue in view.sheet.cues if cue.ref == ref), CueText(ref, ""))


def _block(
    reading: str, role: Role, small: list[Span], dot: str, width: int, field: int = 0
) -> list[Row]:
    """A big reading, then small print; a reading too wide for glyphs is written out instead."""
    wide = max(glyphs.width_of(reading), field)
    if wide > width:
        written = (Span(cut(reading, width), role),)
        return [BLANK, BLANK, written, BLANK, BLANK]
    room = width - wide - 4
    if room < _LEAST_PRINT:
        small = []
    lines: list[Span] = []
    for span in small:
        rows = glyphs.ROWS - len(lines) if span is small[-1] else 2
        lines += [Span(line, span.role) for line in wrap(span.text, room, rows)]
    lines += [_EMPTY] * glyphs.ROWS
    drawn = (row.ljust(wide) for row in glyphs.draw(reading, dot))
    return [(Span(big, role), Span("  "), line) for big, line in zip(drawn, lines, strict=False)]


def _beside(left: list[Row], right: list[Row], left_width: int) -> list[Row]:
    both = []
    for start, end in zip(left, right, strict=True):
        start = fit(start, left_width)
        both.append((*start, Span(" " * (left_width - length(start))), *end))
    return both
