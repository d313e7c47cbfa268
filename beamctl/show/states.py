"""The state machines, each one table: what the output may do, what a cue may do, and the modes.

A missing entry is a refusal; `refusal` gives its reason word. Nothing else decides a transition.
"trip" and "lease-over" are the guard's, "host-over" is a host that stalled. A trip that comes while
nothing may sound leaves the state as it is; the player remembers it, and lets nobody open.
"""

from __future__ import annotations

from typing import Literal

Output = Literal["COLD", "SHUT", "OPEN", "HUSHED", "TRIPPED", "LOST"]
CueState = Literal["resting", "standing by", "running", "tailing", "done", "barred"]
Mode = Literal["WRITE", "WALK", "SHOW"]

Reason = Literal[
    "not-armed",
    "not-standing-by",
    "barred",
    "tripped",
    "unknown-ref",
    "repeat",
    "too-late",
    "too-early",
    "not-allowed",
    "bad-type",
    "locked",
    "busy",
]

OUTPUT: dict[tuple[Output, str], Output] = {
    ("COLD", "sink-open"): "SHUT",
    ("SHUT", "arm"): "OPEN",
    ("OPEN", "hush"): "HUSHED",
    ("SHUT", "hush"): "SHUT",
    ("COLD", "hush"): "COLD",
    ("HUSHED", "hush"): "HUSHED",
    ("TRIPPED", "hush"): "TRIPPED",
    ("LOST", "hush"): "LOST",
    ("OPEN", "host-over"): "HUSHED",
    ("OPEN", "lease-over"): "TRIPPED",
    ("OPEN", "trip"): "TRIPPED",
    ("HUSHED", "trip"): "TRIPPED",
    ("TRIPPED", "trip"): "TRIPPED",
    ("SHUT", "trip"): "SHUT",
    ("LOST", "trip"): "LOST",
    ("TRIPPED", "clear"): "HUSHED",
    ("SHUT", "clear"): "SHUT",
    ("LOST", "clear"): "LOST",
    ("HUSHED", "restore"): "OPEN",
    ("OPEN", "go"): "OPEN",
    ("SHUT", "sink-lost"): "LOST",
    ("OPEN", "sink-lost"): "LOST",
    ("HUSHED", "sink-lost"): "LOST",
    ("TRIPPED", "sink-lost"): "LOST",
    ("LOST", "sink-open"): "SHUT",
    ("SHUT", "sink-close"): "COLD",
    ("OPEN", "sink-close"): "COLD",
    ("HUSHED", "sink-close"): "COLD",
    ("TRIPPED", "sink-close"): "COLD",
    ("LOST", "sink-close"): "COLD",
}

CUE: dict[tuple[CueState, str], CueState] = {
    ("resting", "stand-by"): "standing by",
    ("done", "stand-by"): "standing by",
    ("standing by", "stand-down"): "resting",
    ("resting", "go"): "running",
    ("standing by", "go"): "running",
    ("done", "go"): "running",
    ("running", "tail"): "tailing",
    ("running", "settled"): "done",
    ("tailing", "settled"): "done",
}

# From one mode to another: the word that must be typed, "" where none is asked for.
MODE: dict[tuple[Mode, Mode], str] = {
    ("WRITE", "WALK"): "",
    ("WALK", "WRITE"): "",
    ("WRITE", "SHOW"): "show",
    ("WALK", "SHOW"): "show",
    ("SHOW", "WRITE"): "unlock",
    ("SHOW", "WALK"): "unlock",
}


def refusal(output: Output) -> Reason:
    """Why nothing may sound in this output state."""
    return "tripped" if output == "TRIPPED" else "not-armed"
