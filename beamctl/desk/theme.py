"""How a role looks, in full colour, in 16 colours and in none.

Contrast on black by WCAG 2 (relative luminance): at least 7 to 1 for the big readings, 4.5 to 1 for
the rest. The dim grey is the darkest that keeps 4.5, so that a resting screen lights few cells.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
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

_TABLES: dict[Colours, dict[Role, Style]] = {"full": _FULL, "sixteen": _SIXTEEN, "none": _NONE}


@dataclass(frozen=True, slots=True)
class Form:
    """What the terminal can show."""

    colours: Colours = "full"
    ascii: bool = False

    @property
    def dot(self) -> str:
        """What a big reading is drawn with."""
        return "#" if self.ascii else "█"

    def style(self, role: Role, stale: bool = False) -> Style:
        """The look of `role`; a stale picture keeps its alarms and greys all the rest."""
        if stale and role != "alarm":
            return self._grey(big=role.startswith("big"))
        return _TABLES[self.colours][role]

    def _grey(self, big: bool) -> Style:
        if big and self.colours == "full":
            return Style(color=_OLD, bgcolor="#000000")
        return _TABLES[self.colours]["dim"]


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
