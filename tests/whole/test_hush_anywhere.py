"""Hush from every screen, dialog and open box of a real desk: from the key to the hush word.

A pseudo-terminal, the desk's process, the host's and the engine's, as they run in a show. The word
is read in the memory that the final stage reads it from. BEAMCTL_HUSHES=100 presses so many times,
and holds every one of them to the bar.
"""

from __future__ import annotations

import itertools
import os
import time
from pathlib import Path
from statistics import median

import pytest
from support.ptydesk import PtyDesk, pty_desk
from support.running import Running, host, last_hash, replayed, wait_for
from support.smallshow import write_show

from beamctl.engine import layout as at
from beamctl.engine.outlet import Outlet
from beamctl.host.places import memory_folder, show_key

pytestmark = pytest.mark.real

MOST_S = 0.100
RAMP_S = 0.020
PACE_S, SHOWS_S, TRIES = 0.04, 5.0, 3
HUSHES = int(os.environ.get("BEAMCTL_HUSHES", "0"))  # 0: every place once

# How each place is reached from the Desk, and what it shows.
SCREENS = {
    "desk": (("f2",), ""),
    "sheet": (("f3",), "New cue"),
    "bench": (("f4",), "Take it"),
    "house": (("f5",), "House"),
    "rig": (("f6",), "Rig"),
    "guard": (("f7",), "stage"),
    "wire": (("f8",), "Wire"),
    "log": (("shift+f8",), "Log"),
    "help": (("f1",), "Ultrasound"),
}
BOXES = {
    "find": (("f2", "/"), "FIND A CUE"),
    "find, with digits": (("f2", "/", "1", "2"), "FIND A CUE"),
    "all actions": (("f2", "f11"), "ALL ACTIONS"),
    "mode": (("f2", "m"), "MODE"),
    "lock": (("f2", "m", "s", "h", "enter"), "LOCK THE SHOW"),
    "key test": (("f2", "f11", "k", "e", "y", " ", "t", "enter"), "KEY TEST"),
}


def reach(desk: PtyDesk, keys: tuple[str, ...], shows: str) -> None:
    """Press the keys one by one and see the place; again where a busy machine made a paste of them,
    which the desk takes for nobody's."""
    for _ in range(TRIES):
        for key in keys:
            time.sleep(PACE_S)
            desk.press(key)
        until_s = time.monotonic() + SHOWS_S
        while shows not in desk.said():
            if time.monotonic() > until_s:
                break
            time.sleep(0.01)
        else:
            return
        desk.press("escape")
    pytest.fail(f"{keys} never showed {shows!r}")


def hush_by(desk: PtyDesk, key: str, outlet: Outlet) -> float:
    """Seconds from the key to the hush word."""
    before = outlet.count(at.HUSH)
    at_s = desk.press(key)
    while outlet.count(at.HUSH) == before:
        assert time.monotonic() < at_s + 5.0, "it never hushed"
        time.sleep(0.0002)
    return time.monotonic() - at_s


def test_from_the_key_to_the_hush_word(tmp_path: Path) -> None:
    show, journal = write_show(tmp_path / "small"), tmp_path / "hush.jsonl"
    took: dict[str, list[float]] = {}
    places = {**SCREENS, **BOXES}
    with host(show, "null", journal) as running, pty_desk(show) as desk:
        desk.read_caution()
        outlet = Outlet.attach(memory_folder() / f"{show_key(show)}.outlet")
        for n, name in enumerate(itertools.islice(itertools.cycle(places), HUSHES or len(places))):
            open_and_sound(running)
            reach(desk, *places[name])
            took.setdefault(name, []).append(hush_by(desk, ("f12", "insert")[n % 2], outlet))
            wait_for(lambda: running.snapshot().output == "HUSHED", "HUSHED")
            desk.press("escape")
            time.sleep(0.15)  # a lone escape is told from the beginning of a key by waiting
        running.stop()
    every = sorted(itertools.chain.from_iterable(took.values()))
    print(
        f"\n{len(every)} hushes from {len(took)} places, ms from key to word: "
        f"min {1e3 * every[0]:.1f}, median {1e3 * median(every):.1f}, max {1e3 * every[-1]:.1f}"
    )
    assert set(took) == set(itertools.islice(places, HUSHES or len(places)))
    assert median(every) <= MOST_S
    if HUSHES:  # on a machine that is asked for it, and has nothing else to do
        assert every[-1] <= MOST_S, {name: max(times) for name, times in took.items()}
    assert replayed(journal) == last_hash(journal)


def test_a_desk_whose_terminal_is_frozen_still_hushes(tmp_path: Path) -> None:
    show, journal = write_show(tmp_path / "small"), tmp_path / "frozen.jsonl"
    with host(show, "null", journal) as running, pty_desk(show) as desk:
        desk.read_caution()
        outlet = Outlet.attach(memory_folder() / f"{show_key(show)}.outlet")
        open_and_sound(running)
        running.act("go", ref="1")
        desk.freeze()
        assert hush_by(desk, "f12", outlet) <= MOST_S
        running.stop()


def open_and_sound(running: Running) -> None:
    """Open the output, by a line of the test's own."""
    running.act("ready")
    running.act("confirm")
    wait_for(lambda: running.snapshot().output == "OPEN", "OPEN")
