"""The one registry of what a person or a show system can ask of the host.

Keys, the legend, the palette, help and the OSC address list all come from `ACTIONS`, and from the
desk's own verbs, which are of the same class; a key that is bound nowhere does nothing. `event` is
the class that every way of asking makes.
"""

from __future__ import annotations

from dataclasses import dataclass

from beamctl.show import events


@dataclass(frozen=True, slots=True)
class Action:
    """One action.

    event  what it asks of the player; None where it asks something else, or only the desk
    keys   as the desk calls them; the user's own configuration may bind others
    on     the screens where its keys work, all of them when there is none
    osc    the address under /beamctl/1, "" where the network may not ask
    """

    name: str
    event: type[events.Event] | None
    title: str
    keys: tuple[str, ...]
    help: str
    osc: str = ""
    role: str = ""
    on: tuple[str, ...] = ()


ACTIONS: dict[str, Action] = {
    action.name: action
    for action in (
        Action(
            "go",
            events.Go,
            "Go",
            ("enter", "kp_enter", "f9"),
            "Fires the cue standing by. After * it arms or restores instead. While writing, Enter "
            "does so on the Desk and the Guard screen only, F9 everywhere.",
            "go",
            "trigger",
        ),
        Action(
            "hush",
            events.Hush,
            "Hush",
            ("0", "kp_0", "insert", "f12"),
            "Silence now, by a 20 ms ramp, from every screen. Never asks.",
            "hush",
            "hush",
        ),
        Action(
            "ready",
            events.Ready,
            "Ready",
            ("asterisk", "kp_multiply"),
            "First of two keys: * then Enter within 5 s arms from SHUT, restores from HUSHED; "
            "after a trip they open a box for a typed word.",
        ),
        Action(
            "confirm",
            events.Confirm,
            "Arm or restore",
            (),
            "Second of the two acts; Enter makes it while READY shows.",
        ),
        Action(
            "restore",
            events.Restore,
            "Restore",
            (),
            "Return from HUSHED, asked for by a show system.",
            "restore",
            "trigger",
        ),
        Action(
            "standby",
            events.StandBy,
            "Stand by",
            (),
            "Puts a cue on stand-by; never fires it.",
            "standby",
            "trigger",
        ),
        Action(
            "next",
            events.Step,
            "Next",
            ("plus", "kp_plus"),
            "Moves stand-by one cue on.",
        ),
        Action(
            "back",
            events.Step,
            "Back",
            ("minus", "kp_minus"),
            "Moves stand-by one cue back.",
        ),
        Action(
            "tail",
            events.Tail,
            "Tail",
            ("full_stop", "kp_decimal", "delete"),
            "Ends what the newest running cue sounds, over a second.",
            "tail",
            "trigger",
        ),
        Action(
            "hold",
            events.Hold,
            "Hold",
            ("f10",),
            "Freezes every glide and follow-on clock; F10 again carries on.",
            "hold",
            "trigger",
        ),
        Action(
            "carry-on",
            events.CarryOn,
            "Carry on",
            (),
            "Carries on with what hold froze.",
            "carry-on",
            "trigger",
        ),
        Action(
            "acknowledge",
            events.Acknowledge,
            "Acknowledge",
            (),
            "Takes the oldest notice off the screen; * does it too.",
        ),
        Action(
            "clear",
            events.Clear,
            "Clear a trip",
            (),
            "After a trip: the typed word CLEAR leads to HUSHED. Never by the network.",
        ),
        Action(
            "vouch",
            events.Vouch,
            "Answer for a house without seats",
            (),
            "A name, journalled: where no seat is declared nothing can be measured.",
        ),
        Action(
            "mode",
            events.Mode,
            "Mode",
            (),
            "WRITE, WALK or SHOW. The words SHOW and UNLOCK lock and unlock; never by the network.",
        ),
        Action(
            "sound-now",
            events.SoundNow,
            "Sound it now",
            (),
            "Sounds one act of a cue by itself, at a trim no higher than its own. Never in SHOW.",
        ),
        Action(
            "sound-off",
            events.SoundOff,
            "End the try",
            (),
            "Ends what Sound it now began.",
        ),
        Action(
            "air",
            events.SetAir,
            "Air readings",
            (),
            "Temperature, humidity and pressure as they are now; taken up while nothing sounds.",
        ),
    )
}
