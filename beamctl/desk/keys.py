"""From a key to what is asked of the host. The keys themselves stand in the registry."""

from __future__ import annotations

from dataclasses import dataclass, field

from beamctl.actions import ACTIONS, Action
from beamctl.snapshot import Snapshot


@dataclass(frozen=True, slots=True)
class DeskKey:
    """A key that asks nothing of the host."""

    name: str
    title: str
    keys: tuple[str, ...]
    help: str


HELP = DeskKey("help", "Help", ("f1",), "Opens this page and closes it; hush works here too.")
LEAVE = DeskKey(
    "leave",
    "Leave",
    ("ctrl+q", "ctrl+c"),
    "Leaves the desk and changes no sound; asks for the key again while OPEN.",
)
SCREENS = {
    screen.name: screen
    for screen in (
        DeskKey("desk", "Desk", ("f2",), "Shows the desk: readings, sheet, beams, panels."),
        DeskKey("guard", "Guard", ("f7",), "Shows what every seat gets; all keys work there too."),
    )
}

_ROWS: tuple[Action | DeskKey, ...] = (*ACTIONS.values(), *SCREENS.values(), HELP, LEAVE)
_NAME_OF = {key: row.name for row in _ROWS for key in row.keys}

# What terminals with the extended keyboard protocol call keys of the number pad.
_NUMBER_PAD = {
    "add": "kp_plus",
    "subtract": "kp_minus",
    "multiply": "kp_multiply",
    "decimal": "kp_decimal",
}

_SIGNS = {"asterisk": "*", "plus": "+", "minus": "-", "full_stop": ".", "slash": "/"}
_SHORT = {"insert": "Ins", "delete": "Del"}


ENTERS = ("enter", "kp_enter")  # what ends a box and the caution, whatever GO is bound to


@dataclass(frozen=True, slots=True)
class Press:
    """One key press: what it is bound to, the key, and the sign that it types."""

    name: str
    key: str
    sign: str

    @property
    def counts_once(self) -> bool:
        """True for what must not repeat while the key is held."""
        return self.name == "go" or self.key in ENTERS


@dataclass(frozen=True, slots=True)
class Ask:
    """An action and its arguments, ready for the host."""

    name: str
    arguments: dict[str, object] = field(default_factory=dict)


def name_of(key: str) -> str:
    """The action or desk key that `key` is bound to, "" for none."""
    return _NAME_OF.get(key) or _NAME_OF.get(_NUMBER_PAD.get(key, ""), "")


def ask_for(name: str, seen: Snapshot) -> Ask | None:
    """What action `name` asks of the host with `seen` on the screen; None when it is nothing.

    GO names the cue the eye sees, so that it can never fire one that came up meanwhile.
    """
    if name == "go":
        if seen.arming:
            return Ask("confirm")
        return Ask(name, {"ref": seen.standby}) if seen.standby else None
    if name == "ready" and seen.notices and seen.output == "OPEN":
        return Ask("acknowledge")
    if name == "hold" and seen.holding:
        return Ask("carry-on")
    if name in ("next", "back"):
        return Ask(name, {"by": 1 if name == "next" else -1})
    return Ask(name)


def legend() -> list[tuple[str, str]]:
    """(keys as printed on a keyboard, title) of everything that has a key."""
    return [(_printed(row.keys), row.title) for row in _ROWS if row.keys]


def helps() -> list[tuple[str, str, str]]:
    """(keys, title, help) of everything that has a key."""
    return [(_printed(row.keys), row.title, row.help) for row in _ROWS if row.keys]


def _printed(keys: tuple[str, ...]) -> str:
    return "/".join(_label(key) for key in keys if not key.startswith("kp_"))


def _label(key: str) -> str:
    if key.startswith("ctrl+"):
        return f"^{key[-1].upper()}"
    return _SIGNS.get(key) or _SHORT.get(key) or key.capitalize()
