"""The desk itself: pulls pictures 20 times a second, and turns keys into requests.

It owns nothing of the show: killing it, freezing it or losing its terminal changes no sample.
"""

from __future__ import annotations

import os
import sys
from functools import partial
from typing import ClassVar

import platformdirs
from textual import events
from textual.app import App

from beamctl.actions import ACTIONS
from beamctl.desk import keys
from beamctl.desk.courier import HUSH, Courier
from beamctl.desk.format import View
from beamctl.desk.keyguard import SETTLE_S, PasteGuard, RepeatGuard
from beamctl.desk.link import HostLink
from beamctl.desk.screens import DeskPage, HelpPage
from beamctl.desk.stderr import chatter_to_log
from beamctl.desk.theme import Form, choose_form
from beamctl.snapshot import Answer

TICKS_HZ = 20
STALE_S = 1.0  # a picture older than this is not trusted, whether or not the host is gone
ANSWER_S = 6.0  # how long an answer stays
LEAVE_S = 3.0


class DeskApp(App[int], inherit_bindings=False):
    """The terminal interface; `courier` must be started and stopped by whoever made it."""

    TITLE = "beamctl"
    ENABLE_COMMAND_PALETTE = False
    ALLOW_SELECT = False
    BINDINGS: ClassVar = []
    CSS = """
    Screen { background: black; overflow: hidden; layout: vertical; }
    Screen:ansi { background: ansi_default; }
    #readings, #sheet, #beams, #panels, #sink, #notices, #legend { width: 100%; height: 0; }
    #notices { dock: bottom; }
    #help { width: 100%; height: 100%; }
    """

    def __init__(self, courier: Courier, form: Form) -> None:
        super().__init__(ansi_color=form.colours != "full")
        self.animation_level = "none"
        self._courier = courier
        self._form = form
        self._go_guard, self._paste_guard = RepeatGuard(), PasteGuard()
        self._answer: tuple[str, Answer] | None = None
        self._answer_until_s = self._leave_until_s = 0.0
        self._view: View | None = None

    def on_mount(self) -> None:
        """Show the desk and start the clock that redraws it."""
        self.push_screen(DeskPage(self._form))
        self.set_interval(1.0 / TICKS_HZ, self._tick)
        self._tick()

    def on_key(self, event: events.Key) -> None:
        """Turn a key into a request; hush at once, the others once they are known to be typed."""
        event.stop()
        name = keys.name_of(event.key)
        if name == HUSH:
            self._courier.post(HUSH)
            return
        press = self._paste_guard.count(event.time)
        if name == "go" and not self._go_guard.lets(event.time):
            return
        if name:
            self.set_timer(SETTLE_S, partial(self._typed, name, press, self._view))

    def on_paste(self, event: events.Paste) -> None:
        """A paste is nobody's key press."""
        event.stop()

    def _typed(self, name: str, press: int, seen: View | None) -> None:
        if not self._paste_guard.holds(press):
            return
        if name == keys.HELP.name:
            self._turn_help()
        elif name == keys.LEAVE.name:
            self._leave(seen)
        elif isinstance(self.screen, DeskPage):
            self._ask(name, seen)

    def _ask(self, name: str, seen: View | None) -> None:
        if seen is None or seen.stale_s is not None:
            self._tell(name, Answer(False, "", "not sent: no fresh picture of the host"))
            return
        ask = keys.ask_for(name, seen.snapshot)
        if ask is None:
            self._tell(name, Answer(False, "", "nothing stands by"))
        else:
            self._courier.post(ask.name, **ask.arguments)

    def _leave(self, seen: View | None) -> None:
        now_s = self._courier.clock()
        sounds = seen is not None and seen.snapshot.output == "OPEN"
        if sounds and now_s >= self._leave_until_s:
            self._leave_until_s = now_s + LEAVE_S
        else:
            self.exit(0)

    def _turn_help(self) -> None:
        if isinstance(self.screen, HelpPage):
            self.pop_screen()
        else:
            self.push_screen(HelpPage(self._form))

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
        self._view = self._look()
        if isinstance(self.screen, DeskPage | HelpPage):
            self.screen.show(self._view, self._courier.picture.gone)

    def _look(self) -> View | None:
        picture, now_s = self._courier.picture, self._courier.clock()
        if picture.snapshot is None or picture.sheet is None:
            return None
        age_s = now_s - picture.at_s
        return View(
            picture.sheet,
            picture.snapshot,
            stale_s=age_s if picture.gone or age_s > STALE_S else None,
            answer=self._answer if now_s < self._answer_until_s else None,
            asks_leave=now_s < self._leave_until_s,
            dot=self._form.dot,
        )


def run_desk(link: HostLink, plain: bool = False) -> int:
    """Run the desk on this terminal until the operator leaves; 0, or 1 when the desk itself failed.

    Leaving, and failing too, changes no sound. `link` is closed at the end.
    """
    courier = Courier(link)
    app = DeskApp(courier, choose_form(plain, os.environ))
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
