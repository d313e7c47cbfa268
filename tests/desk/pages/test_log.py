"""The Log: it follows the newest line, and stays where somebody moved to."""

from __future__ import annotations

from dataclasses import replace

from desk.driving import on_desk, text_of, until
from textual.pilot import Pilot

from beamctl.desk.keyguard import PASTE_S

LINES = [f"20:04:{n:02}.0 GO {n} (desk)" for n in range(60)]


async def press(pilot: Pilot, *keys: str) -> None:
    """So far apart that they do not count as pasted."""
    for key in keys:
        await pilot.press(key)
        await pilot.pause(PASTE_S / 2.0)


def last_row(pilot: Pilot) -> str:
    rows = [row for row in text_of(pilot.app).splitlines() if "rows" in row]
    return rows[-1] if rows else ""


def test_it_follows_the_newest_until_somebody_moves_back(host) -> None:
    host.log = lambda most: tuple(LINES[-most:])

    async def what(pilot: Pilot) -> None:
        await pilot.press("shift+f8")
        await until(pilot, lambda: "GO 59 " in text_of(pilot.app))
        LINES.append("20:05:00.0 GO 60 (desk)")
        await until(pilot, lambda: "GO 60 " in text_of(pilot.app))
        await pilot.press("pageup")
        await until(pilot, lambda: "newer ones below" in last_row(pilot))
        before = last_row(pilot).split(" of ")[0]
        LINES.append("20:05:01.0 GO 61 (desk)")
        await until(pilot, lambda: " of 62" in last_row(pilot))
        assert last_row(pilot).split(" of ")[0] == before
        assert "GO 61 " not in text_of(pilot.app)
        await pilot.press("home")
        await until(pilot, lambda: "GO 0 " in text_of(pilot.app))
        await pilot.press("end")
        await until(pilot, lambda: "GO 61 " in text_of(pilot.app))

    on_desk(host, what)


def test_a_word_narrows_it_and_an_empty_box_shows_all(host) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("shift+f8")
        await until(pilot, lambda: "GO 11" in text_of(pilot.app))
        await press(pilot, "n", *"busy", "enter")
        await until(pilot, lambda: 'rows 1 to 1 of 1  only with "busy"' in text_of(pilot.app))
        assert "GO 11" not in text_of(pilot.app)
        await press(pilot, "n", "ctrl+u", "enter")
        await until(pilot, lambda: "rows 1 to 2 of 2" in text_of(pilot.app))

    on_desk(host, what)


def test_in_show_the_newest_lines_show_and_nothing_moves_them(host) -> None:
    host.now = replace(host.now, mode="SHOW")

    async def what(pilot: Pilot) -> None:
        await pilot.press("shift+f8")
        await until(pilot, lambda: "refused busy" in text_of(pilot.app))
        await pilot.press("n", "home")
        await pilot.pause(0.1)
        assert "NARROW" not in text_of(pilot.app)

    on_desk(host, what)
