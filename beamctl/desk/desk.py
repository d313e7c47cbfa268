"""What a page may ask of the desk that shows it, and what the pages share."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

from beamctl.desk.box import Box
from beamctl.desk.keymap import Keymap
from beamctl.desk.theme import Form
from beamctl.show.edits import Edit
from beamctl.snapshot import Answer

Then = Callable[[Answer], None]  # called on the screen's own thread once the host has answered


@dataclass(slots=True)
class Cursor:
    """Which cue and act the designer is at, on the Sheet and on the Bench alike."""

    ref: str = ""
    act: int = 0


class Desk(Protocol):
    """Pages get this. Nothing here waits for the host."""

    cursor: Cursor

    @property
    def form(self) -> Form:
        """What the terminal can show."""
        ...

    @property
    def keymap(self) -> Keymap:
        """Which key does what."""
        ...

    def screen_name(self) -> str:
        """Name of the page that shows."""
        ...

    def ask(self, name: str, /, **arguments: object) -> None:
        """Ask the host for an action of the registry; the answer is told on the screen."""
        ...

    def edit(self, edit: Edit, then: Then | None = None) -> None:
        """Have the show edited; what was done is told, a refusal goes to `then` if there is one."""
        ...

    def history(self, what: str) -> None:
        """ "undo", "redo" or "save"."""
        ...

    def open(self, box: Box) -> None:
        """Show a box; keys go into it until it closes."""
        ...

    def tell(self, text: str) -> None:
        """Say something for a few seconds, where answers are said."""
        ...

    def turn_to(self, screen: str) -> None:
        """Show another screen, by its name in the registry."""
        ...
