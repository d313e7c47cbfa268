"""How a settled beam drives its panel: where it points, and the phasors of its feeds."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.cells import steerable
from beamctl.acoustics.geometry import angles_deg, direction
from beamctl.acoustics.pattern import predicted_peak
from beamctl.acoustics.steering import base_delay_s, cell_delays_s, feed_drive
from beamctl.acoustics.transfer import Emitters
from beamctl.guard.loudness import REST
from beamctl.guard.travels import Place
from beamctl.show.emission import emitters_of
from beamctl.show.house import AirSpec
from beamctl.show.settled import Settled
from beamctl.show.show import Show
from beamctl.show.targets import frame_of

Array = NDArray[np.float64]
Phasors = NDArray[np.complex128]
AHEAD = (0.0, 1.0, 0.0)


class ReadyPanel:
    """One panel of a show, ready to be aimed many times."""

    def __init__(self, show: Show, panel: str) -> None:
        self.name, self.spec, self.cells = panel, show.rig.panel[panel], show.cells[panel]
        self.frame = frame_of(self.spec)
        self.air = air_of(show)
        self.speed_m_s = sound_speed_m_s(self.air)
        self.emitters: Emitters = emitters_of(self.spec, self.cells, self.air)
        self.wavelength_m = self.speed_m_s / self.spec.carrier_hz
        self.steers = steerable(self.cells, self.wavelength_m)

    def drive(self, place: Place) -> Phasors:
        """(F,) carrier phasors of a beam of gain 1, full scales."""
        at_m = self.cells.at_m
        delays = cell_delays_s(
            at_m, np.array(place[:3]), place[3], self.speed_m_s, base_delay_s(at_m)
        )
        return feed_drive(self.cells, delays, self.spec.carrier_hz)

    def peak(self, drive: Phasors, near: Array, per_m: float) -> Array:
        """Unit direction (3,), panel axes, where the carrier peaks nearest to `near` (3,)."""
        hz, range_m = self.spec.carrier_hz, 1.0 / per_m if per_m > 0.0 else None
        return predicted_peak(self.emitters, self.frame, drive, near, self.air, hz, range_m)

    def main_peak(self, drive: Phasors, place: Place) -> Array:
        """Where the beam itself peaks: straight out in an axis that the loom cannot steer."""
        azimuth, elevation = angles_deg(np.array(place[:3]))
        near = direction(azimuth if self.steers[0] else 0.0, elevation if self.steers[1] else 0.0)
        return self.peak(drive, near, place[3])

    def rest_gain(self, trim_db: float) -> float:
        """The resting envelope of one beam alone, re a full-scale sine."""
        gain = float(10.0 ** (trim_db / 20.0))
        return REST * gain * min(1.0, self.spec.full_drive / (REST * gain))

    @property
    def width_per_m(self) -> float:
        """Wavelength over aperture: the beam's width at 1 m, by the panel's longer side."""
        sides_m = np.ptp(self.cells.at_m[~self.cells.dead], axis=0)
        return self.wavelength_m / (float(sides_m.max()) + self.spec.cell_mm / 1000.0)


def air_of(show: Show) -> Air:
    """The air that a show reckons with."""
    return Air(**show.house.air.model_dump())


def in_air(show: Show, air: AirSpec) -> Show:
    """The show in another air than its house names."""
    return replace(show, house=show.house.model_copy(update={"air": air}))


def place_of(state: Settled) -> Place:
    """Unit direction in panel axes and focus in 1/m of a settled beam."""
    x, y, z = AHEAD if state.target is None else state.target.unit()
    if state.reach == "aim":
        point = state.target.point_m if state.target else None
        return x, y, z, 1.0 / float(np.linalg.norm(point)) if point else 0.0
    return x, y, z, 0.0 if state.reach == "far" else 1.0 / state.reach
