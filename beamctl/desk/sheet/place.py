"""Where the designer's cursor is on the Sheet, and how it moves. Nothing here draws."""

from __future__ import annotations

from dataclasses import dataclass, replace

from beamctl.show.sheet import Cue

CUE_FIELDS = ("ref", "title", "note", "then")
ACT_FIELDS = (
    *("at_s", "beam", "sound", "loop", "target", "via", "reach", "law", "depth", "trim_db"),
    *("over_s", "fall_s"),
)  # "target" stands for the keys of which an act has one, "then" for both of a follow-on


@dataclass(frozen=True, slots=True)
class Place:
    """A cue; a line of it; a field of the act on that line. Numbers count from 0.

    line   the cue's own fields, then its acts; None among the cues
    field  of the act on `line`; None for the line itself
    """

    cue: int = 0
    line: int | None = None
    field: int | None = None

    @property
    def act(self) -> int | None:
        """The act the cursor is on or in."""
        if self.line is None or self.line < len(CUE_FIELDS):
            return None
        return self.line - len(CUE_FIELDS)

    @property
    def key(self) -> str:
        """The field the cursor is on, "" for none."""
        if self.field is not None:
            return ACT_FIELDS[self.field]
        return CUE_FIELDS[self.line] if self.line is not None and self.act is None else ""

    def within(self, cues: tuple[Cue, ...]) -> Place:
        """The nearest place that the sheet has."""
        cue = max(min(self.cue, len(cues) - 1), 0)
        if self.line is None or not cues:
            return Place(cue)
        line = max(min(self.line, len(CUE_FIELDS) + len(cues[cue].act) - 1), 0)
        if line != self.line or self.field is None:
            return Place(cue, line)
        return Place(cue, line, max(min(self.field, len(ACT_FIELDS) - 1), 0))

    def moved(self, by: int, cues: tuple[Cue, ...]) -> Place:
        """`by` rows on among its like: cues, lines or fields."""
        if self.field is not None:
            field = max(min(self.field + by, len(ACT_FIELDS) - 1), 0)
            return replace(self, field=field)
        if self.line is not None:
            return replace(self, line=self.line + by).within(cues)
        return Place(self.cue + by).within(cues)

    def inside(self, cues: tuple[Cue, ...]) -> Place:
        """One step in: from a cue to its first act, or its title, and from an act to its fields."""
        if not cues or self.key:
            return self
        if self.line is None:
            acts = cues[self.cue].act
            return replace(self, line=len(CUE_FIELDS) if acts else CUE_FIELDS.index("title"))
        return replace(self, field=0)

    def outside(self) -> Place:
        """One step out."""
        return Place(self.cue, self.line if self.field is not None else None)

    def at_act(self, act: int, key: str = "") -> Place:
        """On act `act` of the same cue, or on a field of it."""
        return Place(self.cue, len(CUE_FIELDS) + act, ACT_FIELDS.index(key) if key else None)
