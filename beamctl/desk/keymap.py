"""Which key does what on which screen: the registry's own keys, or those the user has bound.

While the mode is WRITE or WALK the screen's own verbs come first; in SHOW they have no keys at all,
so that whatever screen is up, the keys of a show are the keys of a show.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from beamctl.actions import Action
from beamctl.desk.registry import EVERYTHING
from beamctl.desk.verbs.common import HELP, LEAVE, SCREENS, SWITCH_MODE

ENTERS = ("enter", "kp_enter")  # what ends a box and the caution, whatever GO is bound to
SURE_HUSH = ("f12", "insert")  # always hush, also while something is typed
RUNS = ("desk", "guard")  # the screens where a show is run from, in every mode
_NOT_IN_SHOW = (SWITCH_MODE.name,)  # a stray letter must not open a box in the dark
_FREE_TO_EDIT = (
    *("enter", "kp_enter", "plus", "kp_plus", "minus", "kp_minus", "full_stop", "kp_decimal"),
    *("delete", "asterisk", "kp_multiply"),
)

# What terminals with the extended keyboard protocol call keys of the number pad.
_NUMBER_PAD = {
    "add": "kp_plus",
    "subtract": "kp_minus",
    "multiply": "kp_multiply",
    "decimal": "kp_decimal",
    "divide": "kp_divide",
}
_SIGNS = {
    "asterisk": "*", "plus": "+", "minus": "-", "full_stop": ".", "slash": "/", "comma": ",",
    "left_square_bracket": "[", "right_square_bracket": "]", "less_than_sign": "<",
    "greater_than_sign": ">", "question_mark": "?", "equals_sign": "=", "colon": ":",
}  # fmt: skip
_SHORT = {
    "insert": "Ins", "delete": "Del", "escape": "Esc", "backspace": "Bksp", "pageup": "PgUp",
    "pagedown": "PgDn", "space": "Space",
}  # fmt: skip


@dataclass(frozen=True)
class Keymap:
    """The keys of one desk; `own` are what the user bound, action → keys."""

    own: Mapping[str, tuple[str, ...]] = field(default_factory=dict)

    def keys_of(self, name: str) -> tuple[str, ...]:
        """The keys of an action; those that always hush cannot be taken away."""
        action = EVERYTHING[name]
        keys = self.own.get(name, action.keys)
        return tuple(dict.fromkeys((*keys, *SURE_HUSH))) if name == "hush" else keys

    def name_of(self, key: str, screen: str = "desk", writing: bool = False) -> str:
        """The action that `key` is bound to there, "" for none."""
        key = _NUMBER_PAD.get(key, key)
        return self._table(screen, writing).get(key, "")

    def legend(self, screen: str, writing: bool) -> list[tuple[str, str]]:
        """(keys as printed on a keyboard, title) of all that has a key there; screens as one."""
        table = self._table(screen, writing)
        told = {
            name: printed([key for key in self.keys_of(name) if table.get(key) == name])
            for name in dict.fromkeys(table.values())
        }
        turns = [self.keys_of(name)[0] for name in (HELP.name, *SCREENS) if self.keys_of(name)]
        plain = [key for key in turns if "+" not in key] or turns
        told.pop(LEAVE.name, "")
        leave = printed(self.keys_of(LEAVE.name)[:1])
        rest = [(k, EVERYTHING[n].title) for n, k in told.items() if n not in (HELP.name, *SCREENS)]
        screens = (f"{printed(plain[:1])}..{printed(plain[-1:])}", "Screens")
        return [*rest, screens, (leave, LEAVE.title)]

    def helps(self, screen: str, writing: bool) -> list[tuple[str, str, str]]:
        """(keys, title, help) of everything that has a key there."""
        table = self._table(screen, writing)
        names = dict.fromkeys(table.values())
        return [
            (printed([k for k in self.keys_of(n) if table.get(k) == n]), a.title, a.help)
            for n, a in ((n, EVERYTHING[n]) for n in names)
        ]

    def _table(self, screen: str, writing: bool) -> dict[str, str]:
        """Key → action; the screen's own verbs first, and they win."""
        table: dict[str, str] = {}
        own_first = sorted(EVERYTHING.values(), key=lambda action: not action.on)
        for action in own_first:
            if _works(action, screen, writing):
                for key in self.keys_of(action.name):
                    if screen not in RUNS and not action.on and key in _taken(writing):
                        continue
                    table.setdefault(key, action.name)
        return table


def complaints(own: Mapping[str, tuple[str, ...]]) -> list[str]:
    """What is wrong with keys that a user bound, a line each; empty when nothing is."""
    found = [f"{name}: no such action" for name in own if name not in EVERYTHING]
    known = {name: keys for name, keys in own.items() if name in EVERYTHING}
    keymap = Keymap(known)
    for name in known:
        for key in keymap.keys_of(name):
            others = [
                other.name
                for other in EVERYTHING.values()
                if key in keymap.keys_of(other.name) and _clash(EVERYTHING[name], other, key)
            ]
            if others:
                found.append(f"{name}: {key} is bound to {others[0]} as well")
    return found


def _clash(one: Action, other: Action, key: str) -> bool:
    """Whether `key` cannot be both; some keys of a show are free where a show is written."""
    if one.name == other.name:
        return False
    if one.on and other.on:
        return bool(set(one.on) & set(other.on))
    return one.on == other.on or key not in _FREE_TO_EDIT


def printed(keys: tuple[str, ...] | list[str]) -> str:
    """Keys as they are printed on a keyboard."""
    return "/".join(dict.fromkeys(_label(key) for key in keys if not key.startswith("kp_")))


def _taken(writing: bool) -> tuple[str, ...]:
    """Keys of a show that are none on a screen for writing; Delete, which takes away there, never
    ends a sound, be the show locked or not."""
    return _FREE_TO_EDIT if writing else ("delete",)


def _works(action: Action, screen: str, writing: bool) -> bool:
    if action.on:
        return writing and screen in action.on
    return writing or action.name not in _NOT_IN_SHOW


def _label(key: str) -> str:
    if key.startswith("ctrl+"):
        return f"^{key[-1].upper()}"
    if key.startswith("shift+"):
        return f"Shift {_label(key.removeprefix('shift+'))}"
    return _SIGNS.get(key) or _SHORT.get(key) or (key if len(key) == 1 else key.capitalize())


DEFAULT = Keymap()
