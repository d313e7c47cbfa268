"""A desk on a screen in memory, driven by keys and looked at cell by cell."""

from __future__ import annotations

import asyncio
import time
from collections.abc import Awaitable, Callable

from rich.style import Style
from textual import events
from textual.pilot import Pilot
from textual.strip import Strip

from beamctl.desk.app import DeskApp
from beamctl.desk.courier import Courier
from beamctl.desk.theme import Form

SIZES = [(80, 24), (120, 40)]
LIT_FROM = 0.18  # relative luminance of a cell that counts as lit
LIT_SHARE = 0.15


def strips(app: DeskApp) -> list[Strip]:
    """The screen as it stands, row by row."""
    return app.screen._compositor.render_strips()


def text_of(app: DeskApp) -> str:
    return "\n".join(strip.text for strip in strips(app))


async def until(pilot: Pilot, ready: Callable[[], object]) -> None:
    """Wait for `ready`, at most five seconds."""
    end_s = time.monotonic() + 5.0
    while not ready():
        assert time.monotonic() < end_s, text_of(pilot.app)
        await pilot.pause(0.01)


def on_desk(
    host,
    what: Callable[[Pilot], Awaitable[None]],
    size: tuple[int, int] = (80, 24),
    form: Form | None = None,
    on_read: Callable[[], None] | None = None,
) -> DeskApp:
    """Run `what` on a desk that shows the host's picture, or the caution with `on_read`."""
    courier = Courier(host)
    app = DeskApp(courier, form or Form(ascii=True), on_read)
    first = "Night Tram" if on_read is None else "CAUTION"

    async def main() -> None:
        async with app.run_test(size=size) as pilot:
            await until(pilot, lambda: first in text_of(app))
            await what(pilot)

    courier.start()
    try:
        asyncio.run(main())
    finally:
        courier.stop()
    return app


def key_at(key: str, at_s: float) -> events.Key:
    """A press as the terminal's thread stamps it, however late the screen comes to handle it."""
    event = events.Key(key, None)
    event.time = at_s
    return event


def lit_share(rows: list[Strip], cells: int) -> float:
    """Share of the cells that hold a mark brighter than LIT_FROM; every ground must be black."""
    lit = 0
    for text, style, _ in (segment for strip in rows for segment in strip):
        assert style.bgcolor.get_truecolor() == (0, 0, 0)
        if text.strip() and luminance(style) > LIT_FROM:
            lit += sum(sign != " " for sign in text)
    return lit / cells


def luminance(style: Style) -> float:
    """Relative luminance of the foreground by WCAG 2."""
    parts = [part / 255 for part in style.color.get_truecolor()]
    linear = [p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]
