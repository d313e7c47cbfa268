"""What works on every screen: help, the screens, the palette, the dimmer, leaving."""

from __future__ import annotations

from beamctl.actions import Action

HELP = Action("help", None, "Help", ("f1",), "Opens help and closes it; hush works there too.")
LEAVE = Action(
    "leave",
    None,
    "Leave",
    ("ctrl+q", "ctrl+c"),
    "Leaves the desk and changes no sound; asks for the key again while OPEN.",
)
PALETTE = Action(
    "palette", None, "All", ("f11",), "Lists all that can be done here; letters narrow it."
)
FIND = Action(
    "find",
    None,
    "Find",
    ("slash", "kp_divide"),
    "Finds a cue by its number or words. On the Desk it goes on stand-by, and never fires.",
)
DIM = Action("dim", None, "Dimmer", ("d",), "Dims the screen in three steps, then lights it again.")
SWITCH_MODE = Action(
    "switch-mode",
    None,
    "Mode",
    ("m",),
    "WRITE, WALK or SHOW; a typed word locks the show and unlocks it.",
)
KEY_TEST = Action(
    "key-test", None, "Key test", (), "Shows what this terminal sends for a key, and what it does."
)
SCREENS: dict[str, Action] = {
    screen.name: screen
    for screen in (
        Action("desk", None, "Desk", ("f2",), "Readings, next cues, beams, plan: to run a show."),
        Action("sheet", None, "Sheet", ("f3",), "The cues and their acts: to write a show."),
        Action("bench", None, "Bench", ("f4",), "One cue's beams beside the field they make."),
        Action("house", None, "House", ("f5",), "The room: air, spots, seats, surfaces."),
        Action("rig", None, "Rig", ("f6",), "The panels: cells, feeds, looms."),
        Action("guard", None, "Guard", ("f7",), "What every seat gets, and the caps."),
        Action("wire", None, "Wire", ("f8",), "The network: who may speak, and what was said."),
        Action("log", None, "Log", ("shift+f8", "f20"), "The journal of this evening."),
    )
}
EDITS = ("sheet", "bench", "house", "rig", "caps", "wire")  # the screens where a show is written
UNDO = Action(
    "undo",
    None,
    "Undo",
    ("u",),
    "Takes the newest edit back, as often as there are edits.",
    on=EDITS,
)
REDO = Action("redo", None, "Redo", ("y",), "Makes the edit again that Undo took back.", on=EDITS)
SAVE = Action(
    "save", None, "Save", ("w",), "Writes the show to disk; the show before it is kept.", on=EDITS
)
HISTORY = (UNDO, REDO, SAVE)
VERBS = (HELP, *SCREENS.values(), PALETTE, FIND, DIM, SWITCH_MODE, KEY_TEST, LEAVE)
