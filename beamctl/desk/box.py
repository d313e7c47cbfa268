"""Boxes: what somebody must type before the desk asks for it. Nothing here draws or sends."""

from __future__ import annotations

from dataclasses import dataclass, replace

from beamctl.desk.keys import Ask
from beamctl.snapshot import Snapshot

CLEAR_WORD = "clear"
LONGEST = 40  # signs that a box takes


@dataclass(frozen=True, slots=True)
class Box:
    """A question, what has been typed so far, and what is asked of the host in the end."""

    title: str
    text: str
    wants: str  # what to type, in words
    action: str
    argument: str
    word: str = ""  # the only word it takes; "" takes any text
    typed: str = ""
    complaint: str = ""

    def with_sign(self, sign: str) -> Box:
        """After `sign` was typed; what is no single printable sign changes nothing."""
        if len(sign) != 1 or not sign.isprintable() or len(self.typed) >= LONGEST:
            return self
        return replace(self, typed=self.typed + sign, complaint="")

    def without_last(self) -> Box:
        """After the last sign was rubbed out."""
        return replace(self, typed=self.typed[:-1], complaint="")

    def refused(self, why: str) -> Box:
        """Open as before, and saying why it did not close."""
        return replace(self, complaint=why)

    def wrong(self) -> Box:
        """Empty again: what was typed is not what it wants."""
        return replace(self, typed="", complaint=f"Not sent: it wants {self.wants}.")

    def ask(self) -> Ask | None:
        """What the typed text asks for; None while it is not what the box wants."""
        text = " ".join(self.typed.split())
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
