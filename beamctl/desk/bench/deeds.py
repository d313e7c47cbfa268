"""What the verbs of the Bench do: they try fields of the act, take the trial, or let it sound."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from beamctl.desk.bench.boxes import SOFTEST_DB, angles_box, height_box, try_box
from beamctl.desk.bench.look import Look
from beamctl.desk.bench.seating import across, along, nearest
from beamctl.desk.bench.trial import Trial
from beamctl.desk.desk import Desk
from beamctl.desk.link import Draft
from beamctl.desk.sheet.boxes import NO_TARGET, TARGET_KEYS, act_box
from beamctl.desk.sheet.changes import fields_edit
from beamctl.desk.verbs import bench as verbs
from beamctl.forecast.acts import after
from beamctl.forecast.sight import aim_angles
from beamctl.show.beamstate import LAWS
from beamctl.show.checks import unknown
from beamctl.show.settled import Settled
from beamctl.show.sheet import Act, Cue
from beamctl.snapshot import Answer

STEPS_DEG = (0.5, 0.1, 5.0)
TRIM_STEP_DB = 0.5
LOUDEST_DB = 0.0
WIDEST_DEG = 80.0
HERE_M = 0.3  # a click this near to a seat or a spot means it
_ROOM = dict.fromkeys(TARGET_KEYS)  # any target in the room; a bounce stays one


@dataclass(frozen=True, slots=True)
class Here:
    """The act under the cursor, as the sheet has it."""

    draft: Draft
    cue: Cue
    number: int

    @property
    def act(self) -> Act:
        """The act itself."""
        return self.cue.act[self.number]


class Deeds:
    """Keeps the trial and how it is looked at.

    taken  version of the draft in which the trial was asked to be written, until another comes
    """

    def __init__(self, desk: Desk) -> None:
        self._desk = desk
        self.trial = Trial()
        self.step_deg = STEPS_DEG[0]
        self.section = False
        self.height_m: float | None = None
        self.taken: int | None = None

    def do(self, verb: str, here: Here, look: Look | None) -> None:
        """Do a verb; what goes by where the beam points now waits until that is known."""
        if (simple := self._simple().get(verb)) is not None:
            simple(here)
        elif look is None:
            self._desk.tell("One moment: where the beam points is being worked out")
        elif (aimed := self._aimed().get(verb)) is not None:
            aimed(here, look)

    def tried(self, here: Here) -> Act:
        """The act as it is tried; ValueError says why there can be no such act."""
        return _checked(self.trial, here)

    def point_at(self, here: Here, at_m: tuple[float, float, float]) -> None:
        """Try a place of the room: the seat or the spot that is there, else the point."""
        near = nearest(here.draft.show.house, at_m)
        if near is not None and near.apart_m <= HERE_M:
            self._try(here, {**_ROOM, near.kind: near.name})
        else:
            self._try(here, {**_ROOM, "point_m": [round(value, 2) for value in at_m]})

    # -- which verb does what ------------------------------------------------------------------

    def _simple(self) -> Mapping[str, Callable[[Here], None]]:
        return {
            verbs.STEP.name: lambda here: self._next_step(),
            verbs.ANGLES.name: self._ask_angles,
            verbs.GO_TO.name: lambda here: self._ask(here, "target"),
            verbs.DEPTH.name: lambda here: self._ask(here, "depth"),
            verbs.REACH.name: lambda here: self._ask(here, "reach"),
            verbs.TRIM.name: lambda here: self._ask(here, "trim_db"),
            verbs.OVER.name: lambda here: self._ask(here, "over_s"),
            verbs.SPOT_ON.name: lambda here: self._spot(here, 1),
            verbs.SPOT_BACK.name: lambda here: self._spot(here, -1),
            verbs.VIA.name: self._bounce,
            verbs.TAKE.name: self._take,
            verbs.FORGET.name: lambda here: self.forget(),
            verbs.VIEW.name: lambda here: self._turn_view(),
            verbs.HEIGHT.name: lambda here: self._ask_height(),
            verbs.QUIET.name: lambda here: self._desk.ask("sound-off", beam=here.act.beam),
        }

    def _aimed(self) -> Mapping[str, Callable[[Here, Look], None]]:
        return {
            verbs.LEFT.name: lambda here, look: self._turn(here, look, -1, 0),
            verbs.RIGHT.name: lambda here, look: self._turn(here, look, 1, 0),
            verbs.UP.name: lambda here, look: self._turn(here, look, 0, 1),
            verbs.DOWN.name: lambda here, look: self._turn(here, look, 0, -1),
            verbs.SEAT_ON.name: lambda here, look: self._seat(here, look, along, 1),
            verbs.SEAT_BACK.name: lambda here, look: self._seat(here, look, along, -1),
            verbs.ROW_ON.name: lambda here, look: self._seat(here, look, across, 1),
            verbs.ROW_BACK.name: lambda here, look: self._seat(here, look, across, -1),
            verbs.LAW.name: self._next_law,
            verbs.LOUDER.name: lambda here, look: self._louder(here, look, TRIM_STEP_DB),
            verbs.SOFTER.name: lambda here, look: self._louder(here, look, -TRIM_STEP_DB),
            verbs.TRY.name: self._ask_try,
        }

    # -- aims ----------------------------------------------------------------------------------

    def _turn(self, here: Here, look: Look, right: int, up: int) -> None:
        """One step; straight on in an axis that the loom cannot steer."""
        now = aim_angles(self._state(here, look))
        azimuth, elevation = (
            _within(angle + by * self.step_deg, -WIDEST_DEG, WIDEST_DEG) if steers else 0.0
            for angle, by, steers in zip(now, (right, up), look.sight.steers, strict=True)
        )
        self._try(here, _at_angles(azimuth, elevation))

    def _seat(self, here: Here, look: Look, step: Callable[[Any, str, int], str], by: int) -> None:
        house, act = here.draft.show.house, self.tried(here)
        if not house.seats():
            self._desk.tell("The house has no seat: the House screen (F5) gives it some")
        elif act.seat is not None:
            self._try(here, {**_ROOM, "seat": step(house, act.seat, by)})
        else:
            near = nearest(house, look.sight.landing.way_m[-1], spots=False)
            self._try(here, {**_ROOM, "seat": near.name if near else None})

    def _spot(self, here: Here, by: int) -> None:
        spots = list(here.draft.show.house.spot)
        if not spots:
            self._desk.tell("The house has no spot: the House screen (F5) names some")
            return
        now = self.tried(here).spot
        at = spots.index(now) + by if now in spots else (0 if by > 0 else -1)
        self._try(here, {**_ROOM, "spot": spots[at % len(spots)]})

    def _bounce(self, here: Here) -> None:
        surfaces = list(here.draft.show.house.surface)
        act = self.tried(here)
        if not surfaces:
            self._desk.tell("No surface to bounce off: the House screen (F5) declares them")
        elif act.seat is None and act.spot is None and act.point_m is None:
            self._desk.tell("A bounce needs a seat, a spot or a point in this act: g asks for one")
        else:
            ways = [None, *surfaces]
            self._try(here, {"via": ways[(ways.index(act.via) + 1) % len(ways)]})

    # -- boxes ---------------------------------------------------------------------------------

    def _ask(self, here: Here, key: str) -> None:
        acts = (*here.cue.act[: here.number], self.tried(here), *here.cue.act[here.number + 1 :])
        cue = here.cue.model_copy(update={"act": acts})
        self._desk.open(act_box(key, cue, here.number, here.draft, lambda v: self._why(here, v)))

    def _ask_angles(self, here: Here) -> None:
        self._desk.open(angles_box(lambda *angles: self._why(here, _at_angles(*angles))))

    def _ask_height(self) -> None:
        def take(height_m: float | None) -> None:
            self.height_m = height_m

        self._desk.open(height_box(take))

    def _ask_try(self, here: Here, look: Look) -> None:
        if self.trial:
            self._desk.tell("Sound it now sounds what the sheet has: Enter takes the trial first")
            return
        ref, number = here.cue.ref, here.number

        def take(trim_db: float) -> None:
            self._desk.ask("sound-now", ref=ref, act=number, trim_db=trim_db)

        what = f"{here.act.beam} as act {number + 1} of cue {ref} leaves it"
        self._desk.open(try_box(what, self._state(here, look).trim_db, take))

    # -- the rest ------------------------------------------------------------------------------

    def _next_law(self, here: Here, look: Look) -> None:
        at = LAWS.index(self._state(here, look).law) + 1
        self._try(here, {"law": LAWS[at % len(LAWS)]})

    def _louder(self, here: Here, look: Look, by_db: float) -> None:
        now_db = self._state(here, look).trim_db
        self._try(here, {"trim_db": _within(now_db + by_db, SOFTEST_DB, LOUDEST_DB)})

    def _next_step(self) -> None:
        at = STEPS_DEG.index(self.step_deg) + 1
        self.step_deg = STEPS_DEG[at % len(STEPS_DEG)]
        self._desk.tell(f"The arrows turn by {self.step_deg:g} degrees")

    def _turn_view(self) -> None:
        self.section = not self.section

    def forget(self) -> None:
        """Forget what is tried."""
        self.trial, self.taken = Trial(), None

    def _take(self, here: Here) -> None:
        edit = fields_edit(here.cue, here.number, self.trial.fields) if self.trial else None
        if edit is None:
            self.forget()
            self._desk.tell("Nothing is tried: the act is as the sheet has it")
            return

        def heard(answer: Answer) -> None:
            if answer.done:
                self.taken = here.draft.version
            why = answer.text or answer.reason
            self._desk.tell("Taken" if answer.done else f"Not taken: {why}")

        self._desk.edit(edit, heard)

    def _state(self, here: Here, look: Look) -> Settled:
        """The beam by the newest trial, which may not have been looked at yet."""
        return after(here.draft.show, look.found, self.tried(here))

    def _try(self, here: Here, fields: Mapping[str, Any]) -> None:
        if why := self._why(here, fields):
            self._desk.tell(why)

    def _why(self, here: Here, fields: Mapping[str, Any]) -> str:
        """Try more fields; what keeps the act from being so, or ""."""
        trial = self.trial.tried(fields)
        try:
            _checked(trial, here)
        except ValueError as error:
            return str(error)
        self.trial, self.taken = trial, None
        return ""


def _checked(trial: Trial, here: Here) -> Act:
    """The act as tried, all that it names being there."""
    act, house = trial.of(here.act), here.draft.show.house
    named = (
        ("seat", act.seat, house.seats()),
        ("spot", act.spot, house.spot),
        ("surface", act.via, house.surface),
    )
    for kind, name, known in named:
        if name is not None and name not in known:
            raise ValueError(unknown(kind, name, tuple(known)))
    return act


def _within(value: float, low: float, high: float) -> float:
    """A value to the tenth, held between two."""
    return min(max(round(value, 1) + 0.0, low), high)


def _at_angles(azimuth_deg: float, elevation_deg: float) -> dict[str, Any]:
    return NO_TARGET | {"azimuth_deg": azimuth_deg, "elevation_deg": elevation_deg}
