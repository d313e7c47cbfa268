"""The desk itself: pulls pictures 20 times a second, and turns keys into requests.

It owns nothing of the show: killing it, freezing it or losing its terminal changes no sample.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from functools import partial
from pathlib import Path
from typing import Any, ClassVar

from textual import events
from textual.app import App
from textual.driver import Driver
from textual.screen import Screen

from beamctl.desk.box import Box
from beamctl.desk.courier import Courier
from beamctl.desk.desk import Cursor, Then
from beamctl.desk.format import View
from beamctl.desk.hands import HUSH, Hands, Press
from beamctl.desk.keymap import DEFAULT, SURE_HUSH, Keymap
from beamctl.desk.lines import Lines
from beamctl.desk.link import HostLink
from beamctl.desk.pages.all import PAGES
from beamctl.desk.pages.caution import CautionPage
from beamctl.desk.pages.help import HelpPage
from beamctl.desk.pages.keytest import KeyTestPage
from beamctl.desk.pages.page import Page
from beamctl.desk.quickhush import hushing
from beamctl.desk.registry import EVERYTHING
from beamctl.desk.stderr import chatter_to_log
from beamctl.desk.theme import Form, choose_form
from beamctl.show.edits import Edit
from beamctl.snapshot import Answer, EditView

TICKS_HZ = 20
SWITCH_S = 0.001  # between threads: hush must not wait for whoever computes
STALE_S = 1.0  # a picture older than this is not trusted, whether or not the host is gone
ANSWER_S = 6.0  # how long an answer stays
SETTLE_S = 0.006  # a pasted run reaches the program in one piece, so this shows it
READ_S = 2.0  # the caution stands at least so long
HELPS = ("help", "key-test")  # screens that lie over the one they were called from


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
        self,
        courier: Courier,
        form: Form,
        on_read: Callable[[], None] | None = None,
        keymap: Keymap = DEFAULT,
    ) -> None:
        """`on_read`: show the caution first, and call this once somebody closed it."""
        super().__init__(ansi_color=form.colours != "full")
        self.animation_level = "none"
        self.cursor = Cursor()
        self.form, self.keymap = form, keymap
        self._courier = courier
        self._on_read = on_read
        self._hands = Hands(self)
        self._pages = {name: page(self) for name, page in PAGES.items()}
        self._answer: tuple[str, Answer] | None = None
        self._answer_until_s = self._readable_from_s = 0.0
        self._view: View | None = None

    def get_driver_class(self) -> type[Driver]:
        """The system's own, but the keys that always hush do so in its reading thread."""
        return hushing(super().get_driver_class(), lambda: self._courier.post(HUSH))

    def on_mount(self) -> None:
        """Show the desk and start the clock that redraws it."""
        for name, page in self._pages.items():
            self.install_screen(page, name)
        self.push_screen("desk")
        if self._on_read is not None:
            self._readable_from_s = self._courier.clock() + READ_S
            self.push_screen(CautionPage(self))
        self.set_interval(1.0 / TICKS_HZ, self._tick)
        self._tick()

    # -- what is typed and pointed at ----------------------------------------------------------

    def on_key(self, event: events.Key) -> None:
        """Hush at once; every other key once it is known to be typed."""
        event.stop()
        press = Press(event.key, event.character or "", event.time)
        if self._hands.hushes(press):
            if self.is_headless or press.key not in SURE_HUSH:  # else it was asked for already
                self._courier.post(HUSH)
            self._hands.hushed()
        elif (typed := self._hands.takes(press, self._view)) is not None:
            self.set_timer(SETTLE_S, partial(self._do_and_show, typed))

    def _do_and_show(self, typed: Callable[[], None]) -> None:
        """What was typed shows at once, not only with the next picture."""
        typed()
        self._view = self._look()
        self._tick_page()

    def on_paste(self, event: events.Paste) -> None:
        """A paste is nobody's key press."""
        event.stop()

    def on_click(self, event: events.Click) -> None:
        """The page may use the mouse while the show is written; nothing needs it."""
        view, part = self._writing, event.widget
        if view is not None and isinstance(part, Lines) and isinstance(self.top, Page):
            self.top.point(part.id or "", event.x, event.y, view)

    def on_mouse_scroll_down(self, event: events.MouseScrollDown) -> None:
        """One row on."""
        if self._writing is not None:
            self.scroll(1)

    def on_mouse_scroll_up(self, event: events.MouseScrollUp) -> None:
        """One row back."""
        if self._writing is not None:
            self.scroll(-1)

    @property
    def _writing(self) -> View | None:
        """What shows, while it may be edited and no box is open."""
        view = self._view if self.fresh and self._hands.box is None else None
        return view if view is not None and view.snapshot.mode != "SHOW" else None

    # -- what pages and hands may ask ----------------------------------------------------------

    @property
    def fresh(self) -> bool:
        """Whether the picture on the screen may be trusted."""
        return self._view is not None and self._view.stale_s is None

    def clock(self) -> float:
        """Seconds, of the courier's clock."""
        return self._courier.clock()

    @property
    def top(self) -> Screen[Any] | None:
        """The page that shows; None while the app goes."""
        return self.screen_stack[-1] if self.screen_stack else None

    def screen_name(self) -> str:
        """Name of the page that shows."""
        return self.top.NAME if isinstance(self.top, Page) else ""

    def ask(self, name: str, /, **arguments: object) -> None:
        """Ask the host for an action of the registry; the answer is told on the screen."""
        self._courier.post(name, **arguments)

    def edit(self, edit: Edit, then: Then | None = None) -> None:
        """Have the show edited; what was done is told, a refusal goes to `then` if there is one."""
        tell = self._tell_of(edit.label)

        def heard(answer: Answer) -> None:
            if answer.done or then is None:
                tell(answer)
            if then is not None:
                then(answer)

        self._courier.edit(edit, heard)

    def history(self, what: str) -> None:
        """ "undo", "redo" or "save"; told with what it takes back or brings again."""
        edit = self._view.snapshot.edit if self._view is not None else EditView()
        label = {"undo": edit.undo, "redo": edit.redo}.get(what, "")
        tell = self._tell_of(f"{what}: {label}" if label else what)

        def heard(answer: Answer) -> None:
            tell(answer)
            if what == "save" and not answer.done:  # what to do about it takes more than a line
                self.open(Box("NOT SAVED", answer.text, "nothing; Enter closes", use=lambda _: ""))

        self._courier.history(what, heard)

    def open(self, box: Box) -> None:
        """Show a box; keys go into it until it closes."""
        self._hands.open(box)

    def tell(self, text: str) -> None:
        """Say something for a few seconds, where answers are said."""
        self._show_answer("", Answer(False, "", text))

    def turn_to(self, screen: str) -> None:
        """Show another screen; help closes when it is asked for again."""
        now = self.screen_name()
        if now in HELPS:
            self.pop_screen()
        if screen in HELPS and now != screen:
            if isinstance(page := self._pages[screen], HelpPage):
                page.about = self.screen_name()
            self.push_screen(screen)
        elif screen not in HELPS and self.screen_name() != screen:
            self.switch_screen(screen)
        self._tick_page()

    def do_verb(self, name: str, view: View) -> None:
        """Have the page that shows do one of its verbs."""
        if isinstance(self.top, Page):
            self.top.do(name, view)

    def scroll(self, by: int) -> None:
        """Move what the page shows by so many rows."""
        if self._view is not None and isinstance(self.top, Page):
            self.top.scroll(by, self._view)

    def close_caution(self) -> None:
        """Close the caution if it has stood long enough."""
        if self._readable and self._on_read is not None:
            self.pop_screen()
            self._on_read()

    def saw_key(self, key: str, sign: str, name: str) -> None:
        """The key test shows: a key came that is bound to action `name`."""
        if isinstance(self.top, KeyTestPage):
            self.top.saw(key, sign, name)

    def leave(self) -> None:
        """Leave; no sound changes by it."""
        self.exit(0)

    def dim(self) -> None:
        """One step of the dimmer, and from the last one back to the first."""
        self.form = self.form.dimmed()
        for page in self._pages.values():
            page.restyle(self.form)

    # -- the clock -----------------------------------------------------------------------------

    def _tick(self) -> None:
        if not self.is_headless and not os.isatty(0):
            self.exit(0)  # its terminal is gone without a hang-up: it would spin on nothing
            return
        self._courier.ask_picture()
        for heard in self._courier.news():
            heard()
        while (news := self._courier.take_answer()) is not None:
            self._show_answer(EVERYTHING[news[0]].title, news[1])
        self._hands.tick()
        self._courier.want(self.screen_name())
        self._view = self._look()
        self._tick_page()

    def _tick_page(self) -> None:
        top = self.top
        if isinstance(top, CautionPage):
            top.readable = self._readable
        if isinstance(top, Page):
            top.show(self._view, self._courier.picture.gone)

    @property
    def _readable(self) -> bool:
        return self._courier.clock() >= self._readable_from_s

    def _tell_of(self, what: str) -> Then:
        return lambda answer: self._show_answer(f"{what[:1].upper()}{what[1:]}", answer)

    def _show_answer(self, title: str, answer: Answer) -> None:
        self._answer = title, answer
        self._answer_until_s = self._courier.clock() + ANSWER_S

    def _look(self) -> View | None:
        courier, now_s = self._courier, self._courier.clock()
        picture = courier.picture
        if picture.snapshot is None or picture.sheet is None:
            return None
        age_s = now_s - picture.at_s
        levels = courier.levels
        fresh = levels is not None and now_s - levels.at_s <= STALE_S
        return View(
            picture.sheet,
            picture.snapshot,
            stale_s=age_s if picture.gone or age_s > STALE_S else None,
            answer=self._answer if now_s < self._answer_until_s else None,
            asks_leave=self._hands.asks_leave,
            asks_word=self._hands.asks_word,
            box=self._hands.box,
            levels=levels.seats if levels is not None and fresh else None,
            draft=courier.draft,
            cue_levels=courier.cue_levels,
            log=courier.log,
            keymap=self.keymap,
            dot=self.form.dot,
        )


def run_desk(
    link: HostLink,
    log: Path,
    plain: bool = False,
    on_read: Callable[[], None] | None = None,
    keymap: Keymap = DEFAULT,
) -> int:
    """Run the desk on this terminal until the operator leaves; 0, or 1 when the desk itself failed.

    Leaving, and failing too, changes no sound. `link` is closed at the end. `log` takes what native
    libraries and a desk that fails have to say. With `on_read` the caution is shown first, and
    `on_read` is called once somebody has closed it.
    """
    courier = Courier(link)
    app = DeskApp(courier, choose_form(plain, os.environ), on_read, keymap)
    sys.setswitchinterval(SWITCH_S)
    courier.start()
    try:
        with chatter_to_log(log):
            app.run()
    finally:
        courier.stop()
    if app.return_code:
        print(f"The desk failed; the show goes on.\n  Start it again. {log} says why.")
    return app.return_code or 0
