"""What the Bench's thread works out: one act as it is tried, and the field it makes."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from beamctl.desk.bench.seating import ear_height_m
from beamctl.desk.projection import Projection, X, Y, Z, fitted
from beamctl.forecast.acts import after, before
from beamctl.forecast.fieldmap import FieldMap, level_db
from beamctl.forecast.landing import places_m
from beamctl.forecast.panel import place_of
from beamctl.forecast.sight import Sight, Sights
from beamctl.show.settled import Settled
from beamctl.show.sheet import Act
from beamctl.show.show import Show

STACKED = 2  # points in a cell, one above the other: the louder counts
NO_SLOPE_M = 0.5  # a beam that goes less far away from the stage is cut across, not along
MAPS = 6  # planes whose field is kept

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Question:
    """An act to look at. Two questions are alike when all but the show itself is, which `of` names.

    show      in the air that holds
    of        what the show was made of
    act       number `number` of cue `ref`, as it is tried
    height_m  of the plan; None takes the target's, else that of the ears
    width     cells of the picture, as `height`
    """

    show: Show = field(compare=False)
    of: tuple[object, ...]
    ref: str
    number: int
    act: Act
    section: bool
    height_m: float | None
    width: int
    height: int


@dataclass(frozen=True, slots=True, eq=False)
class Look:
    """What came of a question: the beam before and after the act, and the picture.

    plane      "plan at 1.3 m", or what the section is cut along
    height_m   of a plan
    levels_db  (height, width) of the carrier
    complaint  what the reader would say of the act, "" when it may be taken
    """

    found: Settled
    state: Settled
    sight: Sight
    plane: str
    height_m: float
    projection: Projection
    levels_db: Array
    complaint: str


class Looker:
    """Keeps what does not change from trial to trial."""

    def __init__(self) -> None:
        self._sights: Sights | None = None
        self._found: tuple[tuple[object, ...], Settled] | None = None

    def look(self, question: Question) -> Look:
        """Work out one question; KeyError when the show has no such act."""
        show, act = question.show, question.act
        sights = self._sights_of(show)
        found = self._before(question)
        state = after(show, found, act)
        panel = show.panel_of(act.beam)
        sight = sights.look(act.beam, panel, state)
        across, up = (Y, Z) if question.section else (X, Y)
        size = question.width, question.height
        projection = fitted(places_m(show), across, up, *size)
        plane, cut = _section(sight) if question.section else _plan(question, sight)
        ready = sights.ready(panel)
        drive = ready.drive(place_of(state))
        pressure = self._map(panel, projection, cut).pressure_pa(drive)
        levels = level_db(ready.rest_gain(state.trim_db) * pressure)
        levels = levels.reshape(question.height, STACKED, question.width).max(axis=1)
        return Look(
            found, state, sight, plane, cut[0], projection, levels, sights.complaint(panel, act)
        )

    def _sights_of(self, show: Show) -> Sights:
        if self._sights is None or not _same_room(self._sights.show, show):
            self._sights = sights = Sights(show)

            @lru_cache(maxsize=MAPS)
            def made(panel: str, projection: Projection, cut: tuple[float, float]) -> FieldMap:
                points = projection.points_m(cut[0], STACKED).reshape(-1, 3)
                if projection.up == Z:
                    points[:, X] += cut[1] * points[:, Y]
                return FieldMap(sights.ready(panel), show.house, points)

            self._map = made
        return self._sights

    def _before(self, question: Question) -> Settled:
        key = question.of, question.ref, question.number
        if self._found is None or self._found[0] != key:
            self._found = key, before(question.show, question.ref, question.number)
        return self._found[1]


def _plan(question: Question, sight: Sight) -> tuple[str, tuple[float, float]]:
    """The plane of the plan: its words, and its height."""
    height_m = question.height_m
    if height_m is None:
        own = sight.target_m
        height_m = ear_height_m(question.show.house) if own is None else float(own[2])
    height_m = round(height_m, 2)
    return f"plan at {height_m:g} m", (height_m, 0.0)


def _section(sight: Sight) -> tuple[str, tuple[float, float]]:
    """The upright plane through the panel and where its beam first lands: x at y = 0, and its
    slope."""
    start, end = (np.array(point) for point in sight.landing.way_m[:2])
    aside, away = (end - start)[:2]
    slope = round(float(aside / away), 3) if abs(away) > NO_SLOPE_M else 0.0
    at_m = float(end[0]) if slope == 0.0 else float(start[0] - slope * start[1])
    return "section along the beam", (round(at_m, 2), slope)


def _same_room(one: Show, other: Show) -> bool:
    """Whether beams go alike in both: everything but the cues."""
    alike = all(getattr(one, n) == getattr(other, n) for n in ("rig", "house", "guard", "seal"))
    cells = zip(one.cells.values(), other.cells.values(), strict=False)
    return (
        alike
        and one.sheet.beam == other.sheet.beam
        and all(np.array_equal(a, b) for x, y in cells for a, b in zip(x, y, strict=True))
    )
