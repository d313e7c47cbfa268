"""What keeps the output shut, whoever asks: a trip, a blind guard, a house without seats."""

from __future__ import annotations

from dataclasses import dataclass

from beamctl.show.states import Reason

CLEAR_WORD = "clear"

Refusal = tuple[Reason, str]


@dataclass(slots=True)
class Locks:
    """`tripped` and `blind` say why, "" when not; `vouched` is who answers for want of seats."""

    seats: bool
    tripped: str = ""
    blind: str = ""
    vouched: str = ""

    @property
    def unvouched(self) -> bool:
        """True for a house without seats that nobody has answered for."""
        return not self.seats and not self.vouched

    def refusal(self, opening: bool = True) -> Refusal | None:
        """Why nothing may open now, or be made ready to: somebody may still answer before it is."""
        if self.tripped:
            return "tripped", f"tripped: {self.tripped}; type {CLEAR_WORD} first"
        if self.blind:
            return "not-armed", f"the guard is blind: {self.blind}"
        if opening and self.unvouched:
            what = "no seat is declared, so nothing can be measured: somebody must answer for it"
            return "not-armed", what
        return None

    def clear(self, word: str) -> Refusal | None:
        """Take the trip away; else why not."""
        if not self.tripped:
            return "busy", "nothing has tripped"
        if word.strip().lower() != CLEAR_WORD:
            return "tripped", f"type the word {CLEAR_WORD}"
        if self.blind:
            return "tripped", f"the guard is blind: {self.blind}"
        self.tripped = ""
        return None

    def vouch(self, name: str) -> Refusal | None:
        """Let somebody answer by name for a house without seats; else why not."""
        if not name.strip():
            return "bad-type", "a name is needed"
        self.vouched = name.strip()
        return None
