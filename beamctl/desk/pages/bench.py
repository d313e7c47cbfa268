"""The Bench: one act of a cue, shaped beside the carrier's field that its beam makes."""

from __future__ import annotations

from typing import ClassVar, NamedTuple

from beamctl.desk.bench.deeds import Deeds, Here
from beamctl.desk.bench.look import Look, Looker, Question
from beamctl.desk.bench.painter import Painter
from beamctl.desk.desk import Desk
from beamctl.desk.format import Span, View, beside, fit
from beamctl.desk.link import Draft
from beamctl.desk.pages.page import Page, Rows, filled
from beamctl.desk.projection import X, Y
from beamctl.desk.rows.bench import Bench, figure_rows, short_rows
from beamctl.desk.rows.benchmap import BELOW, RoomMap
from beamctl.desk.rows.guard import status_rows
from beamctl.desk.rows.heading import heading_row
from beamctl.desk.rows.legend import short_legend
from beamctl.desk.verbs import bench as verbs
from beamctl.forecast.panel import in_air
from beamctl.show.house import AirSpec
from beamctl.show.show import Show
from beamctl.snapshot import AirView

WIDE = 100  # columns, from which the figures stand at the right
GAP = 2
FIGURES = 7  # rows of them below the map of a narrower terminal
LEGEND = 8  # rows of the terminal for each of the legend
LEAST_MAP = 4  # rows

Air = tuple[float, float, float]


class Layout(NamedTuple):
    """Cells of the map, and where the figures stand: from cell `at` on, or in `below` rows."""

    map_width: int
    map_height: int
    width: int
    height: int
    at: int = 0
    below: int = 0


class BenchPage(Page):
    """Asks its painter for a look at the act as it is tried, and draws the newest that came."""

    NAME = "bench"
    PARTS: ClassVar = ("bench",)

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self._deeds = Deeds(desk)
        self._painter: Painter[Question, Look] = Painter(Looker().look)
        self._at: tuple[str, int] | None = None  # the act that is tried
        self._aired: tuple[Draft, Air, Show] | None = None
        self._map = RoomMap()
        self._legend: tuple[object, Rows] | None = None
        self._full = 0, 0  # cells of the body without a box over it
        self._asked: Question | None = None
        self._drawn: tuple[object, Rows] | None = None

    # -- drawing -------------------------------------------------------------------------------

    def head(self, view: View, width: int) -> Rows:
        """What stands by and the output; what became of the newest deed, and the mode."""
        ref, number = self._at or ("", 0)
        place = f"cue {ref} act {number + 1}" if ref else ""
        return [*status_rows(view, width), heading_row(view, place, width)]

    def legend(self, view: View | None, width: int) -> Rows:
        """The keys, as many as there is room for."""
        writing = view is not None and view.snapshot.mode != "SHOW"
        key = writing, width, self.size.height
        if self._legend is None or self._legend[0] != key:
            told = self.desk.keymap.legend(self.NAME, writing)
            self._legend = key, short_legend(told, width, max(key[2] // LEGEND, 1))
        return self._legend[1]

    def body(self, view: View, width: int, height: int) -> dict[str, Rows]:
        """Map and figures; they are drawn anew only when what they show has changed."""
        here = self._here(view)
        if isinstance(here, str):
            return {"bench": filled([fit((Span(here),), width)], height)}
        if view.box is None or self._full[0] != width:
            self._full = width, height  # a box covers the picture and does not change it
        layout = _layout(*self._full)
        self._ask(view, here, layout)
        answer = self._painter.answer
        if answer is None or (answer[0].ref, answer[0].number) != (here.cue.ref, here.number):
            why = self._painter.failure or "working out where the beam goes"
            return {"bench": filled([fit((Span(why),), width)], height)}
        bench = self._bench(view, here, *answer)
        key = answer[1], bench, layout, height
        if self._drawn is None or self._drawn[0] != key:
            rows = _drawn(self._map.rows(answer[0].show, answer[1]), bench, layout)
            self._drawn = key, rows[:height] if layout.at else rows[-height:] if height else []
        return {"bench": self._drawn[1]}

    def _bench(self, view: View, here: Here, question: Question, look: Look) -> Bench:
        ref = here.cue.ref
        return Bench(
            here.cue,
            here.number,
            question.act,
            self._deeds.trial,
            look,
            here.draft.show.panel_of(here.act.beam),
            next((found for found in view.cue_levels if found.ref == ref), None),
            view.snapshot.barred.get(ref, ""),
            view.snapshot.trying,
            self._painter.failure or ("working it out" if self._painter.late else ""),
        )

    # -- what is looked at ---------------------------------------------------------------------

    def _here(self, view: View) -> Here | str:
        """The act under the cursor, or what to do to have one."""
        draft, cursor = view.draft, self.desk.cursor
        if draft is None:
            return "waiting for the show"
        cues = {cue.ref: cue for cue in draft.show.sheet.cue}
        if not cues:
            return "The sheet has no cue yet: the Sheet (F3) writes one."
        named = (cursor.ref, view.snapshot.standby, next(iter(cues)))
        cue = cues[next(ref for ref in named if ref in cues)]
        if not cue.act:
            return f"Cue {cue.ref} has no act yet: the Sheet (F3) gives it one."
        here = Here(draft, cue, min(max(cursor.act, 0), len(cue.act) - 1))
        self._keep_trial(here)
        return here

    def _keep_trial(self, here: Here) -> None:
        """A trial belongs to one act, and is over once the sheet has it."""
        deeds, at = self._deeds, (here.cue.ref, here.number)
        if at != self._at or deeds.taken not in (None, here.draft.version):
            if at != self._at and deeds.trial:
                self.desk.tell("What was tried on the other act is forgotten")
            deeds.forget()
        self._at = at
        try:
            deeds.tried(here)
        except ValueError:  # the act became another one meanwhile, and the two do not go together
            deeds.forget()

    def _ask(self, view: View, here: Here, layout: Layout) -> None:
        """Have the act looked at as it is tried, unless that is what was asked for last."""
        air = _readings(view.snapshot.air)
        if self._aired is None or self._aired[0] is not here.draft or self._aired[1] != air:
            self._aired = here.draft, air, _in(here.draft.show, air)
        deeds = self._deeds
        question = Question(
            self._aired[2],
            (here.draft.version, air),
            here.cue.ref,
            here.number,
            deeds.tried(here),
            deeds.section,
            deeds.height_m,
            layout.map_width,
            layout.map_height,
        )
        if question != self._asked:
            self._asked = question
            self._painter.ask(question)

    # -- what is done --------------------------------------------------------------------------

    def do(self, verb: str, view: View) -> None:
        """Try something, or go to another act; what it leads to is asked for at once."""
        if verb in (verbs.ACT_ON.name, verbs.ACT_BACK.name):
            self._walk(view, 1 if verb == verbs.ACT_ON.name else -1)
            return
        here = self._here(view)
        if isinstance(here, str):
            self.desk.tell(here)
            return
        answer = self._painter.answer
        known = answer is not None and (answer[0].ref, answer[0].number) == self._at
        self._deeds.do(verb, here, answer[1] if answer is not None and known else None)
        self._ask(view, here, _layout(*self._full))

    def point(self, part: str, x: int, y: int, view: View) -> None:
        """A click on the plan aims at the place, and at the seat or the spot that is there."""
        here, answer = self._here(view), self._painter.answer
        if isinstance(here, str) or answer is None or answer[0].section:
            return
        projection = answer[1].projection
        if projection.shows((x, y)) and (projection.across, projection.up) == (X, Y):
            at_m = projection.points_m(answer[1].height_m)[y, 0, x].tolist()
            self._deeds.point_at(here, (at_m[0], at_m[1], at_m[2]))

    def _walk(self, view: View, by: int) -> None:
        """To the act before or after, and from the end of a cue to the next that has acts."""
        if view.draft is None:
            return
        acts = [
            (cue.ref, n) for cue in view.draft.show.sheet.cue for n in range(max(len(cue.act), 1))
        ]
        here = self._here(view)
        ref = self.desk.cursor.ref if isinstance(here, str) else here.cue.ref
        number = 0 if isinstance(here, str) else here.number
        at = acts.index((ref, number)) if (ref, number) in acts else 0
        if acts:
            cursor = self.desk.cursor
            cursor.ref, cursor.act = acts[min(max(at + by, 0), len(acts) - 1)]


def _layout(width: int, height: int) -> Layout:
    """At the right of a wide terminal, below the map of a narrow one."""
    if width >= WIDE:
        at = width - width // 3
        return Layout(at - GAP, max(height - BELOW, 1), width, height, at=at)
    below = min(FIGURES, max(height - LEAST_MAP - BELOW, 0))
    return Layout(max(width, 1), max(height - below - BELOW, 1), width, height, below=below)


def _drawn(picture: Rows, bench: Bench, layout: Layout) -> Rows:
    """Map and figures, as many rows as the layout has."""
    width, height = layout.width, layout.height
    if layout.at:
        figures = figure_rows(bench, width - layout.at, height)
        return filled(beside(picture, figures, layout.at, width), height)
    return [*filled(picture, height - layout.below), *short_rows(bench, width, layout.below)]


def _readings(air: AirView) -> Air:
    return air.temperature_c, air.humidity_pct, air.pressure_kpa


def _in(show: Show, air: Air) -> Show:
    temperature_c, humidity_pct, pressure_kpa = air
    return in_air(
        show,
        AirSpec(temperature_c=temperature_c, humidity_pct=humidity_pct, pressure_kpa=pressure_kpa),
    )
