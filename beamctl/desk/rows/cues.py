"""The sheet as the operator reads it: one row a cue, its mark first, its state in words last."""

from __future__ import annotations

from beamctl.desk.format import BLANK, Role, Row, Span, View, clock, fit, pad, two_ends, wrap
from beamctl.snapshot import CueText, Snapshot

MARKS = {
    "resting": "[ ]",
    "standing by": "[=]",
    "running": "[#]",
    "tailing": "[~]",
    "done": "[.]",
    "barred": "[!]",
}
ROLES: dict[str, Role] = {
    "standing by": "text",
    "running": "live",
    "tailing": "live",
    "barred": "attention",
}
SOUNDING = ("running", "tailing")

NOTE_FROM = 8  # rows; in a shorter sheet the note stands beside the big number only
_INDENT = 11  # cells, to where titles begin
REACH = 100  # cells; a state further from its title than this is hard to follow


def sheet_rows(view: View, width: int, height: int) -> list[Row]:
    """`height` rows around the cue standing by; a heading, and every sounding cue if it fits.

    Below a barred cue that stands by is why; below every barred cue where there is room for it.
    """
    if height < 1:
        return []
    below = _below(view, width, height)
    indexes = shown(view, height - 1 - len(below))
    rest = height - 1 - len(below) - len(indexes)
    rows = [_heading(view, width)]
    for cue in (view.sheet.cues[index] for index in indexes):
        rows.append(cue_row(cue, view.snapshot, width))
        if cue.ref == view.snapshot.standby:
            rows += below
        elif (why := _why(cue.ref, view.snapshot, width, 1)) and rest:
            rows += why
            rest -= 1
    return [*rows, *[BLANK] * (height - len(rows))]


def shown(view: View, rows: int) -> list[int]:
    """Indexes of the cues in `rows` rows: a window, but sounding cues outside it come in.

    Those farthest from the cue standing by give way, at most half of them.
    """
    refs = [cue.ref for cue in view.sheet.cues]
    rows = max(min(rows, len(refs)), 0)
    anchor = _anchor(view.snapshot, refs)
    start = max(0, min(anchor - rows // 3, len(refs) - rows))
    window = list(range(start, start + rows))
    sounding = [i for i, ref in enumerate(refs) if state_of(ref, view.snapshot) in SOUNDING]
    outside = [i for i in sounding if i not in window]
    for index in reversed(outside[-(rows // 2) :] if rows >= 2 else []):
        quiet = [i for i in window if i not in sounding and i != anchor]
        if quiet:
            window.remove(max(quiet, key=lambda i: abs(i - anchor)))
            window.append(index)
    return sorted(window)


def state_of(ref: str, seen: Snapshot) -> str:
    """State of cue `ref`, whether or not it also stands by."""
    state = seen.states.get(ref, "resting")
    return "resting" if state == "standing by" else state


def cue_row(cue: CueText, seen: Snapshot, width: int) -> Row:
    """One cue; of it only mark and number are lit.

    A barred cue that stands by keeps the mark of a barred one and says both.
    """
    state = state_of(cue.ref, seen)
    stands = cue.ref == seen.standby
    look = "standing by" if stands and state != "barred" else state
    role = ROLES.get(look, "dim")
    words = [word for word in ("stand by" if stands else "", _words(cue, state, seen)) if word]
    head = Span(f"{MARKS.get(look, '[?]')} {pad(cue.ref, 6)} ", role)
    return two_ends((head, Span(cue.title)), (Span(", ".join(words)),), min(width, REACH))


def _words(cue: CueText, state: str, seen: Snapshot) -> str:
    words = [] if state == "resting" else [state]
    if state in SOUNDING and cue.ref in seen.left_s:
        words.append(f"{clock(seen.left_s[cue.ref])} left")
    if cue.ref in seen.follow:
        words.append(f"follows in {clock(seen.follow[cue.ref])}")
    elif cue.then and state == "resting":
        words.append(f"then {cue.then}")
    return ", ".join(words)


def _heading(view: View, width: int) -> Row:
    refs = [cue.ref for cue in view.sheet.cues]
    sounding = [ref for ref in refs if state_of(ref, view.snapshot) in SOUNDING]
    place = (
        f"cue {refs.index(view.snapshot.standby) + 1} of {len(refs)}, "
        if (view.snapshot.standby in refs)
        else f"{len(refs)} cue{'' if len(refs) == 1 else 's'}, "
    )
    heard = f"running {' '.join(sounding)}" if sounding else "none running"
    return two_ends((Span(view.sheet.title),), (Span(place + heard),), min(width, REACH))


def _anchor(seen: Snapshot, refs: list[str]) -> int:
    for ref in (seen.standby, seen.newest):
        if ref in refs:
            return refs.index(ref)
    return 0


def _below(view: View, width: int, height: int) -> list[Row]:
    """What stands below the cue standing by: why it is barred, or its note in a taller sheet."""
    seen = view.snapshot
    why = _why(seen.standby, seen, width, 2)
    if why or height < NOTE_FROM:
        return why[: max(height - 2, 0)]
    note = next((c.note for c in view.sheet.cues if c.ref == seen.standby), "")
    return [_under(note, width)] if note else []


def _why(ref: str, seen: Snapshot, width: int, rows: int) -> list[Row]:
    why = seen.barred.get(ref, "") if state_of(ref, seen) == "barred" else ""
    lines = wrap(why, min(width, REACH) - _INDENT, rows)
    return [_under(line, width) for line in lines]


def _under(text: str, width: int) -> Row:
    return fit((Span(" " * _INDENT + text),), width)
