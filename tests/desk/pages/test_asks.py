"""The palette, finding a cue, and the mode: what their boxes lead to."""

from __future__ import annotations

from collections.abc import Awaitable, Callable
from dataclasses import replace

import pytest
from desk.driving import key_at, on_desk, text_of, until
from textual.pilot import Pilot

from beamctl.desk.asks import IN_SHOW_S

What = Callable[[Pilot], Awaitable[None]]


async def shows(pilot: Pilot, text: str) -> None:
    await until(pilot, lambda: text in text_of(pilot.app))


async def gone(pilot: Pilot, text: str) -> None:
    await until(pilot, lambda: text not in text_of(pilot.app))


async def write(pilot: Pilot, *keys: str) -> None:
    """Type at a pace that is no paste's."""
    for key in keys:
        await pilot.press(key)
        await pilot.pause(0.02)


def test_find_puts_a_cue_on_stand_by_and_fires_none(host) -> None:
    host.now = replace(host.now, mode="SHOW")

    async def what(pilot: Pilot) -> None:
        await write(pilot, "slash")
        await shows(pilot, "FIND A CUE")
        await write(pilot, "1", "4", "0", "backspace")
        await shows(pilot, "> 14  coins fall")
        await write(pilot, "enter")
        await gone(pilot, "FIND A CUE")
        await until(pilot, lambda: host.acts)

    on_desk(host, what, size=(120, 40))
    assert host.acts == [("standby", {"ref": "14"})]


def test_find_takes_words_and_arrows(host) -> None:
    async def what(pilot: Pilot) -> None:
        await write(pilot, "slash", *"the")
        await shows(pilot, "FIND A CUE")
        await write(pilot, "down", "enter")
        await until(pilot, lambda: host.acts)

    on_desk(host, what, size=(120, 40))
    assert host.acts == [("standby", {"ref": "13"})]


def test_enter_held_while_the_find_box_closes_fires_nothing(host) -> None:
    async def what(pilot: Pilot) -> None:
        await write(pilot, "slash", "1", "7")
        await shows(pilot, "> 17")
        start_s = pilot.app.clock()
        times = [0.0, *(0.5 + n * 0.033 for n in range(75))]
        for at_s in times:
            pilot.app.post_message(key_at("enter", start_s + at_s))
        await gone(pilot, "FIND A CUE")
        await pilot.pause(0.2)

    on_desk(host, what)
    assert host.acts == [("standby", {"ref": "17"})]


def test_a_box_nobody_types_in_closes_by_itself_in_show(host) -> None:
    host.now = replace(host.now, mode="SHOW")

    async def what(pilot: Pilot) -> None:
        await write(pilot, "slash")
        await shows(pilot, "FIND A CUE")
        pilot.app._courier.clock = lambda now=pilot.app._courier.clock: now() + IN_SHOW_S + 0.1
        await gone(pilot, "FIND A CUE")

    on_desk(host, what)
    assert host.acts == []


def test_the_palette_lists_what_can_be_done_and_does_it(host) -> None:
    async def what(pilot: Pilot) -> None:
        await write(pilot, "f11")
        await shows(pilot, "ALL ACTIONS")
        await write(pilot, *"hold")
        await shows(pilot, "> Hold  (F10)")
        await write(pilot, "enter")
        await until(pilot, lambda: host.acts)
        await write(pilot, "f11", *"no", "space", *"such")
        await shows(pilot, "nothing matches")
        await write(pilot, "enter")
        await shows(pilot, "Nothing matches.")
        await write(pilot, "escape")
        await gone(pilot, "ALL ACTIONS")

    on_desk(host, what, size=(120, 40))
    assert host.acts == [("hold", {})]


def test_the_palette_never_fires_a_cue(host) -> None:
    async def what(pilot: Pilot) -> None:
        await write(pilot, "f11", *"standing", "space", "b", "y")
        await shows(pilot, "ALL ACTIONS")
        assert "Go  (" not in text_of(pilot.app)

    on_desk(host, what, size=(120, 40))
    assert host.acts == []


def test_write_and_walk_change_without_a_word(host) -> None:
    async def what(pilot: Pilot) -> None:
        await write(pilot, "m", *"walk", "enter")
        await until(pilot, lambda: host.acts)

    on_desk(host, what)
    assert host.acts == [("mode", {"to": "WALK"})]


@pytest.mark.parametrize(
    ("typed", "asked"),
    [
        ("show", [("mode", {"to": "SHOW", "word": "show"})]),
        ("shwo", []),
    ],
)
def test_the_show_is_locked_by_a_word(host, typed: str, asked) -> None:
    async def what(pilot: Pilot) -> None:
        await write(pilot, "m", *"show", "enter")
        await shows(pilot, "LOCK THE SHOW")
        await write(pilot, *typed, "enter")
        await until(pilot, lambda: host.acts or "It wants the word show" in text_of(pilot.app))

    on_desk(host, what)
    assert host.acts == asked


@pytest.mark.parametrize(
    ("typed", "asked"),
    [
        ("unlock ann", [("mode", {"to": "WRITE", "word": "unlock", "name": "ann"})]),
        ("unlock", []),
        ("ann", []),
    ],
)
def test_the_show_is_unlocked_by_a_word_and_a_name(host, typed: str, asked) -> None:
    host.now = replace(host.now, mode="SHOW")

    async def what(pilot: Pilot) -> None:
        await write(pilot, "m")
        assert "MODE" not in text_of(pilot.app)
        await write(pilot, "f11", *"mode")
        await shows(pilot, "> Mode")
        await write(pilot, "enter")
        await shows(pilot, "+- MODE")
        await write(pilot, *"write", "enter")
        await shows(pilot, "UNLOCK THE SHOW")
        await write(pilot, *["space" if sign == " " else sign for sign in typed], "enter")
        await until(pilot, lambda: host.acts or "It wants the word unlock" in text_of(pilot.app))

    on_desk(host, what, size=(120, 40))
    assert host.acts == asked
