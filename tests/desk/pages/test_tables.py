"""House, Rig, Wire and the caps: keys to edits, and what becomes of them."""

from __future__ import annotations

from collections.abc import Awaitable, Callable
from dataclasses import replace

import pytest
from desk.conftest import NIGHT_TRAM
from desk.driving import on_desk, text_of, until
from textual.pilot import Pilot

from beamctl.desk.keyguard import PASTE_S
from beamctl.desk.tables.new import begun
from beamctl.show.edits import Drop, Edit, Rename, Set
from beamctl.snapshot import AirView

KEYS = {" ": "space", ".": "full_stop", "-": "minus", "/": "slash"}


async def shows(pilot: Pilot, *texts: str) -> None:
    for text in texts:
        await until(pilot, lambda text=text: text in text_of(pilot.app))


async def press(pilot: Pilot, *keys: str) -> None:
    """So far apart that they do not count as pasted."""
    for key in keys:
        await pilot.press(key)
        await pilot.pause(PASTE_S / 2.0)


async def enter(pilot: Pilot, text: str) -> None:
    """Type `text` into the box that is open, and send it."""
    await press(pilot, *[KEYS.get(sign, sign) for sign in text], "enter")


def run(host, screen: str, what: Callable[[Pilot], Awaitable[None]], size=(120, 40)) -> None:
    async def main(pilot: Pilot) -> None:
        await press(pilot, screen)
        await what(pilot)

    on_desk(host, main, size)


def test_a_field_is_changed_by_its_box(host) -> None:
    async def what(pilot: Pilot) -> None:
        await shows(pilot, "> panel prow", "tilt_deg             -17")
        await press(pilot, "right", "down", "down", "right")
        await shows(pilot, "TILT_DEG OF PANEL PROW", "Type a number from -90 to 90, in degrees")
        await enter(pilot, "-99")
        await shows(pilot, "-99: expected a number from -90 to 90, in degrees")
        await press(pilot, "ctrl+u")
        await enter(pilot, "-12.5")
        await until(pilot, lambda: host.edits)

    run(host, "f6", what)
    place = ("panel", "prow")
    assert host.edits == [
        Edit("panel prow tilt_deg -12.5", (Set("rig.toml", place, "tilt_deg", -12.5),))
    ]


def test_a_refused_edit_opens_its_box_again_with_what_was_typed_and_the_reason(host) -> None:
    host.refuses = "house.toml:18: block benches: seats: no room"

    async def what(pilot: Pilot) -> None:
        await press(pilot, "down", "down", "down", "right", "down", "right")
        await shows(pilot, "FIRST_M OF BLOCK BENCHES", "-1.925 4.5 1.2_")
        await press(pilot, "ctrl+u")
        await enter(pilot, "0 4.5 1.2")
        await shows(
            pilot, host.refuses, "Type x across, y from the stage, z up, in metres: 0 4.5 1.2_"
        )
        host.refuses = ""
        await press(pilot, "backspace")
        await enter(pilot, "3")
        await until(pilot, lambda: len(host.edits) == 2)
        await until(pilot, lambda: "FIRST_M OF" not in text_of(pilot.app))

    run(host, "f5", what)
    place = ("block", "benches")
    assert host.edits[1].steps == (Set("house.toml", place, "first_m", [0.0, 4.5, 1.3]),)


def test_a_new_table_is_asked_for_by_kind_and_name(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "n")
        await shows(pilot, "which kind", "> block")
        await enter(pilot, "spot")
        await shows(pilot, "NEW SPOT")
        await enter(pilot, "pit")
        await until(pilot, lambda: host.edits)

    run(host, "f5", what)
    assert host.edits == [begun("spot", "pit", NIGHT_TRAM)]


def test_a_new_panel_needs_only_a_name(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "n")
        await shows(pilot, "NEW PANEL")
        await enter(pilot, "stern")
        await until(pilot, lambda: host.edits)

    run(host, "f6", what)
    assert host.edits == [begun("panel", "stern", NIGHT_TRAM)]


def test_tables_are_renamed_and_taken_away_and_fields_left_out(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "r")
        await shows(pilot, "air keeps its name")
        await press(pilot, "backspace")
        await shows(pilot, "air stays")
        await press(pilot, "down", "r")
        await shows(pilot, "ANOTHER NAME FOR SPOT CONDUCTOR")
        await press(pilot, "ctrl+u")
        await enter(pilot, "driver")
        await until(pilot, lambda: len(host.edits) == 1)
        await press(pilot, "delete")
        await until(pilot, lambda: len(host.edits) == 2)
        await press(pilot, "home", "right", "down", "delete")
        await until(pilot, lambda: len(host.edits) == 3)
        await press(pilot, "escape", "down", "right", "delete")
        await shows(pilot, "at_m cannot be left out")

    run(host, "f5", what)
    place = ("spot", "conductor")
    renamed, dropped, left_out = host.edits
    assert renamed.steps == (Rename("house.toml", place, "driver"),)
    assert dropped.steps == (Drop("house.toml", place),)
    assert left_out.steps == (Set("house.toml", ("air",), "humidity_pct", None),)


def test_undo_redo_and_write(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "u", "y", "w")
        await until(pilot, lambda: len(host.histories) == 3)

    run(host, "f6", what)
    assert host.histories == ["undo", "redo", "save"]


def test_the_air_is_asked_for_in_one_box_and_given_to_the_host(host) -> None:
    host.now = replace(host.now, air=AirView(16.0, 60.0, 101.325))

    async def what(pilot: Pilot) -> None:
        await shows(pilot, "air 16.0 C  60 %  101.3 kPa  from house.toml, not read since")
        await press(pilot, "a")
        await shows(pilot, "THE AIR NOW", "16 60 101.325_")
        await press(pilot, "ctrl+u")
        await enter(pilot, "21 45")
        await shows(pilot, "It wants three numbers")
        await press(pilot, "ctrl+u")
        await enter(pilot, "21 4 100")
        await shows(pilot, "4: expected a number from 5 to 100, in percent")
        await press(pilot, "ctrl+u")
        await enter(pilot, "21.5, 45, 100")
        await until(pilot, lambda: host.acts)

    run(host, "f5", what)
    air = {"temperature_c": 21.5, "humidity_pct": 45.0, "pressure_kpa": 100.0}
    assert host.acts == [("air", air)]
    assert host.edits == []


def test_another_address_may_speak(host) -> None:
    async def what(pilot: Pilot) -> None:
        await shows(pilot, "nothing listens")
        await press(pilot, "n")
        await shows(pilot, "WHO ELSE MAY SPEAK")
        await enter(pilot, "10.0.0.0/24 shout")
        await shows(pilot, "shout: expected words, each read, trigger, aim or hush")
        await press(pilot, "ctrl+u")
        await enter(pilot, "10.0.0.0/24 read hush")
        await until(pilot, lambda: host.edits)

    run(host, "f8", what)
    step = Set("wire.toml", ("allow",), "10.0.0.0/24", ["read", "hush"])
    assert host.edits == [Edit("10.0.0.0/24 may read hush", (step,))]


def test_the_caps_are_reached_from_the_guard_and_left_to_it(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "c")
        await shows(pilot, "> seats_table", "band kHz", "beamctl sign")
        await press(pilot, "down", "down", "right")
        await shows(pilot, "SEATS_DB OF CAPS")
        await enter(pilot, "95")
        await until(pilot, lambda: host.edits)
        await press(pilot, "escape")
        await shows(pilot, "- stage -")

    run(host, "f7", what)
    assert host.edits == [Edit("caps seats_db 95", (Set("guard.toml", (), "seats_db", 95.0),))]


def test_what_was_edited_shows_at_once_and_the_cursor_stays(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "down", "down", "down")
        await shows(pilot, "> block benches", "row_step_m   0 0.9 0.1")
        benches = host.show.house.block["benches"].model_copy(update={"seats": 4})
        spots = {"apron": host.show.house.spot["buffer"], **host.show.house.spot}
        update = {"block": {**host.show.house.block, "benches": benches}, "spot": spots}
        host.show = replace(host.show, house=host.show.house.model_copy(update=update))
        host.version += 1
        host.now = replace(host.now, sheet_version=host.version)
        host.text = replace(host.text, version=host.version)
        await shows(pilot, "spot apron", "> block benches", "seats        4")

    run(host, "f5", what)


@pytest.mark.parametrize("screen", ["f5", "f6", "f8"])
def test_in_show_the_picture_stays_and_no_key_changes_anything(host, screen: str) -> None:
    host.now = replace(host.now, mode="SHOW", output="SHUT")

    async def what(pilot: Pilot) -> None:
        await shows(pilot, {"f5": "air ", "f6": "feeds 1 to 64", "f8": "nothing listens"}[screen])
        await press(pilot, "n", "r", "u", "w", "a", "right", "down", "backspace")
        await pilot.click("#tables", (4, 2))
        await pilot.pause(0.1)

    run(host, screen, what, (80, 24))
    assert (host.edits, host.histories, host.acts) == ([], [], [])


def test_the_mouse_moves_the_cursor(host) -> None:
    async def what(pilot: Pilot) -> None:
        await shows(pilot, "> air")
        await pilot.click("#tables", (4, 3))
        await shows(pilot, "> block benches")
        await pilot.click("#tables", (24, 2))
        await shows(pilot, "> first_m")
        await pilot.click("#tables", (4, 1))
        await shows(pilot, "> spot conductor")

    run(host, "f5", what)
    assert host.edits == []


@pytest.mark.parametrize("size", [(1, 1), (20, 5), (60, 12), (300, 90)])
def test_odd_sizes_break_nothing(host, size: tuple[int, int]) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.resize_terminal(*size)
        for screen in ("f5", "f6", "f8"):
            await press(pilot, screen, "down", "right", "down", "escape", "home")

    run(host, "f5", what)
