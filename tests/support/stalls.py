"""Shows with one square panel and three rows of seats, for what is forecast of their cues."""

from __future__ import annotations

from typing import Any

from support.rigs import analytic_tone, make_show

from beamctl.guard.bars import Level, levels
from beamctl.guard.field import Field
from beamctl.host.barring import sheet_powers
from beamctl.show.show import Show

TONE_HZ, DEPTH = 1_500.0, 0.8
STALLS = {
    "class": "seats",
    "first_m": (-2.0, 4.0, -1.2),
    "rows": ("A", "B", "C"),
    "row_step_m": (0.0, 1.1, 0.1),
    "seats": 6,
    "seat_step_m": (0.8, 0.0, 0.0),
}


def levels_of(show: Show, tone_hz: float = TONE_HZ) -> dict[str, Level]:
    """Levels of a show whose only sound is a tone."""
    sounds = {panel: {"tone": analytic_tone(tone_hz, 0.5)} for panel in show.rig.panel}
    return levels(show, Field(show), sheet_powers(show, sounds))


def start(beam: str, **more: Any) -> dict[str, Any]:
    """An act that starts the tone."""
    act = {"beam": beam, "sound": "tone", "loop": True, "law": "dsb", "depth": DEPTH}
    return act | {"trim_db": -25.0, "over_s": 0.05} | more


def cue(ref: str, *acts: dict[str, Any], **more: Any) -> dict[str, Any]:
    """A cue of these acts."""
    return {"ref": ref, "title": "a cue", "act": list(acts)} | more


def one_panel(*cues: dict[str, Any], beams: tuple[str, ...] = ("a", "b"), **more: Any) -> Show:
    """A show on one square panel that looks down at three rows of seats."""
    house = more.pop("house", {"block": {"stalls": STALLS}})
    return make_show(beams, list(cues), house=house, tilt_deg=-12.0, **more)
