"""The beams of the sheet: a new one, another name, another panel, none."""

from __future__ import annotations

from collections.abc import Callable

from beamctl.desk.asking import Asking
from beamctl.desk.box import Box
from beamctl.desk.sheet.here import Here
from beamctl.show.checks import SHEET
from beamctl.show.edits import Drop, Edit, Put, Rename, Set
from beamctl.show.expected import A_NAME

NEW = "a new beam"
DEEDS = RENAME, PANEL, DROP = "another name", "another panel", "take it away"


def beams(here: Here) -> str:
    """Ask which beam, then what is to become of it."""
    lines = {f"{name}  on {spec.panel}": name for name, spec in here.sheet.beam.items()}

    def use(line: str) -> str:
        if line == NEW:
            _begin(here)
        elif line in lines:
            _one(here, lines[line])
        return "" if line else "Nothing matches."

    text = "A beam is a named source on one panel."
    picks = (NEW, *lines)
    here.asking.open(Box("BEAMS", text, "which one", use=use, choices=picks, strict=True))
    return ""


def _begin(here: Here) -> None:
    panels = tuple(here.draft.show.rig.panel)

    def begun(name: str, panel: str) -> Edit:
        return Edit(f"new beam {name} on {panel}", (Put(SHEET, ("beam", name), {"panel": panel}),))

    def use(name: str) -> str:
        if not name:
            return f"It wants {A_NAME}."
        if len(panels) == 1:
            return here.asking.edit(begun(name, panels[0]))
        _ask_panel(here.asking, name, panels, lambda panel: begun(name, panel))
        return ""

    here.asking.open(Box("A NEW BEAM", "What the acts will call it.", A_NAME, use=use))


def _one(here: Here, name: str) -> None:
    asking, place = here.asking, ("beam", name)
    panels = tuple(here.draft.show.rig.panel)

    def use(deed: str) -> str:
        if deed == RENAME:
            _rename(asking, name)
        elif deed == PANEL:
            _ask_panel(
                asking,
                name,
                panels,
                lambda panel: Edit(f"beam {name} on {panel}", (Set(SHEET, place, "panel", panel),)),
            )
        elif deed == DROP:
            return asking.edit(Edit(f"take beam {name} away", (Drop(SHEET, place),)))
        return "" if deed else "Nothing matches."

    text = f"It is thrown from panel {here.sheet.beam[name].panel}."
    asking.open(Box(f"BEAM {name}", text, "what to do", use=use, choices=DEEDS, strict=True))


def _rename(asking: Asking, now: str) -> None:
    def use(name: str) -> str:
        if name in ("", now):
            return ""
        return asking.edit(Edit(f"call beam {now} {name}", (Rename(SHEET, ("beam", now), name),)))

    text = "Every act that names it follows."
    asking.open(Box(f"ANOTHER NAME FOR {now}", text, A_NAME, use=use, typed=now))


def _ask_panel(
    asking: Asking, name: str, panels: tuple[str, ...], edit: Callable[[str], Edit]
) -> None:
    def use(panel: str) -> str:
        return asking.edit(edit(panel)) if panel else "Nothing matches."

    text = "Its acts are aimed from there."
    asking.open(Box(f"PANEL OF {name}", text, "which one", use=use, choices=panels, strict=True))
