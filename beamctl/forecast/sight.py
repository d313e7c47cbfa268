"""One act seen in the room: where its beam points and peaks, what it does there, and what else."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.geometry import angles_deg, mirror_point, to_room, turn_to_room
from beamctl.forecast.consequence import Consequence, Listeners
from beamctl.forecast.fieldmap import FieldMap, level_db
from beamctl.forecast.landing import Landing, Room
from beamctl.forecast.lobes import Lobe, Lobes
from beamctl.forecast.panel import ReadyPanel, place_of
from beamctl.show import aims
from beamctl.show.house import House
from beamctl.show.settled import Settled
from beamctl.show.sheet import Act
from beamctl.show.show import Show

Array = NDArray[np.float64]


class SecondBeam(NamedTuple):
    """A second beam, where it lands, and the carrier's level there."""

    lobe: Lobe
    landing: Landing
    level_db: float


@dataclass(frozen=True, slots=True, eq=False)
class Sight:
    """A settled beam in its room. Angles in degrees, panel axes; points in metres, room axes.

    steers     whether the loom steers in azimuth, and in elevation
    target_m   where it is aimed, None for plain angles
    landing    where its predicted peak goes
    peak_db    the carrier's level where that ends
    focus_db   what its reach adds there to a beam that reaches far
    target_db  the carrier's level at the target, or where plain angles land
    """

    aim_deg: tuple[float, float]
    peak_deg: tuple[float, float]
    steers: tuple[bool, bool]
    target_m: Array | None
    landing: Landing
    peak_db: float
    focus_db: float
    target_db: float
    seconds: tuple[SecondBeam, ...]
    consequence: Consequence


class Sights:
    """Looks at beams of one show; what does not change from aim to aim is worked out once."""

    def __init__(self, show: Show) -> None:
        self.show = show
        self.room = Room(show)
        self._listeners = Listeners(show)
        self._panels: dict[str, tuple[ReadyPanel, Lobes]] = {}
        self._hangs: dict[str, aims.Throw] = {}
        self._seats = show.house.seats()

    def ready(self, panel: str) -> ReadyPanel:
        """The panel, ready to be aimed."""
        return self._ready(panel)[0]

    def look(self, beam: str, panel: str, state: Settled) -> Sight:
        """A settled beam; it counts as sounding whether or not it does."""
        ready, lobes = self._ready(panel)
        place, gain = place_of(state), ready.rest_gain(state.trim_db)
        drive = ready.drive(place)
        first = lobes.first(drive, place)
        landing = self._landing(ready, first)
        seconds = [(lobe, self._landing(ready, lobe)) for lobe in lobes.second(drive, place, first)]
        target_m = target_point(state, ready, self.show.house)
        lands_m = np.array(landing.way_m[-1])
        aimed_m = lands_m if target_m is None else target_m
        ends = [lands_m, aimed_m, *(where.way_m[-1] for _, where in seconds)]
        heard = FieldMap(ready, self.show.house, np.array(ends))
        levels = level_db(gain * heard.pressure_pa(drive))
        far = level_db(gain * heard.pressure_pa(ready.drive((*place[:3], 0.0))))
        return Sight(
            aim_angles(state),
            (first.azimuth_deg, first.elevation_deg),
            ready.steers,
            target_m,
            landing,
            float(levels[0]),
            float(levels[0] - far[0]),
            float(levels[1]),
            tuple(
                SecondBeam(lobe, where, float(db))
                for (lobe, where), db in zip(seconds, levels[2:], strict=True)
            ),
            self._listeners.consequence(beam, place, state.trim_db, aimed_m),
        )

    def complaint(self, panel: str, act: Act) -> str:
        """What keeps a panel from pointing where an act asks, or speaks against it; "" for none."""
        if panel not in self._hangs:
            ready = self.ready(panel)
            self._hangs[panel] = aims.throw_of(ready.spec, ready.cells, ready.speed_m_s)
        if not act.aims:
            return ""
        told = aims.told_of(act, self._hangs[panel], self.show.house, self._seats)
        return next((what for _, what, _ in told), "")

    def _ready(self, panel: str) -> tuple[ReadyPanel, Lobes]:
        if panel not in self._panels:
            ready = ReadyPanel(self.show, panel)
            self._panels[panel] = ready, Lobes(ready)
        return self._panels[panel]

    def _landing(self, ready: ReadyPanel, lobe: Lobe) -> Landing:
        toward = turn_to_room(ready.frame, lobe.unit)
        return self.room.landing(ready.frame.origin_m, toward, ready.width_per_m)


def target_point(state: Settled, ready: ReadyPanel, house: House) -> Array | None:
    """The place in the room (3,) that is aimed at, by whatever way; None for plain angles."""
    target = state.target
    if target is None or target.point_m is None:
        return None
    point = to_room(ready.frame, target.point_m)
    if target.via:
        surface = house.surface[target.via]
        point = mirror_point(point, surface.corner_m, surface.along_m, surface.up_m)
    return point


def aim_angles(state: Settled) -> tuple[float, float]:
    """Azimuth and elevation, degrees, that a settled beam is asked to point to."""
    azimuth, elevation = angles_deg(np.array(place_of(state)[:3]))
    return float(azimuth), float(elevation)
