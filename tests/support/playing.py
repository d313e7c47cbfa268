"""Short ways to make a player, its cues and its records, for tests."""

from __future__ import annotations

from typing import Any

from support.rigs import make_show

from beamctl.show import events
from beamctl.show.player import Player
from beamctl.show.records import Record

RATE_HZ = 192_000
LATER = 10**9  # a sample by which everything is over


def at(seconds: float) -> int:
    return round(seconds * RATE_HZ)


def loop(beam: str = "a", **act: Any) -> dict[str, Any]:
    return {"beam": beam, "sound": "tone", "loop": True, "trim_db": -20.0} | act


def one_shot(beam: str = "a", **act: Any) -> dict[str, Any]:
    return {"beam": beam, "sound": "tone", "trim_db": -20.0} | act


def cue(ref: str, *acts: dict[str, Any], **more: Any) -> dict[str, Any]:
    return {"ref": ref, "title": f"cue {ref}", "act": acts} | more


def player(
    *cues: dict[str, Any], armed: bool = True, beams: tuple[str, ...] = ("a", "b")
) -> Player:
    made = Player(make_show(beams, list(cues)))
    made.sink("sink-open", 0)
    if armed:
        made.handle(events.Ready(), 0)
        made.handle(events.Confirm(), 0)
        assert made.output == "OPEN"
    return made


def whats(records: list[Record]) -> list[str]:
    return [r.what for r in records]


def reason(records: list[Record]) -> str:
    """The reason word of a single refusal."""
    (record,) = only(records, "refused")
    assert record.args["text"]
    return str(record.args["reason"])


def only(records: list[Record], what: str) -> list[Record]:
    return [r for r in records if r.what == what]
