"""The Sheet: the cues, and the one under the cursor in full, for whoever writes the show."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.asking import Asking
from beamctl.desk.desk import Desk
from beamctl.desk.format import Span, View
from beamctl.desk.keymap import printed
from beamctl.desk.link import Draft
from beamctl.desk.pages.page import Page, Rows, filled, idle_history
from beamctl.desk.registry import EVERYTHING
from beamctl.desk.rows.guard import status_rows
from beamctl.desk.rows.heading import heading_row
from beamctl.desk.rows.parts import legend_rows
from beamctl.desk.rows.sheetcue import Found, Line, cue_lines, top_of
from beamctl.desk.rows.sheetframe import frame
from beamctl.desk.rows.sheetlist import Signs, kept_in, list_rows, no_cue_rows
from beamctl.desk.rows.sheetwords import remarks_of
from beamctl.desk.sheet.changes import change
from beamctl.desk.sheet.compare import ComparePane
from beamctl.desk.sheet.cursor import SheetCursor, cues_of
from beamctl.desk.sheet.deeds import DEEDS
from beamctl.desk.sheet.here import Here
from beamctl.desk.sheet.lifted import Lifted
from beamctl.desk.sheet.place import Place
from beamctl.desk.verbs import sheet as verbs
from beamctl.snapshot import CueLevel

ARROWS = (verbs.UP, verbs.DOWN, verbs.PAGE_UP, verbs.PAGE_DOWN, verbs.FIRST, verbs.LAST)
AT_ONCE = (  # what asks nothing, and so might be done to what the edit before is just changing
    *(verbs.COPY, verbs.SPLIT, verbs.EARLIER, verbs.LATER, verbs.LIFT, verbs.SET_DOWN),
    *(verbs.TAKE_AWAY, verbs.FIT),
)
FAR = 1_000_000  # rows


class SheetPage(Page):
    """Draws, and moves the cursor; what changes the show is in `sheet.deeds`."""

    NAME = "sheet"
    PARTS: ClassVar = ("sheet",)

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self._asking, self._cursor = Asking(desk), SheetCursor(desk.cursor)
        self._lifted, self._compare = Lifted(), ComparePane()
        self._list_top = self._cue_top = 0  # the first rows that show
        self._frame = frame(0, 0, False)
        self._cue_lines: list[Line] = []  # the cue under the cursor, whole
        self._drawn: tuple[object, Rows] | None = None

    # -- what shows ----------------------------------------------------------------------------

    def head(self, view: View, width: int) -> Rows:
        """What stands by, and the sheet in one line."""
        many = len(cues_of(view))
        at = f"cue {self._cursor.where(view).cue + 1} of {many}" if many else "no cue yet"
        return [*status_rows(view, width), heading_row(view, at, width)]

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """Drawn anew only when something that shows has changed."""
        if view.draft is None:
            return {"sheet": filled([(Span("waiting for the show"),)], height)}
        place, seen = self._cursor.where(view), view.snapshot
        self._lifted = self._lifted.kept(view.draft.show.sheet)
        if self._compare.is_open:
            self._compare.follow(view.draft)
        drawn_from = (
            *(view.draft, view.cue_levels, seen.states, seen.standby, seen.barred, seen.mode),
            *(seen.edit.edited, place, self._lifted, self._compare.picture, width, height),
        )
        if self._drawn is None or self._drawn[0] != drawn_from:
            self._drawn = drawn_from, self._rows(view, place, width, height)
        return {"sheet": self._drawn[1]}

    def _rows(self, view: View, place: Place, width: int, height: int) -> Rows:
        cues = cues_of(view)
        if not cues:
            key = printed(self.desk.keymap.keys_of(verbs.NEW_CUE.name))
            return filled(no_cue_rows(width, key), height)
        compares = self._compare.is_open
        self._frame = parts = frame(width, height, place.line is not None or compares)
        listed = self._listed(view, place)
        told = (
            self._compare.rows(parts.cue_width, parts.cue_height)
            if compares
            else self._told(view, place)
        )
        return filled(parts.joined(listed, filled(told, parts.cue_height), width), height)

    def _listed(self, view: View, place: Place) -> Rows:
        """The cues around the cursor."""
        cues, seen, parts = cues_of(view), view.snapshot, self._frame
        margin = 1 if parts.list_height > 2 else 0
        first, last = max(place.cue - margin, 0), min(place.cue + margin, len(cues) - 1)
        self._list_top = kept_in(self._list_top, first, last, parts.list_height)
        signs = Signs(place.cue, self._lifted.cues, seen.edit.edited, seen.mode == "WALK")
        return list_rows(cues, seen, signs, self._list_top, parts.list_width, parts.list_height)

    def _told(self, view: View, place: Place) -> Rows:
        """The cue under the cursor."""
        cue, height = cues_of(view)[place.cue], self._frame.cue_height
        remarks = tuple(remarks_of(view.draft.remarks if view.draft else (), cue.ref))
        found = Found(_level(view, cue.ref), view.snapshot.barred.get(cue.ref, ""), remarks)
        lifted = self._lifted.acts_of(cue.ref)
        self._cue_lines = cue_lines(cue, place, found, lifted, self._frame.cue_width)
        self._cue_top = top_of(self._cue_lines, place, self._cue_top, height)
        return [line.row for line in self._cue_lines[self._cue_top : self._cue_top + height]]

    def legend(self, view: View | None, width: int) -> Rows:
        """Of the keys those that lead somewhere now; help and the palette tell all of them."""
        writing = view is not None and view.snapshot.mode != "SHOW"
        told = self.desk.keymap.legend(self.NAME, writing)
        idle = self._idle(view) | idle_history(view) if view is not None else set()
        return legend_rows([entry for entry in told if entry[1] not in idle], width)

    def _idle(self, view: View) -> set[str]:
        """Titles of the verbs that would lead nowhere."""
        place, edit = self._cursor.where(view), view.snapshot.edit
        leads = {
            verbs.OUT: place.line is not None or self._compare.is_open,
            verbs.SPLIT: bool(place.act),
            verbs.SET_DOWN: self._lifted != Lifted(),
            verbs.FIT: any(level.fits_db is not None for level in view.cue_levels),
            verbs.COMPARE: edit.unsaved or self._compare.is_open,
        }
        return {verb.title for verb in (*ARROWS, *(v for v, does in leads.items() if not does))}

    # -- what is asked for ---------------------------------------------------------------------

    def do(self, verb: str, view: View) -> None:
        """Move, ask the host, or change the show.

        What asks in a box opens it whatever is under way: what is typed next must go into it.
        """
        draft = view.draft
        if draft is None:
            self.desk.tell("One moment: the show is on its way")
            return
        place, cues = self._cursor.where(view), cues_of(view)
        self._cursor.move(view, place)  # the Bench, too, takes what was worked on here
        if self._moves(verb, view, place):
            return
        if self._compare.is_open:  # nobody sees what a deed would be done to
            self.desk.tell(f"{EVERYTHING[verb].title}: close the comparison first")
        elif verb == verbs.STAND_BY.name:
            if cues:
                self.desk.ask("standby", ref=cues[place.cue].ref)
        elif EVERYTHING[verb] in AT_ONCE and self._is_late(view, draft):
            self.desk.tell("One moment: the edit before is being taken up")
        else:
            self._deed(verb, view, draft, place)

    def _is_late(self, view: View, draft: Draft) -> bool:
        """Whether an edit is under way that the draft does not show yet."""
        return self._asking.unanswered > 0 or draft.version != view.snapshot.sheet_version

    def _moves(self, verb: str, view: View, place: Place) -> bool:
        """Do a verb that changes only what shows; False for another."""
        parts, compare = self._frame, self._compare
        rows = parts.list_height if place.line is None and not compare.is_open else parts.cue_height
        by = dict(zip((v.name for v in ARROWS), (-1, 1, -rows, rows, -FAR, FAR), strict=True))
        if verb == verbs.COMPARE.name and not compare.is_open and view.draft:
            compare.follow(view.draft)
        elif compare.is_open and verb in (verbs.COMPARE.name, verbs.OUT.name):
            compare.close()
        elif compare.is_open and verb in by:
            compare.scroll(by[verb], parts.cue_height)
        elif verb in by:
            self._cursor.move(view, place.moved(by[verb], cues_of(view)))
        elif verb == verbs.OUT.name:
            self._cursor.move(view, place.outside())
        elif verb == verbs.IN.name and not place.key:
            self._cursor.move(view, place.inside(cues_of(view)))
        else:
            return False
        return True

    def _deed(self, verb: str, view: View, draft: Draft, place: Place) -> None:
        cues = cues_of(view)
        level = _level(view, cues[place.cue].ref) if cues else None
        stand = self._cursor.stand
        here = Here(draft, place, self._lifted, level, self._asking, stand, self._hold)
        try:
            why = DEEDS.get(verb, change)(here)
        except ValueError as error:
            why = str(error)
        if why:
            self.desk.tell(f"{EVERYTHING[verb].title}: {why}")

    def _hold(self, lifted: Lifted) -> None:
        self._lifted = lifted

    # -- the mouse -----------------------------------------------------------------------------

    def point(self, part: str, x: int, y: int, view: View) -> None:
        """A click puts the cursor there."""
        place = self._cursor.where(view)
        listed, row = self._frame.part_at(x, y)
        if part != "sheet" or self._compare.is_open:
            return
        if listed and self._list_top + row < len(cues_of(view)):
            self._cursor.move(view, Place(self._list_top + row))
        elif not listed and 0 <= row < len(self._cue_lines) - self._cue_top:
            line = self._cue_lines[self._cue_top + row]
            self._cursor.move(view, Place(place.cue, line.line, line.field))

    def scroll(self, by: int, view: View) -> None:
        """The wheel moves the cursor, or the list of differences."""
        self._moves((verbs.DOWN if by > 0 else verbs.UP).name, view, self._cursor.where(view))


def _level(view: View, ref: str) -> CueLevel | None:
    return next((level for level in view.cue_levels if level.ref == ref), None)
