"""The fixed low drive of a wiring check, and what the field model says it gives.

One feed 40 dB under full scale: a common cell at 5 V then makes about 57 dB at 1 m, which a small
measurement microphone in a narrow band and an ultrasonic detector both find well over their own
noise, and tens of decibels under the published caps at any seat.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.air import Air
from beamctl.acoustics.bands import band_at
from beamctl.acoustics.cells import CellMap
from beamctl.acoustics.geometry import to_room
from beamctl.acoustics.transfer import REFERENCE_PA, transfer
from beamctl.guard.field import Field
from beamctl.show.emission import emitters_of
from beamctl.show.show import Show
from beamctl.show.targets import frame_of

DRIVE_DB = -40.0
TWO_DB = 20.0 * np.log10(2.0)  # two alike feeds in phase over one


class AtMicrophone(NamedTuple):
    """A panel's feeds at a point on its axis.

    phasors      (F,) re full scale: each feed at the low drive, so that all arrive there in phase;
                 0 for a feed without a live cell
    expected_db  (F,) level of each alone, dB re 20 µPa; -inf for a feed without a live cell
    """

    phasors: NDArray[np.complex128]
    expected_db: NDArray[np.float64]


class AtSeat(NamedTuple):
    """What a listener gets of a panel's loudest feed; levels in dB re 20 µPa."""

    listener: str
    alone_db: float
    with_reference_db: float  # two such feeds in phase, the most that ever sounds
    cap_db: float


def drive_of(show: Show, panel: str) -> float:
    """The low drive of one feed, re full scale; never over its cells' rating."""
    return float(min(10.0 ** (DRIVE_DB / 20.0), show.rig.panel[panel].full_drive))


def at_microphone(show: Show, panel: str, mic_m: float) -> AtMicrophone:
    """The panel's feeds, `mic_m` in front of its centre.

    By the model as it stands once the rig is measured, the cells' resonance in it.
    """
    spec = show.rig.panel[panel].model_copy(update={"measured": "now"})
    air = Air(**show.house.air.model_dump())
    point = to_room(frame_of(spec), (0.0, mic_m, 0.0))[np.newaxis]
    emitters = emitters_of(spec, show.cells[panel], air)
    (pressure,) = transfer(point, emitters, air, spec.carrier_hz)
    size = np.abs(pressure)
    live = size > 0.0
    drive = drive_of(show, panel)
    turn = np.divide(pressure.conj(), size, out=np.zeros_like(pressure), where=live)
    level = np.full(len(size), -np.inf)
    level[live] = 20.0 * np.log10(size[live] * drive / REFERENCE_PA)
    return AtMicrophone(drive * turn, level)


def at_seats(show: Show, panel: str) -> list[AtSeat]:
    """Every seat and crew point, the nearest to the panel first, as the guard would judge them.

    Places in the head, first reflections and the panel's margin are in the figures.
    """
    spec, caps = show.rig.panel[panel], show.caps
    field = Field(show)
    if not field.listeners:
        return []
    single = drive_of(show, panel) * np.eye(show.cells[panel].feeds)[:, :, np.newaxis]
    power = field.power_pa2(panel, spec.carrier_hz, single.astype(np.complex128)).max(axis=1)
    level = 10.0 * np.log10(np.maximum(power, 1e-30) / REFERENCE_PA**2) + caps.margin_db[panel]
    band = band_at(spec.carrier_hz)
    found = []
    for listener, alone_db in zip(field.listeners, level, strict=True):
        limits = caps.crew_db if listener.crew else caps.seats_db
        cap_db = min(limits.values()) if band is None else limits[band.nominal_hz]
        found.append(
            AtSeat(listener.name, float(alone_db), float(alone_db + TWO_DB), float(cap_db))
        )
    away = [np.linalg.norm(np.subtract(at.at_m, spec.at_m)) for at in field.listeners]
    return [found[i] for i in np.argsort(away, kind="stable")]


def from_centre(cells: CellMap) -> list[int]:
    """Feeds with a live cell, from 0, those whose live cells lie nearest the centre first."""
    live = [f for f in range(cells.feeds) if np.any(~cells.dead[cells.feed == f])]
    away = {
        f: float(np.linalg.norm(cells.at_m[(cells.feed == f) & ~cells.dead].mean(axis=0)))
        for f in live
    }
    return sorted(live, key=lambda f: (round(away[f], 6), f))
