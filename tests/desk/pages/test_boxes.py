"""Boxes on the desk: typed words, and no cue fired by closing one."""

from __future__ import annotations

import time
from collections.abc import Awaitable, Callable
from dataclasses import replace

import pytest
from desk.driving import SIZES, key_at, on_desk, text_of, until
from textual import events
from textual.pilot import Pilot

from beamctl.desk.keyguard import GUARD_S

What = Callable[[Pilot], Awaitable[None]]


@pytest.fixture
def tripped(host):
    guard = replace(host.now.guard, state="TRIPPED", reason="14.2 kHz at -48 dB re carrier")
    host.now = replace(host.now, output="TRIPPED", guard=guard)
    return host


@pytest.fixture
def unvouched(host):
    host.now = replace(host.now, output="SHUT", unvouched=True)
    return host


async def shows(pilot: Pilot, text: str) -> None:
    await until(pilot, lambda: text in text_of(pilot.app))


async def write(pilot: Pilot, text: str) -> None:
    """Type at a pace that is no paste's."""
    for sign in text:
        await pilot.press(sign)
        await pilot.pause(0.02)


async def settle(pilot: Pilot) -> None:
    """Let the guard of the last Enter run out."""
    await pilot.pause(GUARD_S)


async def open_box(pilot: Pilot, title: str) -> None:
    await pilot.press("asterisk")
    await shows(pilot, "READY: Enter")
    await pilot.press("enter")
    await shows(pilot, f"+- {title} -")
    await settle(pilot)


def names(host) -> list[str]:
    return [name for name, _ in host.acts]


@pytest.mark.parametrize("size", SIZES)
@pytest.mark.parametrize("screen", ["f2", "f7"])
def test_the_word_clears_a_trip_and_two_keys_restore(tripped, screen: str, size) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press(screen)
        await open_box(pilot, "THE GUARD TRIPPED")
        await write(pilot, "clear")
        await shows(pilot, "Type the word clear: clear_")
        assert tripped.acts == []
        await pilot.press("enter")
        await until(pilot, lambda: tripped.now.output == "HUSHED")
        await settle(pilot)
        await pilot.press("asterisk")
        await shows(pilot, "READY: Enter restores")
        await pilot.press("enter")
        await until(pilot, lambda: tripped.now.output == "OPEN")

    on_desk(tripped, what, size)
    assert tripped.acts == [("clear", {"word": "clear"}), ("ready", {}), ("confirm", {})]


def test_a_wrong_word_keeps_the_box_and_asks_nothing(tripped) -> None:
    async def what(pilot: Pilot) -> None:
        await open_box(pilot, "THE GUARD TRIPPED")
        await write(pilot, "claer")
        await pilot.press("enter")
        await shows(pilot, "Not sent: it wants the word clear.")
        await settle(pilot)
        await write(pilot, "clearr")
        await pilot.press("backspace")
        await pilot.press("enter")
        await until(pilot, lambda: tripped.acts)

    on_desk(tripped, what)
    assert names(tripped) == ["clear"]


def test_the_second_key_alone_opens_nothing(tripped) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("enter")
        await until(pilot, lambda: tripped.acts)
        assert "THE GUARD TRIPPED" not in text_of(pilot.app)

    on_desk(tripped, what)
    assert names(tripped) == ["go"]  # and the host refuses it


def test_hush_takes_the_first_key_back(tripped) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("asterisk")
        await shows(pilot, "READY: Enter opens a box")
        tripped.now = replace(tripped.now, output="TRIPPED")
        await pilot.press("f12")
        await until(pilot, lambda: "READY" not in text_of(pilot.app))

    on_desk(tripped, what)
    assert names(tripped) == ["hush"]


@pytest.mark.parametrize("key", ["0", "insert", "f12"])
def test_hush_works_in_the_word_box(tripped, key: str) -> None:
    async def what(pilot: Pilot) -> None:
        await open_box(pilot, "THE GUARD TRIPPED")
        await write(pilot, "cl")
        await pilot.press(key)
        await until(pilot, lambda: tripped.acts)
        await shows(pilot, "Type the word clear: cl_")

    on_desk(tripped, what)
    assert names(tripped) == ["hush"]


@pytest.mark.parametrize("key", ["0", "insert", "f12"])
def test_hush_works_in_the_name_box(unvouched, key: str) -> None:
    async def what(pilot: Pilot) -> None:
        await open_box(pilot, "NO SEAT IS DECLARED")
        await write(pilot, "Ann")
        await pilot.press(key)
        await until(pilot, lambda: len(unvouched.acts) == 2)
        await shows(pilot, "Type your name: Ann_")

    on_desk(unvouched, what)
    assert names(unvouched) == ["ready", "hush"]


def test_a_held_enter_opens_the_box_and_does_not_send_it(unvouched) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("asterisk")
        await shows(pilot, "READY: Enter asks who answers")
        begin_s = time.monotonic()
        for at_s in [0.0, *(0.5 + n * 0.033 for n in range(60))]:
            pilot.app.post_message(key_at("enter", begin_s + at_s))
        await shows(pilot, "NO SEAT IS DECLARED")
        await pilot.pause(0.2)
        assert "Not sent" not in text_of(pilot.app)

    on_desk(unvouched, what)
    assert names(unvouched) == ["ready"]


def test_the_enter_that_closes_a_box_fires_no_cue_however_long_it_is_held(tripped) -> None:
    asked = tripped.act

    def opens_at_once(name: str, /, **arguments: object):
        answer = asked(name, **arguments)
        tripped.now = replace(tripped.now, output="OPEN")  # somebody else restored meanwhile
        return answer

    async def what(pilot: Pilot) -> None:
        await open_box(pilot, "THE GUARD TRIPPED")
        await write(pilot, "clear")
        tripped.act = opens_at_once
        begin_s = time.monotonic()
        pilot.app.post_message(key_at("enter", begin_s))
        await until(pilot, lambda: pilot.app._view.snapshot.output == "OPEN")
        for n in range(60):
            pilot.app.post_message(key_at("enter", begin_s + 0.5 + 0.033 * n))
        await pilot.pause(0.2)

    on_desk(tripped, what)
    assert names(tripped) == ["clear"]


@pytest.mark.parametrize("typed", ["", "clear"])
def test_escape_closes_a_box_and_does_nothing(tripped, typed: str) -> None:
    async def what(pilot: Pilot) -> None:
        await open_box(pilot, "THE GUARD TRIPPED")
        await write(pilot, typed)
        await pilot.press("escape")
        await until(pilot, lambda: "Type the word" not in text_of(pilot.app))

    on_desk(tripped, what)
    assert tripped.acts == []


def test_keys_of_actions_and_screens_are_signs_in_a_box_or_nothing(unvouched) -> None:
    async def what(pilot: Pilot) -> None:
        await open_box(pilot, "NO SEAT IS DECLARED")
        for key in ("A", "plus", "minus", "full_stop", "asterisk", "f1", "f2", "f7", "f10"):
            await pilot.press(key)
            await pilot.pause(0.02)
        await shows(pilot, "Type your name: A+-.*_")

    on_desk(unvouched, what)
    assert names(unvouched) == ["ready"]


def test_a_pasted_word_is_not_typed(tripped) -> None:
    async def what(pilot: Pilot) -> None:
        await open_box(pilot, "THE GUARD TRIPPED")
        pilot.app.post_message(events.Paste("clear\n"))
        for sign in "clear":
            pilot.app.post_message(events.Key(sign, sign))
        pilot.app.post_message(events.Key("enter", "\r"))
        await pilot.pause(0.2)
        assert "Type the word clear: _" in text_of(pilot.app)

    on_desk(tripped, what)
    assert tripped.acts == []


def test_a_house_without_seats_asks_for_a_name_and_then_arms(unvouched) -> None:
    async def what(pilot: Pilot) -> None:
        await open_box(pilot, "NO SEAT IS DECLARED")
        await pilot.press("enter")
        await shows(pilot, "Not sent: it wants your name.")
        await settle(pilot)
        await write(pilot, "Ann")
        await pilot.press("enter")
        await until(pilot, lambda: not unvouched.now.unvouched)
        await settle(pilot)
        await pilot.press("asterisk")
        await shows(pilot, "READY: Enter arms")
        await pilot.press("enter")
        await until(pilot, lambda: unvouched.now.output == "OPEN")

    on_desk(unvouched, what)
    asked = [("ready", {}), ("vouch", {"name": "Ann"}), ("ready", {}), ("confirm", {})]
    assert unvouched.acts == asked


def test_a_box_is_not_sent_on_a_stale_picture(tripped) -> None:
    async def what(pilot: Pilot) -> None:
        await open_box(pilot, "THE GUARD TRIPPED")
        await write(pilot, "clear")
        tripped.gone = True
        await shows(pilot, "HOST GONE")
        await pilot.press("enter")
        await shows(pilot, "Not sent: no fresh picture")
        tripped.gone = False
        await until(pilot, lambda: "HOST GONE" not in text_of(pilot.app))
        await settle(pilot)
        await pilot.press("enter")
        await until(pilot, lambda: tripped.acts)

    on_desk(tripped, what)
    assert names(tripped) == ["clear"]
