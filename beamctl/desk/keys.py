"""From an action to what is asked of the host, by what is on the screen."""

from __future__ import annotations

from dataclasses import dataclass, field

from beamctl.snapshot import Snapshot


@dataclass(frozen=True, slots=True)
class Ask:
    """An action and its arguments, ready for the host."""

    name: str
    arguments: dict[str, object] = field(default_factory=dict)


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
