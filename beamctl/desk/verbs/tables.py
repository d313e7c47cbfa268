"""What can be done on House, Rig, Wire and the caps, and on the Log, while WRITE or WALK."""

from __future__ import annotations

from beamctl.actions import Action

TABLES = ("house", "rig", "caps", "wire")


def _verb(
    name: str, title: str, keys: tuple[str, ...], text: str, on: tuple[str, ...] = TABLES
) -> Action:
    return Action(f"table-{name}", None, title, keys, text, on=on)


UP = _verb("up", "Up", ("up",), "One row up: a table, or a field of one.")
DOWN = _verb("down", "Down", ("down",), "One row down: a table, or a field of one.")
FIRST = _verb("first", "First", ("home",), "To the first table or field.")
LAST = _verb("last", "Last", ("end",), "To the last table or field.")
IN = _verb(
    "in",
    "In",
    ("enter", "kp_enter", "right"),
    "Steps into the table; on a field it opens a box that changes it.",
)
OUT = _verb("out", "Out", ("escape", "left"), "Steps out of the table.")
NEW = _verb(
    "new",
    "New",
    ("n",),
    "Begins a block of seats, a spot, a surface, a panel, or lets another address speak.",
    ("house", "rig", "wire"),
)
RENAME = _verb(
    "rename",
    "Rename",
    ("r",),
    "Gives the table another name; what names it in the sheet follows.",
    ("house", "rig"),
)
TAKE_AWAY = _verb(
    "take-away",
    "Take away",
    ("delete", "backspace"),
    "Takes the table away, or leaves the field out; nothing is asked, Undo brings it back.",
)
AIR_NOW = _verb(
    "air-now",
    "Air now",
    ("a",),
    "Asks for the air as it is now. Beams and guard take it up while nothing sounds; house.toml "
    "stays as it was signed.",
    ("house",),
)
CAPS = _verb(
    "caps",
    "Caps",
    ("c",),
    "Opens what the venue allows, field by field. An edit takes the signature off; "
    "`beamctl sign` puts it on.",
    ("guard",),
)

LOG_UP = _verb("log-up", "Up", ("up",), "One row back in time.", ("log",))
LOG_DOWN = _verb("log-down", "Down", ("down",), "One row on in time.", ("log",))
LOG_PAGE_UP = _verb("log-page-up", "Page up", ("pageup",), "A page back in time.", ("log",))
LOG_PAGE_DOWN = _verb("log-page-down", "Page down", ("pagedown",), "A page on.", ("log",))
LOG_FIRST = _verb("log-first", "First", ("home",), "To the oldest row that is kept.", ("log",))
LOG_LAST = _verb(
    "log-last", "Newest", ("end",), "To the newest row, and on with those that come.", ("log",)
)
LOG_NARROW = _verb(
    "log-narrow", "Narrow", ("n",), "Leaves only rows that have your word in them.", ("log",)
)

EDITS = (UP, DOWN, FIRST, LAST, IN, OUT, NEW, RENAME, TAKE_AWAY)
LOG = (LOG_UP, LOG_DOWN, LOG_PAGE_UP, LOG_PAGE_DOWN, LOG_FIRST, LOG_LAST, LOG_NARROW)
VERBS: tuple[Action, ...] = (*EDITS, AIR_NOW, CAPS, *LOG)
