"""Looks: contrast, and what a terminal is given."""

from __future__ import annotations

from itertools import pairwise
from typing import get_args

import pytest
from rich.color import Color
from rich.style import Style
from rich.terminal_theme import TerminalTheme

from beamctl.desk.format import Role
from beamctl.desk.theme import DIMS, Form, choose_form

ROLES: tuple[Role, ...] = get_args(Role)

# The 16 colours of the VGA text mode, as the Linux console has them.
_DARK = [(0, 0, 0), (170, 0, 0), (0, 170, 0), (170, 85, 0)]
_DARK += [(0, 0, 170), (170, 0, 170), (0, 170, 170), (170, 170, 170)]
_BRIGHT = [(85, 85, 85), (255, 85, 85), (85, 255, 85), (255, 255, 85)]
_BRIGHT += [(85, 85, 255), (255, 85, 255), (85, 255, 255), (255, 255, 255)]
VGA = TerminalTheme((0, 0, 0), (170, 170, 170), _DARK, _BRIGHT)


def luminance(colour: Color) -> float:
    """Relative luminance by WCAG 2."""
    parts = [part / 255 for part in colour.get_truecolor(VGA)]
    linear = [p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(style: Style) -> float:
    """Contrast ratio by WCAG 2 of a style that names both of its colours."""
    assert style.color is not None and style.bgcolor is not None
    a, b = luminance(style.color), luminance(style.bgcolor)
    return (max(a, b) + 0.05) / (min(a, b) + 0.05)


def test_the_formula_itself() -> None:
    assert contrast(Style(color="#ffffff", bgcolor="#000000")) == pytest.approx(21.0)
    assert contrast(Style(color="#777777", bgcolor="#ffffff")) == pytest.approx(4.48, abs=0.01)


@pytest.mark.parametrize("stale", [False, True])
@pytest.mark.parametrize("colours", ["full", "sixteen"])
@pytest.mark.parametrize("role", ROLES)
@pytest.mark.parametrize("dimmer", range(DIMS))
def test_contrast(role: Role, colours, stale: bool, dimmer: int) -> None:
    least = 7.0 if role.startswith("big") else 4.5
    assert contrast(Form(colours, dimmer=dimmer).style(role, stale)) >= least


@pytest.mark.parametrize("role", ROLES)
def test_each_step_of_the_dimmer_is_darker_or_at_its_floor(role: Role) -> None:
    form, ratios = Form(), []
    for _ in range(DIMS):
        ratios.append(contrast(form.style(role)))
        form = form.dimmed()
    assert form == Form()
    least = 7.3 if role.startswith("big") else 4.8
    for brighter, darker in pairwise(ratios):
        assert darker < 0.95 * brighter or darker <= min(least, brighter)


@pytest.mark.parametrize("role", ROLES)
@pytest.mark.parametrize("stale", [False, True])
def test_the_form_without_colour_has_none(role: Role, stale: bool) -> None:
    style = Form("none").style(role, stale)
    assert style.color is None
    assert style.bgcolor is None


@pytest.mark.parametrize("colours", ["full", "sixteen"])
def test_no_green_and_vermilion_for_alarm_only(colours) -> None:
    for role in ROLES:
        style = Form(colours).style(role)
        red, green, blue = style.color.get_truecolor(VGA)
        assert not green > 1.2 * max(red, blue), role
        reddish = red > 2 * green or (style.bgcolor.get_truecolor(VGA).red > 0)
        assert reddish == role.endswith("alarm"), role


def test_a_stale_picture_is_grey_but_its_alarm_is_not() -> None:
    form = Form("full")
    for role in ROLES:
        red, green, blue = form.style(role, stale=True).color.get_truecolor()
        assert (red == green == blue) == (role != "alarm")


@pytest.mark.parametrize(
    ("plain", "environ", "form"),
    [
        (False, {"TERM": "xterm-256color"}, Form("full", ascii=False)),
        (False, {"TERM": "xterm-kitty"}, Form("full", ascii=False)),
        (False, {"TERM": "xterm", "COLORTERM": "truecolor"}, Form("full", ascii=False)),
        (False, {"TERM": "xterm"}, Form("sixteen", ascii=False)),
        (False, {"TERM": "linux"}, Form("sixteen", ascii=True)),
        (False, {"TERM": "xterm-256color", "NO_COLOR": "1"}, Form("none", ascii=True)),
        (False, {"TERM": "dumb"}, Form("none", ascii=True)),
        (False, {}, Form("none", ascii=True)),
        (True, {"TERM": "xterm-256color"}, Form("none", ascii=True)),
    ],
)
def test_choose_form(plain: bool, environ: dict[str, str], form: Form) -> None:
    assert choose_form(plain, environ) == form
