"""The Bench's own boxes: angles, the height of the plan, and the trim of a try."""

from __future__ import annotations

from collections.abc import Callable

from beamctl.desk.box import Box
from beamctl.desk.forms import read
from beamctl.show.sheet import Act

QUIETER_DB = 6.0  # than the act's own trim: what Sound it now proposes
SOFTEST_DB = -90.0
LOWEST_M, HIGHEST_M = -100.0, 100.0


def angles_box(take: Callable[[float, float], str]) -> Box:
    """Asks for azimuth and elevation; `take` gets them, and returns a complaint or ""."""

    def use(text: str) -> str:
        words = text.replace(",", " ").split()
        if len(words) != 2:
            return "It wants two numbers."
        try:
            return take(read(Act, "azimuth_deg", words[0]), read(Act, "elevation_deg", words[1]))
        except ValueError as error:
            return str(error)

    about = "From straight ahead of the panel: above 0 is right as it looks out, and up."
    return Box("ANGLES", about, "azimuth and elevation in degrees", use=use)


def height_box(take: Callable[[float | None], None]) -> Box:
    """Asks for the height of the plan; `take` gets it, None for the target's own."""

    def use(text: str) -> str:
        height_m = _number(text) if text else None
        if text and (height_m is None or not LOWEST_M <= height_m <= HIGHEST_M):
            return f"It wants a number from {LOWEST_M:g} to {HIGHEST_M:g}, or nothing."
        take(height_m)
        return ""

    about = "The plan shows the carrier at this height. Nothing typed takes the target's own."
    return Box("HEIGHT OF THE PLAN", about, "metres above the stage", use=use)


def try_box(what: str, own_db: float, take: Callable[[float], None]) -> Box:
    """Asks at which trim `what` is to sound, no higher than its own."""
    proposed_db = max(own_db - QUIETER_DB, SOFTEST_DB)

    def use(text: str) -> str:
        trim_db = _number(text) if text else proposed_db
        if trim_db is None or not SOFTEST_DB <= trim_db <= own_db:
            return f"It wants a number from {SOFTEST_DB:g} to its own trim, {own_db:g} dB."
        take(trim_db)
        return ""

    about = f"Sounds {what} on the rig, as the sheet has it. Its own trim is {own_db:g} dB; "
    about += f"nothing typed takes {proposed_db:g} dB."
    return Box("SOUND IT NOW", about, "a trim in dB", use=use)


def _number(text: str) -> float | None:
    try:
        return float(text)
    except ValueError:
        return None
