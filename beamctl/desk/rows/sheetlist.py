"""The cues of the Sheet, one row each; only the rows that show are made."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass

from beamctl.desk.format import BLANK, Role, Row, Span, fit, pad, two_ends
from beamctl.desk.rows.cues import MARKS, ROLES, state_of
from beamctl.show.sheet import Cue
from beamctl.snapshot import Snapshot

AT, LIFTED, EDITED = ">", "^", "*"
_REF = 6  # cells, at least


@dataclass(frozen=True, slots=True)
class Signs:
    """What is marked beside the states: the cue under the cursor, lifted cues, edited cues."""

    at: int
    lifted: Collection[str] = ()
    edited: Collection[str] = ()
    in_words: bool = False  # "edited" is spelled out, as in WALK


def list_rows(
    cues: tuple[Cue, ...], seen: Snapshot, signs: Signs, top: int, width: int, height: int
) -> list[Row]:
    """`height` rows of `cues` from number `top` on."""
    shown = range(top, min(top + max(height, 0), len(cues)))
    rows = [list_row(cues[n], seen, signs, n == signs.at, width) for n in shown]
    return [*rows, *[BLANK] * (height - len(rows))]


def list_row(cue: Cue, seen: Snapshot, signs: Signs, at: bool, width: int) -> Row:
    """Cursor, lifted, state, reference, title; what follows and whether it was edited last."""
    state = state_of(cue.ref, seen)
    look = "standing by" if cue.ref == seen.standby and state != "barred" else state
    lit: Role = "text" if at else "dim"
    role = ROLES.get(look, lit)
    lifted = cue.ref in signs.lifted
    words = [f"then {cue.then}"] if cue.then else []
    if cue.ref in signs.edited:
        words.append("edited" if signs.in_words else EDITED)
    head = (
        Span(f"{AT if at else ' '}{LIFTED if lifted else ' '}", "text"),
        Span(f"{MARKS.get(look, '[?]')} {pad(cue.ref, max(_REF, len(cue.ref)))} ", role),
        Span(cue.title, lit),
    )
    return two_ends(head, (Span("  ".join(words), lit),), width)


def kept_in(top: int, first: int, last: int, height: int) -> int:
    """The first row that shows, moved as little as it takes to have rows `first` to `last` in.

    Where they do not fit, `first` is in.
    """
    return max(min(max(top, last - height + 1), first), 0)


def no_cue_rows(width: int, new_key: str) -> list[Row]:
    """A sheet without cues."""
    return [fit((Span("  no cue yet: "), Span(f"{new_key} writes the first", "text")), width)]
