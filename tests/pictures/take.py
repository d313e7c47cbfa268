"""Takes the README's pictures from the running program: `python tests/pictures/take.py`.

A real host plays the shipped show on the null sink; the desk looks on without a terminal.
"""

from __future__ import annotations

import asyncio
import subprocess
import sys
import tempfile
import time
from os import environ
from pathlib import Path

from beamctl.desk.app import DeskApp
from beamctl.desk.courier import Courier
from beamctl.desk.theme import choose_form
from beamctl.host.link import Link

HERE = Path(__file__).parent
SHOW = HERE.parents[1] / "scenes" / "night-tram"
CUES = ("1", "2", "3")
SIZE = (120, 40)
# file → keys that lead to what it shows
SCREENS = {
    "desk": ("f2",),
    "guard": ("f7",),
    "sheet": ("f3", "home", "down", "down"),
    "bench": ("f4",),
    "house": ("f5", "down", "down"),
    "rig": ("f6",),
    "wire": ("f8",),
    "log": ("shift+f8",),
    "help": ("f2", "f1"),
}
SETTLES_S = 1.5  # until a screen has its levels
BETWEEN_S = 0.1  # keys: faster would be a paste


def play(link: Link) -> None:
    """Arm, and fire the first cues."""
    until = time.monotonic() + 120.0
    while time.monotonic() < until:
        try:
            if link.act("ready").done:  # open, and the guard sees
                break
        except OSError:
            pass
        time.sleep(0.1)
    link.act("confirm")
    for ref in CUES:
        link.act("go", ref=ref)
        time.sleep(1.2)


async def pictures(link: Link) -> dict[str, str]:
    """Every screen as SVG, by the name of its file."""
    courier = Courier(link, time.monotonic)
    courier.start()
    taken = {}
    try:
        app = DeskApp(courier, choose_form(plain=False, environ={"TERM": "xterm-256color"}))
        async with app.run_test(size=SIZE) as pilot:
            for name, keys in SCREENS.items():
                for key in keys:
                    await pilot.press(key)
                    await pilot.pause(BETWEEN_S)
                while courier.draft is None:
                    await pilot.pause(BETWEEN_S)
                await pilot.pause(SETTLES_S)
                taken[name] = app.export_screenshot(title="beamctl desk scenes/night-tram")
    finally:
        courier.stop()
    return taken


def main() -> None:
    """Play, and write a picture of every screen."""
    with tempfile.TemporaryDirectory() as folder:
        environ["BEAMCTL_RUNTIME"] = environ["BEAMCTL_STATE"] = folder
        host = subprocess.Popen([sys.executable, "-m", "beamctl", "host", str(SHOW)])
        try:
            link = Link(SHOW)
            play(link)
            for name, svg in asyncio.run(pictures(link)).items():
                (HERE / f"{name}.svg").write_text(svg, encoding="utf-8")
            Link(SHOW).stop_host()
            host.wait(20.0)
        finally:
            host.kill()


if __name__ == "__main__":
    main()
