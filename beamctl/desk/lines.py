"""The one widget of the desk: rows in, strips out, redrawn only when a row changed."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache

from rich.segment import Segment
from textual.strip import Strip
from textual.widget import Widget

from beamctl.desk.format import Row
from beamctl.desk.theme import Form


@lru_cache(maxsize=512)
def strip_of(row: Row, width: int, form: Form, stale: bool) -> Strip:
    """`row` as a strip of exactly `width` cells."""
    segments = [
        Segment(_plain(text) if form.ascii else text, form.style(role, stale)) for text, role in row
    ]
    return Strip(segments).adjust_cell_length(width, form.style("dim"))


def _plain(text: str) -> str:
    return text.encode("ascii", "replace").decode("ascii")


class Lines(Widget, inherit_bindings=False, can_focus=False):
    """Shows rows it is given."""

    ALLOW_SELECT = False

    def __init__(self, name: str, form: Form) -> None:
        super().__init__(name=name, id=name)
        self._form = form
        self._rows: tuple[Row, ...] = ()
        self._stale = False

    def show(self, rows: Sequence[Row], stale: bool = False) -> None:
        """Take `rows`; asks for one refresh if they differ from what is shown."""
        if (tuple(rows), stale) != (self._rows, self._stale):
            self._rows, self._stale = tuple(rows), stale
            self.refresh()

    def restyle(self, form: Form) -> None:
        """Draw in another form from now on."""
        self._form = form
        self.refresh()

    def render_line(self, y: int) -> Strip:
        """Row `y` as a strip."""
        row = self._rows[y] if y < len(self._rows) else ()
        return strip_of(row, self.size.width, self._form, self._stale)
