"""What can be done on the Sheet, while the mode is WRITE or WALK."""

from __future__ import annotations

from beamctl.actions import Action


def _verb(name: str, title: str, keys: tuple[str, ...], text: str) -> Action:
    return Action(f"sheet-{name}", None, title, keys, text, on=("sheet",))


UP = _verb("up", "Up", ("up",), "One row up: a cue, a line of a cue, or a field of an act.")
DOWN = _verb("down", "Down", ("down",), "One row down: a cue, a line of a cue, a field of an act.")
PAGE_UP = _verb("page-up", "Page up", ("pageup",), "As many rows up as show.")
PAGE_DOWN = _verb("page-down", "Page down", ("pagedown",), "As many rows down as show.")
FIRST = _verb("first", "First", ("home",), "To the first cue, line or field.")
LAST = _verb("last", "Last", ("end",), "To the last cue, line or field.")
IN = _verb(
    "in",
    "In",
    ("enter", "kp_enter", "right"),
    "Steps into the cue, then into the act; on a field it opens a box that changes it.",
)
OUT = _verb("out", "Out", ("escape", "left"), "Steps out: of the field, the act, the cue.")

NEW_CUE = _verb(
    "new-cue",
    "New cue",
    ("c",),
    "Writes a cue after this one, by a number that is free between its neighbours.",
)
NEW_ACT = _verb(
    "new-act",
    "New act",
    ("a",),
    "Writes an act after this one: asks for its beam, then for what it aims at.",
)
COPY = _verb(
    "copy",
    "Copy",
    ("o",),
    "Writes the cue once more after itself, or the act the cursor is on, after that act.",
)
SPLIT = _verb(
    "split",
    "Split",
    ("s",),
    "Makes two cues of one: this act and those below it begin the new one, from its own GO.",
)
RENUMBER = _verb(
    "renumber",
    "Renumber",
    ("r",),
    "Counts the lifted cues anew, or all from this one on; what follows them follows along.",
)
EARLIER = _verb(
    "earlier", "Earlier", ("less_than_sign",), "Moves the cue, or the act, one place up."
)
LATER = _verb(
    "later", "Later", ("greater_than_sign",), "Moves the cue, or the act, one place down."
)
LIFT = _verb(
    "lift",
    "Lift",
    ("l",),
    "Lifts the cue or the act, or lets go of it; as many as you like stay lifted.",
)
SET_DOWN = _verb(
    "set-down",
    "Set down",
    ("p",),
    "Puts all that is lifted after the cursor: cues in the sheet, acts in any cue.",
)
TAKE_AWAY = _verb(
    "take-away",
    "Take away",
    ("delete", "backspace"),
    "Takes the cue or the act away, or empties the field; nothing is asked, Undo brings it back.",
)
TITLE = _verb("title", "Title", ("t",), "Gives the cue other words.")
NOTE = _verb("note", "Note", ("n",), "Writes the note of the cue; the operator reads it, too.")
BEAMS = _verb(
    "beams", "Beams", ("b",), "Begins a beam on a panel, gives one another name, or ends one."
)
FIT = _verb(
    "fit", "Fit", ("f",), "Takes the trim that fits under the cap, where the cue is barred for it."
)
STAND_BY = _verb(
    "stand-by", "Stand by here", ("h",), "Puts this cue on stand-by, and fires nothing."
)
COMPARE = _verb(
    "compare",
    "Compare",
    ("v",),
    "Lists what differs from the show as it was saved last; the same key closes the list.",
)

MOVES = (UP, DOWN, PAGE_UP, PAGE_DOWN, FIRST, LAST, IN, OUT)
DEEDS = (
    *(NEW_CUE, NEW_ACT, COPY, SPLIT, RENUMBER, EARLIER, LATER, LIFT, SET_DOWN, TAKE_AWAY, TITLE),
    *(NOTE, BEAMS, FIT, STAND_BY, COMPARE),
)
VERBS: tuple[Action, ...] = (*MOVES, *DEEDS)
