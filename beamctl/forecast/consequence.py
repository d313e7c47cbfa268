"""What a beam at rest means to the people in the room: levels, caps, and what a cap would cost.

The figures at seats are the guard's own, for the resting carrier of this beam alone: head, first
reflections and the margin of an unmeasured rig included. Programme and other beams come on top:
what the guard found for the whole cue has them.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import floor
from typing import NamedTuple, NoReturn

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.bands import band_at
from beamctl.acoustics.transfer import REFERENCE_PA
from beamctl.forecast.panel import air_of
from beamctl.guard.field import Field
from beamctl.guard.loudness import Loudness
from beamctl.guard.points import HEAD_RADIUS_M
from beamctl.guard.travels import Place, Programme, Source, Step
from beamctl.show.show import Show
from beamctl.show.standing import GUARDED

LOWEST_TRIM_DB, HIGHEST_TRIM_DB = -90.0, 0.0
PROGRAMME_PER_DB = 2.0  # the audible sound goes with the square of the ultrasound
LOWEST_PA2 = 1e-24

Array = NDArray[np.float64]


class Seat(NamedTuple):
    """One seat or crew point: what it counts with, and the cap in the carrier's band."""

    name: str
    level_db: float
    cap_db: float

    @property
    def margin_db(self) -> float:
        """What is left to the cap; below 0 over it."""
        return self.cap_db - self.level_db


@dataclass(frozen=True, slots=True)
class Consequence:
    """What a resting beam does to the listeners.

    target        whoever sits where it is aimed, None where nobody is declared
    worst         who is nearest to the cap or farthest over it, None in a house without seats
    held_db       what the guard would hold the beam down by, at least 0
    programme_db  what that costs in programme, at most 0
    trim_fits_db  the highest trim at which the resting beam alone is within every cap
    """

    target: Seat | None
    worst: Seat | None
    held_db: float = 0.0
    programme_db: float = 0.0
    trim_fits_db: float | None = None


class Listeners:
    """The listeners of one show, ready to be asked about many beams."""

    def __init__(self, show: Show) -> None:
        self._show = show
        self._field = Field(show, air_of(show))
        self._loudness = Loudness(show, self._field, _no_programme)
        self._at_m = np.array([who.at_m for who in self._field.listeners]).reshape(-1, 3)

    def consequence(self, beam: str, place: Place, trim_db: float, target_m: Array) -> Consequence:
        """Of a beam that points to `place` at a trim; `target_m` (3,) is where it is aimed."""
        if not len(self._at_m):
            return Consequence(None, None)
        seats = self._seats(beam, place, trim_db)
        worst = min(seats, key=lambda seat: seat.margin_db)
        held_db = max(0.0, -worst.margin_db)
        fits_db = floor(10.0 * (trim_db + worst.margin_db) + 1e-9) / 10.0
        return Consequence(
            self._at(seats, target_m),
            worst,
            held_db,
            -PROGRAMME_PER_DB * held_db,
            min(fits_db, HIGHEST_TRIM_DB) if fits_db >= LOWEST_TRIM_DB else None,
        )

    def _seats(self, beam: str, place: Place, trim_db: float) -> list[Seat]:
        """Everybody, in the order of the house."""
        gain = float(10.0 ** (trim_db / 20.0))
        source = Source(beam, gain, (gain, gain), place, False, ((),))
        band = band_at(self._show.rig.panel[self._show.panel_of(beam)].carrier_hz)
        number = next(n for n, guarded in enumerate(GUARDED) if guarded == band)
        power = self._loudness.power_pa2([Step(0, (source,))])[:, number, 0]
        levels_db = 10.0 * np.log10(np.maximum(power, LOWEST_PA2) / REFERENCE_PA**2)
        caps, hz = self._show.caps, GUARDED[number].nominal_hz
        return [
            Seat(who.name, float(db), (caps.crew_db if who.crew else caps.seats_db)[hz])
            for who, db in zip(self._field.listeners, levels_db, strict=True)
        ]

    def _at(self, seats: list[Seat], target_m: Array) -> Seat | None:
        """Whose head a target lies in."""
        apart_m = np.linalg.norm(self._at_m - target_m, axis=1)
        nearest = int(apart_m.argmin())
        return seats[nearest] if apart_m[nearest] <= HEAD_RADIUS_M else None


def _no_programme(panel: str, programme: Programme) -> NoReturn:
    raise AssertionError(f"a resting beam plays nothing, not {programme.sound} on {panel}")
