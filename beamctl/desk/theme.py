"""How a role looks, in full colour, in 16 colours and in none.

Contrast on black by WCAG 2 (relative luminance): at least 7 to 1 for the big readings, 4.5 to 1 for
the rest. The dim grey is the darkest that keeps 4.5, so that a resting screen lights few cells.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cache
from typing import Literal

from rich.style import Style

from beamctl.desk.format import Role

Colours = Literal["full", "sixteen", "none"]

_SKY_BLUE, _AMBER, _VERMILION = "#56b4e9", "#e69f00", "#ff6a3a"
_DIM, _TEXT, _BIG, _OLD = "#757575", "#b4b4b4", "#d8d8d8", "#969696"

_FULL: dict[Role, Style] = {
    "dim": Style(color=_DIM, bgcolor="#000000"),
    "text": Style(color=_TEXT, bgcolor="#000000"),
    "live": Style(color=_SKY_BLUE, bgcolor="#000000"),
    "attention": Style(color=_AMBER, bgcolor="#000000"),
    "alarm": Style(color=_VERMILION, bgcolor="#000000", bold=True),
    "big": Style(color=_BIG, bgcolor="#000000"),
    "big-live": Style(color=_SKY_BLUE, bgcolor="#000000"),
    "big-attention": Style(color=_AMBER, bgcolor="#000000"),
    "big-alarm": Style(color=_VERMILION, bgcolor="#000000"),
}

# The 16 colours as the hardware of old had them: its brown and its blue are too dark to read.
_SIXTEEN: dict[Role, Style] = {
    "dim": Style(color="white", bgcolor="black"),
    "text": Style(color="bright_white", bgcolor="black"),
    "live": Style(color="cyan", bgcolor="black"),
    "attention": Style(color="bright_yellow", bgcolor="black"),
    "alarm": Style(color="bright_white", bgcolor="red"),
    "big": Style(color="bright_white", bgcolor="black"),
    "big-live": Style(color="cyan", bgcolor="black"),
    "big-attention": Style(color="bright_yellow", bgcolor="black"),
    "big-alarm": Style(color="bright_white", bgcolor="red"),
}

_NONE: dict[Role, Style] = {
    "dim": Style(),
    "text": Style(bold=True),
    "live": Style(bold=True),
    "attention": Style(bold=True),
    "alarm": Style(reverse=True),
    "big": Style(bold=True),
    "big-live": Style(bold=True),
    "big-attention": Style(bold=True),
    "big-alarm": Style(bold=True),
}

DIMS = 3
_SHARES = (1.0, 0.65, 0.35)  # of the light, at each step; contrast sets the floor
_FLOOR, _BIG_FLOOR = 4.6, 7.1  # contrast on black that no step goes below

_TABLES: dict[Colours, dict[Role, Style]] = {"full": _FULL, "sixteen": _SIXTEEN, "none": _NONE}


@dataclass(frozen=True, slots=True)
class Form:
    """What the terminal can show."""

    colours: Colours = "full"
    ascii: bool = False
    dimmer: int = 0  # steps down, from 0 to DIMS - 1; only full colours can be dimmed

    @property
    def dot(self) -> str:
        """What a big reading is drawn with."""
        return "#" if self.ascii else "█"

    def style(self, role: Role, stale: bool = False) -> Style:
        """The look of `role`; a stale picture keeps its alarms and greys all the rest."""
        if stale and role != "alarm":
            return self._grey(big=role.startswith("big"))
        style = _TABLES[self.colours][role]
        return (
            _dimmed(style, role, self.dimmer) if self.dimmer and self.colours == "full" else style
        )

    def dimmed(self) -> Form:
        """One step darker, and from the darkest to the brightest."""
        return replace(self, dimmer=(self.dimmer + 1) % DIMS)

    def _grey(self, big: bool) -> Style:
        if big and self.colours == "full":
            return Style(color=_OLD, bgcolor="#000000")
        return _TABLES[self.colours]["dim"]


@cache
def _dimmed(style: Style, role: Role, step: int) -> Style:
    """The same hue with less light, but for its contrast on black: (L + 0.05) / 0.05 by WCAG 2."""
    assert style.color is not None
    parts = [_linear(part / 255) for part in style.color.get_truecolor()]
    light = sum(w * p for w, p in zip((0.2126, 0.7152, 0.0722), parts, strict=True))
    least = 0.05 * ((_BIG_FLOOR if role.startswith("big") else _FLOOR) - 1.0)
    share = min(1.0, max(_SHARES[step], least / light))
    red, green, blue = (round(255 * _encoded(p * share)) for p in parts)
    return style + Style(color=f"#{red:02x}{green:02x}{blue:02x}")


def _linear(part: float) -> float:
    """The light of an sRGB component (IEC 61966-2-1)."""
    return part / 12.92 if part <= 0.04045 else float(((part + 0.055) / 1.055) ** 2.4)


def _encoded(light: float) -> float:
    """The sRGB component of a light."""
    return 12.92 * light if light <= 0.0031308 else float(1.055 * light ** (1 / 2.4) - 0.055)


def choose_form(plain: bool, environ: Mapping[str, str]) -> Form:
    """The richest form that the terminal shows well; plain, NO_COLOR and simple consoles win."""
    term = environ.get("TERM", "")
    if plain or environ.get("NO_COLOR") or term in ("", "dumb", "unknown"):
        return Form("none", ascii=True)
    if term == "linux":
        return Form("sixteen", ascii=True)
    if "256color" in term or "direct" in term or environ.get("COLORTERM") or "kitty" in term:
        return Form("full")
    return Form("sixteen")
