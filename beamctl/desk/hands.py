"""From key presses to deeds: which press counts, where it goes, and what it asks for.

Hush goes out at once, whatever is open. Every other press waits the few milliseconds that show
whether it was typed or pasted, and then goes to the box that is open, to the screen's own verbs
while the show is written, or to the keys of a show.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

from beamctl.desk import asks
from beamctl.desk.box import Box, box_for
from beamctl.desk.desk import Desk
from beamctl.desk.format import View
from beamctl.desk.keyguard import PasteGuard, RepeatGuard
from beamctl.desk.keymap import ENTERS, SURE_HUSH
from beamctl.desk.keys import ask_for
from beamctl.desk.registry import EVERYTHING
from beamctl.desk.verbs import common

HUSH = "hush"
LEAVE_S = 3.0
WORD_S = 5.0  # after a trip: from * to Enter, as the host counts it from READY to Enter
_WALKS = {"up": -1, "down": 1, "pageup": -8, "pagedown": 8}


@dataclass(frozen=True, slots=True)
class Press:
    """One key press: the key, the sign that it types, and when, by the terminal's own clock."""

    key: str
    sign: str
    at_s: float


class Owner(Desk, Protocol):
    """What hands need of the desk besides what a page may ask."""

    @property
    def fresh(self) -> bool:
        """Whether the picture on the screen may be trusted."""
        ...

    def clock(self) -> float:
        """Seconds, of the courier's clock."""
        ...

    def do_verb(self, name: str, view: View) -> None:
        """Have the page that shows do one of its verbs."""
        ...

    def close_caution(self) -> None:
        """Close the caution if it has stood long enough."""
        ...

    def saw_key(self, key: str, sign: str, name: str) -> None:
        """The key test shows: a key came that is bound to action `name`."""
        ...

    def scroll(self, by: int) -> None:
        """Move what the page shows by so many rows."""
        ...

    def leave(self) -> None:
        """Leave the desk."""
        ...

    def dim(self) -> None:
        """One step of the dimmer."""
        ...


class Hands:
    """Everything typed at one desk goes through here."""

    def __init__(self, desk: Owner) -> None:
        self._desk = desk
        self._go_guard, self._paste_guard = RepeatGuard(), PasteGuard()
        self.box: Box | None = None
        self._box_until_s: float | None = None
        self._leave_until_s = self._word_until_s = 0.0
        self._let_go = False  # another key came since the last Enter

    # -- what the screen shows of it -----------------------------------------------------------

    @property
    def asks_leave(self) -> bool:
        """The leave key was pressed once while it may sound, or with edits that are not saved."""
        return self._desk.clock() < self._leave_until_s

    @property
    def asks_word(self) -> bool:
        """After a trip the first of two keys was pressed."""
        return self._desk.clock() < self._word_until_s

    def tick(self) -> None:
        """Close a box that nobody typed in for its time."""
        if self._box_until_s is not None and self._desk.clock() > self._box_until_s:
            self.shut_box()

    # -- presses -------------------------------------------------------------------------------

    def hushes(self, press: Press) -> bool:
        """True for a key that means hush, with what is open now."""
        if press.key in SURE_HUSH:
            return True
        types = self.box is not None and self.box.digits
        return not types and self._name(press.key, None) == HUSH

    def takes(self, press: Press, view: View | None) -> Callable[[], None] | None:
        """Count the press; what to do with it once it is known to be typed, None for nothing."""
        number, soon, let_go = self._paste_guard.count(press.at_s), False, self._let_go
        if press.key in ENTERS or self._name(press.key, view) == "go":
            soon = not self._go_guard.lets(press.at_s)
            self._let_go = False
            if soon and not let_go:
                return None
        else:
            self._let_go = True  # a key stops repeating when another one is pressed

        def typed() -> None:
            # Enter soon after Enter may go on in a box, but what closed the box must not fire.
            if self._paste_guard.holds(number) and (not soon or self._edits(press, view)):
                self._typed(press, view)

        return typed

    def open(self, box: Box) -> None:
        """Show `box`; what is typed from now on goes into it."""
        self.box = box
        self._box_until_s = self._desk.clock() + box.idle_s if box.idle_s else None

    def shut_box(self) -> None:
        """Close the box that is open, if any."""
        self.box, self._box_until_s = None, None

    # -- inside --------------------------------------------------------------------------------

    def _name(self, key: str, view: View | None) -> str:
        writing = view is not None and view.snapshot.mode != "SHOW"
        return self._desk.keymap.name_of(key, self._desk.screen_name(), writing)

    def _edits(self, press: Press, view: View | None) -> bool:
        """True when this press only goes into a box or moves about in what is written."""
        name = self._name(press.key, view)
        return self.box is not None or (name != "" and bool(EVERYTHING[name].on))

    def _typed(self, press: Press, seen: View | None) -> None:
        name = self._name(press.key, seen)
        if name == common.LEAVE.name:
            self._leave(seen)
        elif self._desk.screen_name() == "caution":
            if press.key in ENTERS:
                self._desk.close_caution()
        elif self.box is not None:
            self._into_box(self.box, press)
        elif name in (common.HELP.name, *common.SCREENS):
            self._desk.turn_to(name)
        elif self._desk.screen_name() == common.KEY_TEST.name:
            self._desk.saw_key(press.key, press.sign, name)
        elif self._desk.screen_name() == common.HELP.name:
            if press.key in _WALKS:
                self._desk.scroll(_WALKS[press.key])
        elif name:
            self.do(name, seen)

    def do(self, name: str, seen: View | None) -> None:
        """Do an action of the registry with `seen` on the screen."""
        action = EVERYTHING[name]
        if name == common.DIM.name:
            self._desk.dim()
        elif name in (common.HELP.name, common.KEY_TEST.name, *common.SCREENS):
            self._desk.turn_to(name)
        elif seen is not None and action.on and action not in common.HISTORY:
            self._desk.do_verb(name, seen)
        elif seen is None or seen.stale_s is not None:
            self._desk.tell(f"{action.title}: not sent: no fresh picture of the host")
        elif action in common.HISTORY:
            self._desk.history(name)
        elif name == common.PALETTE.name:
            self.open(asks.palette(seen, self._desk.screen_name(), self._desk.keymap, self.do))
        elif name == common.FIND.name:
            self.open(asks.find(seen, self._desk))
        elif name == common.SWITCH_MODE.name:
            self.open(asks.modes(seen, self._desk))
        elif action.event is not None:
            self._ask(name, seen)

    def _ask(self, name: str, seen: View) -> None:
        if name == "ready" and seen.snapshot.output == "TRIPPED":
            self._word_until_s = self._desk.clock() + WORD_S
            return
        if name == "go" and (box := box_for(seen.snapshot, self.asks_word)):
            self.open(box)
            self._word_until_s = 0.0
            return
        ask = ask_for(name, seen.snapshot)
        if ask is None:
            self._desk.tell("Go: nothing stands by")
        else:
            self._desk.ask(ask.name, **ask.arguments)

    def _into_box(self, box: Box, press: Press) -> None:
        if press.key in ENTERS:
            self._send(box)
        elif press.key == "escape":
            self.shut_box()
        elif press.key == "backspace":
            self.open(box.without_last())
        elif press.key == "ctrl+u":
            self.open(box.emptied())
        elif press.key in _WALKS and box.choices:
            self.open(box.walked(_WALKS[press.key]))
        elif press.key == "tab" and box.choices:
            self.open(box.completed())
        else:
            self.open(box.with_sign(press.sign))

    def _send(self, box: Box) -> None:
        """Give away what was typed; the box stays open when it will not do."""
        if box.use is not None:
            self.shut_box()
            why = box.use(box.chosen)
            if why and self.box is None:
                self.open(box.refused(why))
            return
        ask = box.ask()
        if ask is None:
            self.open(box.wrong())
        elif not self._desk.fresh:
            self.open(box.refused("Not sent: no fresh picture of the host."))
        else:
            self.shut_box()
            self._desk.ask(ask.name, **ask.arguments)

    def _leave(self, seen: View | None) -> None:
        asks = seen is not None and (
            seen.snapshot.output == "OPEN" or seen.snapshot.edit.unsaved > 0
        )
        if asks and not self.asks_leave:
            self._leave_until_s = self._desk.clock() + LEAVE_S
        else:
            self._desk.leave()

    def hushed(self) -> None:
        """Hush was asked for: no word is waited for any more."""
        self._word_until_s = 0.0
