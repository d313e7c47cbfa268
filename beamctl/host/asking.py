"""From a desk's message to an event of the registry; whatever else it holds makes no event."""

from __future__ import annotations

import math
from dataclasses import fields
from typing import Any

from beamctl.actions import ACTIONS
from beamctl.show.events import Event

LONGEST_TEXT = 200
BOUNDS = {"trim_db": (-200.0, 0.0), "temperature_c": (-100.0, 100.0)}
USUAL = (0.0, 3600.0)  # of every other number that is no whole one


def event_of(message: dict[str, Any]) -> Event | None:
    """The event that {"name": …, "arguments": {…}} asks for; None when it is not one."""
    name, arguments = message.get("name"), message.get("arguments")
    if not isinstance(name, str) or name not in ACTIONS or not isinstance(arguments, dict):
        return None
    if (kind := ACTIONS[name].event) is None:
        return None
    types = {field.name: str(field.type) for field in fields(kind)}
    if not all(_fits(value, types.get(key), key) for key, value in arguments.items()):
        return None
    return kind(**{"who": "desk"} | arguments)


def _fits(value: object, wanted: str | None, name: str = "") -> bool:
    """True when `value` can be a field of this type and name, and be written in a journal."""
    if wanted == "str":
        return isinstance(value, str) and len(value) <= LONGEST_TEXT and value.isprintable()
    if isinstance(value, bool) or not isinstance(value, int | float):
        return False
    if wanted == "float":
        low, high = BOUNDS.get(name, USUAL)
        return math.isfinite(value) and low <= value <= high
    return wanted == "int" and isinstance(value, int) and abs(value) < 2**63
