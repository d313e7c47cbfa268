"""What can be done on the Bench, while the mode is WRITE or WALK."""

from __future__ import annotations

from beamctl.actions import Action


def _verb(name: str, title: str, keys: tuple[str, ...], text: str) -> Action:
    return Action(f"bench-{name}", None, title, keys, text, on=("bench",))


LEFT = _verb("left", "Aim", ("left",), "Tries the beam one step to the left.")
RIGHT = _verb("right", "Aim", ("right",), "Tries the beam one step to the right.")
UP = _verb("up", "Aim", ("up",), "Tries the beam one step up.")
DOWN = _verb("down", "Aim", ("down",), "Tries the beam one step down.")
STEP = _verb("step", "Step", ("s",), "The arrows' next step: half a degree, a tenth, or five.")
ANGLES = _verb("angles", "Angles", ("a",), "Asks for azimuth and elevation from the panel.")
GO_TO = _verb("target", "Target", ("g",), "Asks for a seat or a spot to aim at.")
SEAT_ON = _verb("seat-on", "Seat", ("n",), "Tries the next seat of the row.")
SEAT_BACK = _verb("seat-back", "Seat", ("b",), "Tries the seat before in the row.")
ROW_ON = _verb("row-on", "Row", ("N",), "Tries the row behind, where it is nearest.")
ROW_BACK = _verb("row-back", "Row", ("B",), "Tries the row in front, where it is nearest.")
SPOT_ON = _verb("spot-on", "Spot", ("o",), "Tries the next spot of the house.")
SPOT_BACK = _verb("spot-back", "Spot", ("O",), "Tries the spot before.")
VIA = _verb("via", "Bounce", ("v",), "Sends the beam off the next surface, and at last straight.")
DEPTH = _verb("depth", "Depth", ("e",), "Asks how deep the programme modulates the carrier.")
LAW = _verb("law", "Law", ("l",), "Tries the next law: how programme becomes envelope.")
REACH = _verb("reach", "Reach", ("r",), "Asks where the beam is focused: far, aim, or metres.")
TRIM = _verb("trim", "Trim", ("t",), "Asks for the carrier's level.")
LOUDER = _verb("louder", "Trim", ("plus", "kp_plus"), "Tries half a decibel more carrier.")
SOFTER = _verb("softer", "Trim", ("minus", "kp_minus"), "Tries half a decibel less carrier.")
OVER = _verb("over", "Time", ("k",), "Asks how long the change takes: a rise, or a travel.")
TAKE = _verb("take", "Take it", ("enter", "kp_enter"), "Writes what is tried into the act.")
FORGET = _verb("forget", "Forget it", ("escape",), "Forgets what is tried.")
VIEW = _verb("view", "Plan, section", ("x",), "Turns between the plan and the section.")
HEIGHT = _verb(
    "height", "Height", ("h",), "Asks for the height of the plan; nothing: the target's."
)
TRY = _verb("try", "Sound it now", ("p",), "Sounds the act as the sheet has it, at a trim you set.")
QUIET = _verb("quiet", "End the try", ("q",), "Ends what Sound it now began.")
ACT_BACK = _verb("act-back", "Act", ("pageup",), "To the act before, and to the cue before.")
ACT_ON = _verb("act-on", "Act", ("pagedown",), "To the next act, and to the next cue.")

AIMS = (LEFT, RIGHT, UP, DOWN, STEP, ANGLES, GO_TO, SEAT_ON, SEAT_BACK, ROW_ON, ROW_BACK, SPOT_ON)
SHAPES = (SPOT_BACK, VIA, DEPTH, LAW, REACH, TRIM, LOUDER, SOFTER, OVER, TAKE, FORGET)
OTHERS = (VIEW, HEIGHT, TRY, QUIET, ACT_BACK, ACT_ON)
VERBS: tuple[Action, ...] = (*AIMS, *SHAPES, *OTHERS)
