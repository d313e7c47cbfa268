"""The desk's own boxes: the palette, finding a cue, and the mode."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from beamctl.desk.box import Box
from beamctl.desk.desk import Desk
from beamctl.desk.format import View
from beamctl.desk.keymap import RUNS, Keymap, printed
from beamctl.desk.registry import EVERYTHING
from beamctl.show.find import find as found

IN_SHOW_S = 4.0  # a box that nobody types in closes by itself while a show runs
GAP = "  "
MODES = {
    "WRITE": "the show is written, and every edit plays at once",
    "WALK": "the same in rehearsal: cues that were edited are marked",
    "SHOW": "locked: nothing can be edited, and stray keys do nothing",
}

Do = Callable[[str, View], None]


def palette(view: View, screen: str, keymap: Keymap, do: Do) -> Box:
    """Everything that can be asked for here, with its keys; one of it is done."""
    writing = view.snapshot.mode != "SHOW"
    lines: dict[str, str] = {}
    for action in EVERYTHING.values():
        here = not action.on or (writing and screen in action.on)
        if here and _by_name(action.name):
            keys = printed(keymap.keys_of(action.name))
            lines[f"{action.title}{GAP}{f'({keys}) ' if keys else ''}{action.help}"] = action.name

    def use(line: str) -> str:
        if line not in lines:
            return "Nothing matches."
        do(lines[line], view)
        return ""

    return Box(
        "ALL ACTIONS", "", "a part of its name", use=use, choices=tuple(lines), strict=True,
        idle_s=_idle_s(view),
    )  # fmt: skip


def find(view: View, desk: Desk) -> Box:
    """Finds a cue: where a show is run it goes on stand-by, elsewhere the cursor goes there."""
    lines = {
        cue.ref: f"{cue.ref}{GAP}{cue.title}{GAP}{cue.note}".rstrip() for cue in view.sheet.cues
    }
    refs = {line: ref for ref, line in lines.items()}

    def search(typed: str) -> tuple[str, ...]:
        return tuple(lines[ref] for ref in found(view.sheet.cues, typed))

    runs = desk.screen_name() in RUNS or view.snapshot.mode == "SHOW"

    def use(line: str) -> str:
        ref = refs.get(line, "")
        if not ref:
            return "No cue is found by that."
        if runs:
            desk.ask("standby", ref=ref)
        else:
            desk.cursor.ref, desk.cursor.act = ref, 0
        return ""

    text = "Enter puts it on stand-by; nothing is fired." if runs else "Enter goes there."
    return Box(
        "FIND A CUE", text, "its number or words", use=use, choices=tuple(refs), search=search,
        strict=True, idle_s=_idle_s(view),
    )  # fmt: skip


def modes(view: View, desk: Desk) -> Box:
    """WRITE, WALK or SHOW; into SHOW and out of it a word must be typed."""
    now = view.snapshot.mode
    lines = {f"{mode}{GAP}{what}": mode for mode, what in MODES.items() if mode != now}

    def use(line: str) -> str:
        to = lines.get(line, "")
        if not to:
            return "One of them, please."
        if to == "SHOW":
            desk.open(replace(_lock(desk), idle_s=0.0))
        elif now == "SHOW":
            desk.open(_unlock(desk, to))
        else:
            desk.ask("mode", to=to)
        return ""

    return Box(
        "MODE", f"Now it is {now}.", "which one", use=use, choices=tuple(lines), strict=True,
        idle_s=_idle_s(view),
    )  # fmt: skip


def _lock(desk: Desk) -> Box:
    def use(text: str) -> str:
        if text.casefold() != "show":
            return "It wants the word show."
        desk.ask("mode", to="SHOW", word=text)
        return ""

    return Box("LOCK THE SHOW", MODES["SHOW"].capitalize() + ".", "the word show", use=use)


def _unlock(desk: Desk, to: str) -> Box:
    def use(text: str) -> str:
        word, _, name = text.partition(" ")
        if word.casefold() != "unlock" or not name.strip():
            return "It wants the word unlock, then a name."
        desk.ask("mode", to=to, word=word, name=name.strip())
        return ""

    text = "The show is locked. Whoever unlocks it gives a name, and the journal keeps it."
    return Box("UNLOCK THE SHOW", text, "unlock and your name", use=use)


def _idle_s(view: View) -> float:
    return IN_SHOW_S if view.snapshot.mode == "SHOW" else 0.0


def _by_name(name: str) -> bool:
    """What can be asked for by its name alone; the rest takes arguments, or two acts."""
    return name not in (
        *("go", "confirm", "restore", "standby", "clear", "vouch", "mode", "carry-on"),
        *("sound-now", "sound-off", "air", "palette"),
    )
