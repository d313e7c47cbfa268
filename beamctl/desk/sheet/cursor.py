"""The cursor of the Sheet in the show as it is now; the Bench shares it by cue and act."""

from __future__ import annotations

from dataclasses import replace

from beamctl.desk.desk import Cursor
from beamctl.desk.format import View
from beamctl.desk.sheet.place import Place
from beamctl.show.sheet import Cue


class SheetCursor:
    """Keeps to a cue by its reference, and near to where it was when the cue is gone."""

    def __init__(self, shared: Cursor) -> None:
        self._shared = shared
        self._left = shared.ref, shared.act  # as it was left here
        self._place = Place()

    def where(self, view: View) -> Place:
        """The cursor now; in SHOW it goes with the stand-by."""
        shared, seen, cues = self._shared, view.snapshot, cues_of(view)
        if (shared.ref, shared.act) != self._left:  # somebody else has moved it
            same = shared.ref == self._left[0] and self._place.act is not None
            self._place = self._place.at_act(shared.act) if same else Place(self._place.cue)
            self._left = shared.ref, shared.act
        shows = seen.mode == "SHOW"
        ref = seen.standby if shows or not shared.ref else shared.ref
        at = self._place.cue
        if at >= len(cues) or cues[at].ref != ref:
            at = next((n for n, cue in enumerate(cues) if cue.ref == ref), at)
            self._place = replace(self._place, cue=at)
        return Place(at).within(cues) if shows else self._place.within(cues)

    def stand(self, ref: str, place: Place) -> None:
        """Put it on a cue and a place of it; the cue may be one that an edit is just making."""
        self._place = replace(place, cue=self._place.cue)
        self._left = self._shared.ref, self._shared.act = ref, place.act or 0

    def move(self, view: View, place: Place) -> None:
        """Put it on a place of the sheet as it is now."""
        if cues := cues_of(view):
            self.stand(cues[place.cue].ref, place)


def cues_of(view: View) -> tuple[Cue, ...]:
    """The cues as edited; none while they have not come."""
    return view.draft.show.sheet.cue if view.draft else ()
