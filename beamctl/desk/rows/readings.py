"""The four readings for a reader two metres away, with their small print beside them."""

from __future__ import annotations

from beamctl.caution import CAUTION_LINE
from beamctl.desk.format import BLANK, Role, Row, Span, View, beside, clock, cut, fit, level, wrap
from beamctl.desk.rows import glyphs
from beamctl.desk.rows.guardline import SILENT
from beamctl.snapshot import CueText, GuardView, Snapshot

HEIGHT = 2 * glyphs.ROWS + 1
_STEADY = "00.0"  # small print beside a running number must not jump about
_LEAST_PRINT = 6  # narrower small print than this is left out
_GUARD_CELLS = glyphs.width_of("CAPPING -0.0")  # the widest that the guard has to say

_EMPTY = Span("")

_OUTPUT_ROLE: dict[str, Role] = {
    "OPEN": "big-live",
    "HUSHED": "big-attention",
    "TRIPPED": "big-alarm",
    "LOST": "big-alarm",
}
_GUARD_ROLE: dict[str, Role] = {
    "CLEAR": "big",
    "NEAR": "big-attention",
    "CAPPING": "big-attention",
}


def readings(view: View, width: int) -> list[Row]:
    """HEIGHT rows: cue standing by and output above, seconds since GO and the guard below."""
    left = width * 11 // 20
    upper = beside(_standby(view, left - 2), _output(view, width - left), left, width)
    left = max(min(left, width - _GUARD_CELLS), 0)
    lower = beside(_since_go(view, left - 1), _guard(view, width - left), left, width)
    return [*upper, fit(between(view), width), *lower]


def between(view: View) -> Row:
    """The words between the readings: what to distrust, what Enter would do, what became of it."""
    seen = view.snapshot
    spans = []
    if view.stale_s is not None:
        spans.append(Span(f"STALE: as it was {clock(view.stale_s)} s ago", "alarm"))
    elif view.asks_word and seen.output == "TRIPPED":
        spans.append(Span("READY: Enter opens a box for a typed word", "attention"))
    elif seen.arming and view.box is None:
        return _ready(seen)
    if seen.holding:
        more = "" if spans or view.answer else ": glides and follow-ons stand still"
        spans.append(Span(f"HOLDING{more}", "attention"))
    spans += _answer(view)
    return tuple(part for span in spans for part in (Span("   "), span))[1:]


def _ready(seen: Snapshot) -> Row:
    """What the second key does, and the caution beside it."""
    if seen.output == "SHUT" and seen.unvouched:
        return (Span("READY: Enter asks who answers for a house without seats", "attention"),)
    what = "restores" if seen.output == "HUSHED" else "arms"
    return Span(f"READY: Enter {what}", "attention"), Span("  "), Span(CAUTION_LINE, "text")


def _standby(view: View, width: int) -> list[Row]:
    ref = view.snapshot.standby
    if not ref:
        return _block("--", "big", [Span("nothing stands by")], view.dot, width)
    cue = _cue(view, ref)
    barred = view.snapshot.states.get(ref) == "barred"
    caption = Span(f"BARRED {ref}", "attention") if barred else Span(f"stand by {ref}")
    role: Role = "big-attention" if barred else "big"
    note = view.snapshot.barred.get(ref, cue.note) if barred else cue.note
    small = [caption, *_small(cue.title, "text"), *_small(note, "dim")]
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
    return _block(reading, "big", small, view.dot, width, _STEADY)


def _guard(view: View, width: int) -> list[Row]:
    """State and headroom; in place of a headroom, why nothing may sound."""
    guard = view.snapshot.guard
    role = _GUARD_ROLE.get(guard.state, "big-alarm")
    if guard.state in SILENT:
        why = [Span("guard"), *_small(guard.reason, "dim")]
        return _block(guard.state, role, why, view.dot, width)
    small = [Span("guard, dB left")] if guard.headroom_db is not None else [Span("guard")]
    steady = f"{guard.state} {_STEADY}"
    return _block(_reading(guard, width), role, small, view.dot, width, steady)


def _reading(guard: GuardView, width: int) -> str:
    """State and headroom; far over a cap the tenths give way, in a small terminal the number."""
    headroom = guard.headroom_db
    whole = "--" if headroom is None else f"{headroom:.0f}"
    readings = (f"{guard.state} {level(headroom)}", f"{guard.state} {whole}", guard.state)
    return next((text for text in readings if glyphs.width_of(text) <= width), guard.state)


def _small(text: str, role: Role) -> list[Span]:
    return [Span(text, role)] if text else []


def _answer(view: View) -> list[Span]:
    if view.answer is None:
        return []
    title, answer = view.answer
    if answer.done:
        return [Span(f"{title}: {answer.text or 'done'}")]
    if not answer.reason:
        return [Span(": ".join(part for part in (title, answer.text) if part), "attention")]
    why = f"{answer.reason}, {answer.text}" if answer.text else answer.reason
    return [Span(f"{title} REFUSED: {why}", "attention")]


def _cue(view: View, ref: str) -> CueText:
    return next((cue for cue in view.sheet.cues if cue.ref == ref), CueText(ref, ""))


def _block(
    reading: str, role: Role, small: list[Span], dot: str, width: int, steady: str = ""
) -> list[Row]:
    """A big reading, then small print; a reading too wide for glyphs is written out instead.

    The small print stands where it would beside `steady`, unless the reading is wider.
    """
    if glyphs.width_of(reading) > width:
        written = (Span(cut(reading, width), role),)
        return [BLANK, BLANK, written, BLANK, BLANK]
    wide = max(glyphs.width_of(reading), min(glyphs.width_of(steady), width))
    room = width - wide - 2
    if room < _LEAST_PRINT:
        small = []
    lines: list[Span] = []
    for span in small:
        rows = glyphs.ROWS - len(lines) if span is small[-1] else 2
        lines += [Span(line, span.role) for line in wrap(span.text, room, rows)]
    lines += [_EMPTY] * glyphs.ROWS
    drawn = (row.ljust(wide) for row in glyphs.draw(reading, dot))
    return [(Span(big, role), Span("  "), line) for big, line in zip(drawn, lines, strict=False)]
