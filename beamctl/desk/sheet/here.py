"""Where the cursor of the Sheet is in the show as edited, and how to ask and edit there."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from beamctl.desk.asking import Asking
from beamctl.desk.link import Draft
from beamctl.desk.sheet.lifted import Lifted
from beamctl.desk.sheet.place import Place
from beamctl.show.sheet import Act, Cue, Sheet
from beamctl.snapshot import CueLevel


@dataclass(frozen=True, slots=True)
class Here:
    """The sheet, which may have no cue yet, and the cursor in it.

    level  what the guard found for the cue
    stand  puts the cursor on a cue, by its reference, and on a place of it; the cue may be one that
           an edit is just making
    hold   takes what is lifted from now on
    """

    draft: Draft
    place: Place
    lifted: Lifted
    level: CueLevel | None
    asking: Asking
    stand: Callable[[str, Place], None]
    hold: Callable[[Lifted], None]

    @property
    def sheet(self) -> Sheet:
        """The sheet as edited."""
        return self.draft.show.sheet

    @property
    def cue(self) -> Cue | None:
        """The cue the cursor is on or in."""
        return self.sheet.cue[self.place.cue] if self.sheet.cue else None

    @property
    def act(self) -> Act | None:
        """The act the cursor is on or in."""
        return self.cue.act[self.place.act] if self.cue and self.place.act is not None else None
