"""Boxes that lead to an edit: one that is refused opens its box again, with the reader's line."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from beamctl.desk.box import Box
from beamctl.desk.desk import Desk
from beamctl.show.edits import Edit
from beamctl.snapshot import Answer


class Asking:
    """Has edits made, and knows which box led to each and how many are not answered yet."""

    def __init__(self, desk: Desk) -> None:
        self._desk = desk
        self._answered: Box | None = None  # the box whose answer is being used
        self.unanswered = 0

    def open(self, box: Box) -> None:
        """Ask; what the box does with the answer may be `edit`."""

        def use(text: str) -> str:
            typed = "" if box.strict else text  # all choices again, or what was typed
            self._answered = replace(asked, typed=typed, picked=None)
            try:
                return box.use(text) if box.use else ""
            finally:
                self._answered = None

        asked = replace(box, use=use)
        self._desk.open(asked)

    def edit(self, edit: Edit, done: Callable[[], None] | None = None) -> str:
        """Have an edit made, then call `done`; returns "", so that a box may end by it.

        A refusal opens the box that led here again; without one it is told on the screen.
        """
        box = self._answered
        self.unanswered += 1

        def heard(answer: Answer) -> None:
            self.unanswered -= 1
            if answer.done:
                if done is not None:
                    done()
            elif box is not None:
                self._desk.open(box.refused(answer.text or answer.reason))
            else:
                self._desk.tell(f"{edit.label}: {answer.text or answer.reason}")

        self._desk.edit(edit, heard)
        return ""
