"""In SHOW ten thousand random keys and mouse events change nothing and fire by the GO rule only."""

from __future__ import annotations

import random
from dataclasses import replace

from desk.driving import key_at, on_desk
from textual import events
from textual.pilot import Pilot

from beamctl.desk.keyguard import GUARD_S
from beamctl.desk.registry import EVERYTHING

EVENTS, AT_ONCE = 10_000, 50
KEYS = sorted({key for action in EVERYTHING.values() for key in action.keys} - {"ctrl+q", "ctrl+c"})
KEYS += ["escape", "tab", "backspace", "up", "down", "left", "right", "space", "pageup", "f3", "f4"]
SIGNS = "abcdefghijklmnopqrstuvwxyz0123456789 *+-./"
# What a show's keys may ask: none of it edits, unlocks or sounds anything but by GO.
MAY = {"go", "hush", "ready", "confirm", "standby", "next", "back", "tail", "hold", "carry-on"}
MAY |= {"acknowledge"}


def random_event(dice: random.Random, at_s: float) -> events.Event:
    """A key of the registry, a sign, or a click or turn of the mouse anywhere."""
    pick = dice.random()
    if pick < 0.5:
        return key_at(dice.choice(KEYS), at_s)
    if pick < 0.8:
        sign = dice.choice(SIGNS)
        event = events.Key("space" if sign == " " else sign, sign)
        event.time = at_s
        return event
    x, y = dice.randrange(80), dice.randrange(24)
    kind = dice.choice([events.MouseDown, events.MouseUp, events.Click, events.MouseScrollDown])
    return kind(None, x, y, 0, 0, 1, False, False, False, x, y)


def test_random_keys_in_show(host) -> None:
    dice = random.Random(1)
    host.now = replace(host.now, mode="SHOW")
    stood_by: set[object] = set()
    snapshot = host.snapshot
    host.snapshot = lambda: stood_by.add(host.now.standby) or snapshot()
    presses = fired = 0  # what the GO rule lets through at most, and what came through
    now_s, free_at_s = 1000.0, 0.0

    async def what(pilot: Pilot) -> None:
        nonlocal presses, fired, now_s, free_at_s
        for _ in range(EVENTS // AT_ONCE):
            for _ in range(AT_ONCE):
                now_s += dice.choice([0.03, 0.2, 0.9])
                event = random_event(dice, now_s)
                if getattr(event, "key", "") in ("enter", "kp_enter", "f9"):
                    presses += now_s >= free_at_s
                    free_at_s = max(free_at_s, now_s + (GUARD_S if now_s >= free_at_s else 0.12))
                pilot.app.post_message(event)
            await pilot.pause(0.02)
            fired = sum(name == "go" for name, _ in host.acts)
            assert fired <= presses
        await pilot.pause(0.1)

    on_desk(host, what)
    assert host.edits == []
    assert host.histories == []
    assert {name for name, _ in host.acts} <= MAY
    assert {asked["ref"] for name, asked in host.acts if name == "go"} <= stood_by
    assert 0 < fired <= presses, "the rule was never met, so this shows nothing"
    print(f"{EVENTS} events: {presses} presses that may fire, {fired} fired, {len(host.acts)} acts")
