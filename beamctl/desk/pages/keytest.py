"""The key test: what this terminal sends for a key, and what the desk would do by it."""

from __future__ import annotations

from collections import deque
from typing import ClassVar

from beamctl.desk.desk import Desk
from beamctl.desk.format import Row, Span, View, clean, pad
from beamctl.desk.keymap import printed
from beamctl.desk.pages.page import Page, Rows, filled
from beamctl.desk.registry import EVERYTHING

MOST = 200
_ABOUT = (
    "Press any key: this shows what the terminal sends for it, and what it does on the Desk.",
    "Nothing is done here, but hush works as everywhere. F1 to F8 leave.",
)
_HEADING = f"{'key':<24}{'types':<8}does"


class KeyTestPage(Page):
    """The newest key first."""

    NAME = "key-test"
    PARTS: ClassVar = ("seen",)

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self._seen: deque[Row] = deque(maxlen=MOST)

    def saw(self, key: str, sign: str, name: str) -> None:
        """A key came that is bound to action `name`, "" for none."""
        does = f"{EVERYTHING[name].title} ({printed((key,))})" if name else "nothing"
        types = clean(sign) if sign else "--"
        self._seen.appendleft((Span(f"{pad(key, 24)}{pad(types, 8)}{does}", "text"),))

    def head(self, view: View, width: int) -> Rows:
        """What this page is for."""
        return [
            (Span("KEY TEST", "text"),),
            *[(Span(line),) for line in _ABOUT],
            (),
            (Span(_HEADING),),
        ]

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """The keys that came."""
        return {"seen": filled(list(self._seen), height)}
