"""From actions to requests, and which presses count."""

from __future__ import annotations

from dataclasses import replace

import pytest

from beamctl.actions import ACTIONS
from beamctl.desk.keyguard import PASTE_S, PasteGuard, RepeatGuard
from beamctl.desk.keys import Ask, ask_for


def seen_of(host, **changes):
    return replace(host.now, **changes)


def test_go_names_the_cue_on_the_screen(host) -> None:
    assert ask_for("go", seen_of(host)) == Ask("go", {"ref": "12.5"})
    assert ask_for("go", seen_of(host, standby="")) is None
    assert ask_for("go", seen_of(host, arming=True)) == Ask("confirm")


def test_ready_acknowledges_only_while_open(host) -> None:
    assert ask_for("ready", seen_of(host)) == Ask("ready")
    assert ask_for("ready", seen_of(host, notices=("x",))) == Ask("acknowledge")
    assert ask_for("ready", seen_of(host, notices=("x",), output="SHUT")) == Ask("ready")


def test_hold_turns_into_carry_on(host) -> None:
    assert ask_for("hold", seen_of(host)) == Ask("hold")
    assert ask_for("hold", seen_of(host, holding=True)) == Ask("carry-on")


def test_steps(host) -> None:
    assert ask_for("next", seen_of(host)) == Ask("next", {"by": 1})
    assert ask_for("back", seen_of(host)) == Ask("back", {"by": -1})


@pytest.mark.parametrize("name", ACTIONS)
@pytest.mark.parametrize("arming", [False, True])
def test_the_event_of_every_request_has_room_for_its_arguments(host, name, arming) -> None:
    ask = ask_for(name, seen_of(host, arming=arming))
    assert ask is not None
    kind = ACTIONS[ask.name].event
    assert kind is not None
    assert kind(**ask.arguments)


def held(first_s: float, gap_s: float, for_s: float) -> list[float]:
    """Times of a press and its repeats."""
    return [0.0, *(first_s + n * gap_s for n in range(int((for_s - first_s) / gap_s)))]


@pytest.mark.parametrize("first_s", [0.25, 0.5, 0.66])
@pytest.mark.parametrize("gap_s", [0.02, 0.033, 0.1])
def test_a_held_key_is_one_press(first_s: float, gap_s: float) -> None:
    guard = RepeatGuard()
    assert [guard.lets(at_s) for at_s in held(first_s, gap_s, 5.0)].count(True) == 1


def test_a_press_after_the_hold_counts_again() -> None:
    guard = RepeatGuard()
    times = held(0.5, 0.033, 3.0)
    assert sum(guard.lets(at_s) for at_s in times) == 1
    assert guard.lets(times[-1] + 0.15)


def test_two_presses_need_seven_tenths_of_a_second() -> None:
    guard = RepeatGuard()
    assert guard.lets(10.0)
    assert not guard.lets(10.4)
    assert guard.lets(10.71)


def test_more_than_three_keys_at_once_are_a_paste() -> None:
    guard = PasteGuard()
    presses = [guard.count(1.0 + n * 0.001) for n in range(200)]
    assert not any(guard.holds(press) for press in presses)


def test_three_keys_at_once_are_typed() -> None:
    guard = PasteGuard()
    presses = [guard.count(1.0 + n * 0.001) for n in range(3)]
    assert all(guard.holds(press) for press in presses)


def test_typing_after_a_paste_counts() -> None:
    guard = PasteGuard()
    for n in range(50):
        guard.count(1.0 + n * 0.001)
    assert guard.holds(guard.count(1.049 + PASTE_S))
