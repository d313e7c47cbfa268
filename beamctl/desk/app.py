"""The desk itself: pulls pictures 20 times a second, and turns keys into requests.

It owns nothing of the show: killing it, freezing it or losing its terminal changes no sample.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from functools import partial
from typing import Any, ClassVar

import platformdirs
from textual import events
from textual.app import App
from textual.screen import Screen

from beamctl.actions import ACTIONS
from beamctl.desk import keys
from beamctl.desk.box import Box, box_for
from beamctl.desk.courier import HUSH, Courier
from beamctl.desk.format import View
from beamctl.desk.keyguard import SETTLE_S, PasteGuard, RepeatGuard
from beamctl.desk.link import HostLink
from beamctl.desk.screens import CautionPage, DeskPage, GuardPage, HelpPage, Page
from beamctl.desk.stderr import chatter_to_log
from beamctl.desk.theme import Form, choose_form
from beamctl.snapshot import Answer

TICKS_HZ = 20
STALE_S = 1.0  # a picture older than this is not trusted, whether or not the host is gone
ANSWER_S = 6.0  # how long an answer stays
LEAVE_S = 3.0
WORD_S = 5.0  # after a trip: from * to Enter, as the host counts it from READY to Enter
READ_S = 2.0  # the caution stands at least so long
LEVELS_EVERY = 5  # ticks: the Guard screen's levels come at 4 Hz
PAGES: dict[str, type[Page]] = {"desk": DeskPage, "guard": GuardPage}


class DeskApp(App[int], inherit_bindings=False):
    """The terminal interface; `courier` must be started and stopped by whoever made it."""

    TITLE = "beamctl"
    ENABLE_COMMAND_PALETTE = False
    ALLOW_SELECT = False
    BINDINGS: ClassVar = []
    CSS = """
    Screen { background: black; overflow: hidden; layout: vertical; }
    Screen:ansi { background: ansi_default; }
    Lines { width: 100%; height: 0; }
    #notices { dock: bottom; }
    """

    def __init__(
        self, courier: Courier, form: Form, on_read: Callable[[], None] | None = None
    ) -> None:
        """`on_read`: show the caution first, and call this once somebody closed it."""
        super().__init__(ansi_color=form.colours != "full")
        self.animation_level = "none"
        self._courier = courier
        self._form = form
        self._on_read = on_read
        self._go_guard, self._paste_guard = RepeatGuard(), PasteGuard()
        self._answer: tuple[str, Answer] | None = None
        self._answer_until_s = self._leave_until_s = self._word_until_s = 0.0
        self._readable_from_s = 0.0
        self._box: Box | None = None
        self._view: View | None = None
        self._ticks = 0

    def on_mount(self) -> None:
        """Show the desk and start the clock that redraws it."""
        self.push_screen(DeskPage(self._form))
        if self._on_read is not None:
            self._readable_from_s = self._courier.clock() + READ_S
            self.push_screen(CautionPage(self._form))
        self.set_interval(1.0 / TICKS_HZ, self._tick)
        self._tick()

    def on_key(self, event: events.Key) -> None:
        """Turn a key into a request; hush at once, the others once they are known to be typed."""
        event.stop()
        press = keys.Press(keys.name_of(event.key), event.key, event.character or "")
        if press.name == HUSH:
            self._courier.post(HUSH)
            self._word_until_s = 0.0
            return
        number = self._paste_guard.count(event.time)
        if press.counts_once and not self._go_guard.lets(event.time):
            return
        self.set_timer(SETTLE_S, partial(self._typed, press, number, self._view))

    def on_paste(self, event: events.Paste) -> None:
        """A paste is nobody's key press."""
        event.stop()

    def _typed(self, press: keys.Press, number: int, seen: View | None) -> None:
        if not self._paste_guard.holds(number):
            return
        if press.name == keys.LEAVE.name:
            self._leave(seen)
        elif isinstance(self._top, CautionPage):
            self._read(press)
        elif self._box is not None:
            self._into_box(self._box, press)
        elif press.name == keys.HELP.name:
            self._turn_help()
        elif press.name in PAGES:
            self._turn_to(PAGES[press.name])
        elif press.name and not isinstance(self._top, HelpPage):
            self._ask(press.name, seen)

    def _ask(self, name: str, seen: View | None) -> None:
        if seen is None or seen.stale_s is not None:
            self._tell(name, Answer(False, "", "not sent: no fresh picture of the host"))
            return
        now_s = self._courier.clock()
        if name == "ready" and seen.snapshot.output == "TRIPPED":
            self._word_until_s = now_s + WORD_S
            return
        if name == "go" and (box := box_for(seen.snapshot, now_s < self._word_until_s)):
            self._box, self._word_until_s = box, 0.0
            return
        ask = keys.ask_for(name, seen.snapshot)
        if ask is None:
            self._tell(name, Answer(False, "", "nothing stands by"))
        else:
            self._courier.post(ask.name, **ask.arguments)

    def _into_box(self, box: Box, press: keys.Press) -> None:
        if press.key in keys.ENTERS:
            self._box = self._send(box)
        elif press.key == "escape":
            self._box = None
        elif press.key == "backspace":
            self._box = box.without_last()
        else:
            self._box = box.with_sign(press.sign)

    def _send(self, box: Box) -> Box | None:
        """Ask for what the box asks for; the box when it must stay open."""
        ask = box.ask()
        if ask is None:
            return box.wrong()
        if self._view is None or self._view.stale_s is not None:
            return box.refused("Not sent: no fresh picture of the host.")
        self._courier.post(ask.name, **ask.arguments)
        return None

    def _read(self, press: keys.Press) -> None:
        """Enter closes the caution once it stood for a moment; nothing else does."""
        if press.key in keys.ENTERS and self._readable and self._on_read is not None:
            self.pop_screen()
            self._on_read()

    @property
    def _readable(self) -> bool:
        return self._courier.clock() >= self._readable_from_s

    def _leave(self, seen: View | None) -> None:
        now_s = self._courier.clock()
        sounds = seen is not None and seen.snapshot.output == "OPEN"
        if sounds and now_s >= self._leave_until_s:
            self._leave_until_s = now_s + LEAVE_S
        else:
            self.exit(0)

    def _turn_help(self) -> None:
        if isinstance(self._top, HelpPage):
            self.pop_screen()
        else:
            self.push_screen(HelpPage(self._form))

    def _turn_to(self, page: type[Page]) -> None:
        if isinstance(self._top, HelpPage):
            self.pop_screen()
        if not isinstance(self._top, page):
            self.switch_screen(page(self._form))

    def _tell(self, name: str, answer: Answer) -> None:
        self._answer = ACTIONS[name].title, answer
        self._answer_until_s = self._courier.clock() + ANSWER_S

    def _tick(self) -> None:
        if not self.is_headless and not os.isatty(0):
            self.exit(0)  # its terminal is gone without a hang-up: it would spin on nothing
            return
        self._courier.ask_picture()
        while (news := self._courier.take_answer()) is not None:
            self._tell(*news)
        self._ticks += 1
        self._view, top = self._look(), self._top
        if isinstance(top, GuardPage) and self._ticks % LEVELS_EVERY == 0:
            self._courier.ask_levels()
        if isinstance(top, CautionPage):
            top.readable = self._readable
        if isinstance(top, Page):
            top.show(self._view, self._courier.picture.gone)

    @property
    def _top(self) -> Screen[Any] | None:
        """The page that shows; None while the app goes."""
        return self.screen_stack[-1] if self.screen_stack else None

    def _look(self) -> View | None:
        picture, now_s = self._courier.picture, self._courier.clock()
        if picture.snapshot is None or picture.sheet is None:
            return None
        age_s = now_s - picture.at_s
        levels = self._courier.levels
        if levels is not None and now_s - levels.at_s > STALE_S:
            levels = None
        return View(
            picture.sheet,
            picture.snapshot,
            stale_s=age_s if picture.gone or age_s > STALE_S else None,
            answer=self._answer if now_s < self._answer_until_s else None,
            asks_leave=now_s < self._leave_until_s,
            asks_word=now_s < self._word_until_s,
            box=self._box,
            levels=levels.seats if levels is not None else None,
            dot=self._form.dot,
        )


def run_desk(link: HostLink, plain: bool = False, on_read: Callable[[], None] | None = None) -> int:
    """Run the desk on this terminal until the operator leaves; 0, or 1 when the desk itself failed.

    Leaving, and failing too, changes no sound. `link` is closed at the end. With `on_read` the
    caution is shown first, and `on_read` is called once somebody has closed it.
    """
    courier = Courier(link)
    app = DeskApp(courier, choose_form(plain, os.environ), on_read)
    log = platformdirs.user_log_path("beamctl", appauthor=False) / "desk.log"
    courier.start()
    try:
        with chatter_to_log(log):
            # Windows floods the input when it is told to leave the mouse alone.
            app.run(mouse=sys.platform == "win32")
    finally:
        courier.stop()
    if app.return_code:
        print(f"The desk failed; the show goes on.\n  Start it again. {log} says why.")
    return app.return_code or 0
