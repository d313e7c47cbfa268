"""What the designer has lifted off the Sheet, to be set down elsewhere: cues, or acts."""

from __future__ import annotations

from dataclasses import dataclass

from beamctl.show.sheet import Act, Sheet


@dataclass(frozen=True, slots=True)
class Lifted:
    """References of cues, or (reference, number from 0, the act itself); never both."""

    cues: tuple[str, ...] = ()
    acts: tuple[tuple[str, int, Act], ...] = ()

    def with_cue(self, ref: str) -> Lifted:
        """Cue `ref` lifted, or let go of; acts are let go of."""
        if ref in self.cues:
            return Lifted(tuple(other for other in self.cues if other != ref))
        return Lifted((*self.cues, ref))

    def with_act(self, ref: str, number: int, act: Act) -> Lifted:
        """An act lifted, or let go of; cues are let go of."""
        one = ref, number, act
        if one in self.acts:
            return Lifted(acts=tuple(other for other in self.acts if other != one))
        return Lifted(acts=(*self.acts, one))

    def kept(self, sheet: Sheet) -> Lifted:
        """What of it the sheet still has, in the order of the sheet; a changed act is let go of."""
        if not self.cues and not self.acts:
            return self
        refs = {*self.cues, *(ref for ref, _, _ in self.acts)}
        there = [cue for cue in sheet.cue if cue.ref in refs]
        acts = tuple(
            one
            for cue in there
            for one in ((cue.ref, number, act) for number, act in enumerate(cue.act))
            if one in self.acts
        )
        cues = () if self.acts else tuple(cue.ref for cue in there)
        return Lifted(cues, acts)

    def acts_of(self, ref: str) -> tuple[int, ...]:
        """Numbers of the lifted acts of cue `ref`."""
        return tuple(number for cue, number, _ in self.acts if cue == ref)
