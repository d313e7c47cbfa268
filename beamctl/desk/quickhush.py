"""Hush in the thread that reads the terminal, so that it waits for nothing the screen does.

The screen's own loop stands still while it draws, and for as long as a terminal takes no more of
what is written to it. Insert and F12 mean hush whatever is open, so they need no loop to be judged.
"""

from __future__ import annotations

from collections.abc import Callable

from textual import events
from textual.driver import Driver
from textual.message import Message

from beamctl.desk.keymap import SURE_HUSH


def hushing(base: type[Driver], hush: Callable[[], None]) -> type[Driver]:
    """A driver like `base` that calls `hush` as soon as one of those keys is read."""

    class Hushing(base):  # type: ignore[valid-type, misc]
        """Reads like its base."""

        def process_message(self, message: Message) -> None:
            """Runs in the thread that reads."""
            if isinstance(message, events.Key) and message.key in SURE_HUSH:
                hush()
            super().process_message(message)

    return Hushing
