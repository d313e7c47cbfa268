"""The sheet as the operator reads it: one row a cue, its mark first, its state in words last."""

from __future__ import annotations

from beamctl.desk.format import BLANK, Role, Row, Span, View, clock, fit, pad, two_ends
from beamctl.snapshot import CueText, Snapshot

MARKS = {
    "resting": "[ ]",
    "standing by": "[=]",
    "running": "[#]",
    "tailing": "[~]",
    "done": "[.]",
    "barred": "[!]",
}
_ROLES: dict[str, Role] = {
    "standing by": "text",
    "running": "live",
    "tailing": "live",
    "barred": "attention",
}
SOUNDING = ("running", "tailing")

NOTE_FROM = 8  # rows; in a shorter sheet the note stands beside the big number only
REACH = 100  # cells; a state further from its title than this is hard to follow


def sheet_rows(view: View, width: int, height: int) -> list[Row]:
    """`height` rows around the cue standing by; a heading, and every sounding cue if it fits."""
    if height < 1:
        return []
    rows = [_heading(view, width)]
    cues, seen = view.sheet.cues, view.snapshot
    note_rows = 1 if height >= NOTE_FROM and _note(view) else 0
    for index in shown(view, height - 1 - note_rows):
        rows.append(cue_row(cues[index], seen, width))
        if note_rows and cues[index].ref == seen.standby:
            rows.append(fit((Span(" " * 11 + cues[index].note),), width))
    return rows + [BLANK] * (height - len(rows))


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
    role = _ROLES.get(look, "dim")
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
        else f"{len(refs)} cues, "
    )
    heard = f"running {' '.join(sounding)}" if sounding else "none running"
    return two_ends((Span(view.sheet.title),), (Span(place + heard),), min(width, REACH))


def _anchor(seen: Snapshot, refs: list[str]) -> int:
    for ref in (seen.standby, seen.newest):
        if ref in refs:
            return refs.index(ref)
    return 0


def _note(view: View) -> str:
    return next((c.note for c in view.sheet.cues if c.ref == view.snapshot.standby), "")
