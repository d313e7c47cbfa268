"""Boxes: what somebody must type or pick before something is asked for. Nothing here draws."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from beamctl.desk.keys import Ask
from beamctl.snapshot import Snapshot

CLEAR_WORD = "clear"
LONGEST = 200  # signs that a box takes

Use = Callable[[str], str]  # takes what was typed or picked; returns why it will not do, or ""
Search = Callable[[str], tuple[str, ...]]  # the choices that what was typed may mean, best first


@dataclass(frozen=True, slots=True)
class Box:
    """A question, and what has been typed so far.

    wants     what to type, in words
    action    the action that the text goes to as `argument`; "" where `use` takes it
    word      the only word it takes; "" takes any text
    choices   what may be picked; typed letters narrow them, arrows walk through them
    search    how they do, where it is not by the words in them
    strict    only a choice will do, and Enter takes the first that matches
    digits    0 is a digit here and hushes nothing; Insert and F12 still do
    idle_s    it closes by itself after so long without a key; 0 for never
    prefilled what is typed first takes the place of what stands there
    """

    title: str
    text: str
    wants: str
    action: str = ""
    argument: str = ""
    word: str = ""
    use: Use | None = None
    choices: tuple[str, ...] = ()
    search: Search | None = None
    strict: bool = False
    digits: bool = True
    idle_s: float = 0.0
    prefilled: bool = False
    typed: str = ""
    complaint: str = ""
    picked: int | None = None  # among those that match

    def with_sign(self, sign: str) -> Box:
        """After `sign` was typed; what is no single printable sign changes nothing."""
        before = "" if self.prefilled else self.typed
        if len(sign) != 1 or not sign.isprintable() or len(before) >= LONGEST:
            return self
        return replace(self, typed=before + sign, complaint="", picked=None, prefilled=False)

    def without_last(self) -> Box:
        """After the last sign was rubbed out."""
        return replace(self, typed=self.typed[:-1], complaint="", picked=None, prefilled=False)

    def emptied(self) -> Box:
        """After all that was typed was rubbed out."""
        return replace(self, typed="", complaint="", picked=None, prefilled=False)

    def walked(self, by: int) -> Box:
        """After the pick moved on by `by`; none is picked above the first, unless one must be."""
        before_first = 0 if self.strict else -1
        at = (before_first if self.picked is None else self.picked) + by
        at = min(at, len(self.matching) - 1)
        return replace(self, picked=at if at >= 0 else None)

    def completed(self) -> Box:
        """With the picked or the first matching choice typed out, as Tab does."""
        match = self.matching[self.picked or 0 : (self.picked or 0) + 1]
        return replace(self, typed=match[0], picked=None, prefilled=False) if match else self

    def refused(self, why: str) -> Box:
        """Open as before, and saying why it did not close."""
        return replace(self, complaint=why)

    def wrong(self) -> Box:
        """Empty again: what was typed is not what it wants."""
        return replace(self, typed="", complaint=f"Not sent: it wants {self.wants}.")

    @property
    def matching(self) -> tuple[str, ...]:
        """The choices that have every typed word in them; those that begin with the text first."""
        if self.search is not None:
            return self.search(self.typed)
        text = self.typed.casefold()
        words = text.split()
        found = [c for c in self.choices if all(word in c.casefold() for word in words)]
        return tuple(sorted(found, key=lambda choice: not choice.casefold().startswith(text)))

    @property
    def chosen(self) -> str:
        """What Enter takes: the picked choice, else the text; "" when a strict box has no match."""
        if self.picked is not None and self.picked < len(self.matching):
            return self.matching[self.picked]
        if self.strict:
            return self.matching[0] if self.matching else ""
        return " ".join(self.typed.split())

    def ask(self) -> Ask | None:
        """What the typed text asks for; None while it is not what the box wants."""
        text = self.chosen
        if self.word:
            text = self.word if text.casefold() == self.word else ""
        return Ask(self.action, {self.argument: text}) if text else None


def trip_box(reason: str) -> Box:
    """After a trip: a typed word leads from TRIPPED to HUSHED, and no further."""
    return Box(
        title="THE GUARD TRIPPED",
        text="Find out why before anything sounds again. The word leads to HUSHED; then * and "
        f"Enter restore as ever. {reason or 'No reason given.'}",
        wants=f"the word {CLEAR_WORD}",
        action="clear",
        argument="word",
        word=CLEAR_WORD,
        digits=False,
    )


def vouch_box() -> Box:
    """A house without seats: somebody must answer for everybody in it."""
    return Box(
        title="NO SEAT IS DECLARED",
        text="The house has no seat and no crew point: the guard has nowhere to measure, and no "
        "cap can be held. Whoever gives a name answers for everybody in the room, and the "
        "journal keeps it. Local rules and qualified people come first.",
        wants="your name",
        action="vouch",
        argument="name",
        digits=False,
    )


def box_for(seen: Snapshot, asks_word: bool) -> Box | None:
    """The box that Enter opens with `seen` on the screen, None for none.

    `asks_word`: * was pressed after the trip, and its five seconds still run.
    """
    if seen.output == "TRIPPED" and asks_word:
        return trip_box(seen.guard.reason)
    if seen.output == "SHUT" and seen.unvouched and seen.arming:
        return vouch_box()
    return None
