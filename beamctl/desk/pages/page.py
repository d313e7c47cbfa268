"""A page: head, body, an open box, notices and keys, each drawn from rows; it asks for nothing."""

from __future__ import annotations

from collections.abc import Mapping
from typing import ClassVar

from textual.app import ComposeResult
from textual.screen import Screen

from beamctl.desk.desk import Desk
from beamctl.desk.format import BLANK, Row, View
from beamctl.desk.lines import Lines
from beamctl.desk.rows.box import box_height, box_rows
from beamctl.desk.rows.parts import legend_rows, notice_row
from beamctl.desk.theme import Form
from beamctl.desk.verbs.common import REDO, SAVE, UNDO

Rows = list[Row]


class Page(Screen[None], inherit_bindings=False):
    """Shows a picture of the host 20 times a second.

    NAME   of the screen in the registry
    PARTS  of the body from top to bottom, each a widget: what changes together stands together
    """

    NAME: ClassVar[str] = ""
    PARTS: ClassVar[tuple[str, ...]] = ("body",)

    def __init__(self, desk: Desk) -> None:
        super().__init__(name=self.NAME)
        self.desk = desk
        names = ("head", *self.PARTS, "box", "notices", "legend")
        self._lines = {name: Lines(name, desk.form) for name in names}

    def compose(self) -> ComposeResult:
        """All parts from top to bottom."""
        yield from self._lines.values()

    def show(self, view: View | None, gone: bool) -> None:
        """Draw `view`; None while nothing has come from the host yet."""
        width, height = self.size
        legend = self.legend(view, width)
        self._put("notices", [notice_row(view, width, gone)])
        self._put("legend", legend)
        if view is None:
            return
        room = height - 1 - len(legend)
        stale = view.stale_s is not None
        head = self.head(view, width)[:room]
        self._put("head", head, stale)
        room -= len(head)
        boxed = (
            box_rows(view.box, width, min(room, box_height(view.box, width))) if view.box else []
        )
        self._put("box", boxed)
        body = self.body(view, width, room - len(boxed))
        for name in self.PARTS:
            self._put(name, body.get(name, []), stale)

    def head(self, view: View, width: int) -> Rows:
        """What stands above everything else."""
        raise NotImplementedError

    def body(self, view: View, width: int, height: int) -> Mapping[str, Rows]:
        """The rows of each part, `height` of them in all; what is not in it takes no room."""
        raise NotImplementedError

    def legend(self, view: View | None, width: int) -> Rows:
        """The keys that work here now."""
        writing = view is not None and view.snapshot.mode != "SHOW"
        told = self.desk.keymap.legend(self.NAME, writing)
        idle = idle_history(view) if view is not None else set()
        return legend_rows([entry for entry in told if entry[1] not in idle], width)

    def do(self, verb: str, view: View) -> None:
        """Do one of the page's own verbs; only called in WRITE and WALK, with a fresh picture."""

    def point(self, part: str, x: int, y: int, view: View) -> None:
        """The mouse was clicked on cell `x` of row `y` of a part; never called in SHOW."""

    def scroll(self, by: int, view: View) -> None:
        """The wheel was turned; never called in SHOW."""

    def restyle(self, form: Form) -> None:
        """Draw in another form from now on."""
        for part in self._lines.values():
            part.restyle(form)

    def _put(self, name: str, rows: Rows, stale: bool = False) -> None:
        part = self._lines[name]
        if part.styles.height is None or part.styles.height.value != len(rows):
            part.styles.height = len(rows)
        part.show(rows, stale)


def idle_history(view: View) -> set[str]:
    """Titles of undo, redo and save while they would lead nowhere."""
    edit = view.snapshot.edit
    leads = {UNDO.title: edit.undo, REDO.title: edit.redo, SAVE.title: edit.unsaved}
    return {title for title, does in leads.items() if not does}


def spaced(rows: Rows, gap: int) -> Rows:
    """`rows` with `gap` blank ones above."""
    return [*[BLANK] * gap, *rows]


def filled(rows: Rows, height: int) -> Rows:
    """`rows` as exactly `height` of them."""
    return [*rows, *[BLANK] * (height - len(rows))][: max(height, 0)]
