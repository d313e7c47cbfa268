"""The show as edited against the show as it was saved last, in a list that scrolls."""

from __future__ import annotations

import tomllib
from collections.abc import Iterator
from threading import Thread

from pydantic import BaseModel

from beamctl.desk.format import Row, Span, fit
from beamctl.desk.link import Draft
from beamctl.show.checks import GUARD, HOUSE, RIG, SHEET
from beamctl.show.differences import Line, differences
from beamctl.show.edits import BEGUN

WIRE = "wire.toml"


def compared(draft: Draft) -> Iterator[Line]:
    """What differs, file by file; a change of the sheet is told without the name of its file."""
    show = draft.show
    models: dict[str, BaseModel] = {
        SHEET: show.sheet, RIG: show.rig, HOUSE: show.house, GUARD: show.guard, WIRE: show.wire,
    }  # fmt: skip
    for file in dict.fromkeys((*models, *draft.saved, *draft.texts)):
        if draft.texts.get(file) == draft.saved.get(file):
            continue
        name = "" if file == SHEET else f"{file.removesuffix('.toml')}: "
        found: tuple[Line, ...] = ()
        if file in models:
            saved = tomllib.loads(draft.saved.get(file, BEGUN))
            found = differences(type(models[file]).model_validate(saved), models[file])
        yield from ((mark, f"{name}{text}") for mark, text in found)
        if not found:
            yield "~", f"{name}nothing but how it is written differs"


class ComparePane:
    """Worked out in a thread of its own, so that no key waits for it."""

    def __init__(self) -> None:
        self._draft: Draft | None = None
        self._lines: tuple[Line, ...] | None = None  # None while they are worked out
        self._top = 0

    @property
    def is_open(self) -> bool:
        """Whether it shows in place of the cue."""
        return self._draft is not None

    @property
    def picture(self) -> tuple[object, ...]:
        """What its rows are drawn from."""
        return self.is_open, self._lines, self._top

    def close(self) -> None:
        """Show the cue again."""
        self._draft, self._top = None, 0

    def follow(self, draft: Draft) -> None:
        """Open it, or have it look at a newer draft."""
        if draft is not self._draft:
            self._draft, self._lines = draft, None
            Thread(target=self._work, args=(draft,), name="desk-compare", daemon=True).start()

    def scroll(self, by: int, height: int) -> None:
        """Move the list."""
        last = max(len(self._lines or ()) - height + 1, 0)
        self._top = max(0, min(self._top + by, last))

    def rows(self, width: int, height: int) -> list[Row]:
        """A heading and as many lines as fit."""
        if self._lines is None:
            return [fit((Span("  comparing with the saved show ..."),), width)]
        lines = self._lines
        many = f"{len(lines)} differences from" if len(lines) != 1 else "1 difference from"
        heading = (
            Span(f"  {many if lines else 'nothing differs from'} the show as saved", "text"),
        )
        shown = lines[self._top : self._top + max(height - 1, 0)]
        told: list[Row] = [(Span(f"  {mark} ", "text"), Span(text)) for mark, text in shown]
        return [fit(row, width) for row in (heading, *told)]

    def _work(self, draft: Draft) -> None:
        lines = tuple(compared(draft))
        if draft is self._draft:
            self._lines = lines
