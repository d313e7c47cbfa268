"""Levels of a whole show at its seats, from the sheet and the field model alone."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.geometry import meets_rectangle
from beamctl.acoustics.steering import base_delay_s, cell_delays_s, feed_drive
from beamctl.acoustics.transfer import REFERENCE_PA, image, transfer
from beamctl.show.emission import emitters_of
from beamctl.show.settle import acts_of
from beamctl.show.settled import Settled
from beamctl.show.show import Show
from beamctl.show.targets import Target

STEPS = 25  # places along a travel
MEAN_SQUARE = {  # of the envelope re its rest, for a full tone at depth m
    "dsb": lambda m: 1.0 + m**2 / 2.0,
    "ssb": lambda m: 1.0 + m**2,
    "root": lambda m: 1.0,
    "mam": lambda m: 1.0 + 3.0 * m**4 / 64.0,
}


@dataclass(frozen=True)
class Seat:
    """One ear: its name, kind ("seats" or "crew") and place."""

    name: str
    kind: str
    at_m: tuple[float, float, float]


def listening_points(show: Show) -> list[Seat]:
    """Every seat and crew point of the house."""
    return [
        Seat(name, block.class_, at)
        for block in show.house.block.values()
        for name, at in block.seat_points().items()
    ]


class Field:
    """Pressure of one panel's beams at fixed points, direct and reflected."""

    def __init__(self, show: Show, panel: str, points_m: np.ndarray) -> None:
        self.spec, self.cells = show.rig.panel[panel], show.cells[panel]
        air = Air(**show.house.air.model_dump())
        self.speed = sound_speed_m_s(air)
        emitters = emitters_of(self.spec, self.cells, air)
        self.ways = [transfer(points_m, emitters, air, self.spec.carrier_hz)]
        for surface in show.house.surface.values():
            edges = surface.corner_m, surface.along_m, surface.up_m
            mirrored = image(emitters, *edges, surface.reflection)
            centre = mirrored.at_m.mean(axis=0)
            seen = [meets_rectangle(centre, p, *edges) for p in points_m]
            way = transfer(points_m, mirrored, air, self.spec.carrier_hz)
            self.ways.append(way * np.array(seen)[:, None])

    def rms_pa(self, beam: Settled, target: Target | None) -> np.ndarray:
        """Rms pressure (P,) of one beam at a target, magnitudes added over the ways."""
        unit = np.array(target.unit() if target else (0.0, 1.0, 0.0))
        per_m = 0.0
        if beam.reach == "aim" and target is not None and target.point_m is not None:
            per_m = 1.0 / float(np.linalg.norm(target.point_m))
        elif isinstance(beam.reach, float):
            per_m = 1.0 / beam.reach
        at = self.cells.at_m
        delays = cell_delays_s(at, unit, per_m, self.speed, base_delay_s(at))
        drive = feed_drive(self.cells, delays, self.spec.carrier_hz)
        mean_square = MEAN_SQUARE[beam.law](beam.depth)
        gain = 0.5 * 10.0 ** (beam.trim_db / 20.0) * np.sqrt(mean_square)
        return gain * sum(np.abs(way @ drive) for way in self.ways)


def _targets(before: Settled, after: Settled) -> Iterator[Target | None]:
    """Where a beam is on its way from one state to the next."""
    a, b = before.target, after.target
    yield b
    if a is None or b is None or a == b:
        return
    if a.point_m is None or b.point_m is None:
        yield a
        return
    for u in np.linspace(0.0, 1.0, STEPS):
        point = (1.0 - u) * np.array(a.point_m) + u * np.array(b.point_m)
        x, y, z = point.tolist()
        yield replace(b, point_m=(x, y, z))


def levels_of_show(show: Show, points: list[Seat]) -> Iterator[tuple[str, np.ndarray]]:
    """(cue, level in dB (P,)) at every moment of every cue: each beam at its worst on its way."""
    at_m = np.array([p.at_m for p in points])
    fields = {name: Field(show, name, at_m) for name in show.rig.panel}
    for moment in acts_of(show):
        total = np.zeros(len(points))
        for name, beam in moment.beams.items():
            field = fields[show.panel_of(name)]
            worst = np.zeros(len(points))
            for state in (beam, *moment.leaving.get(name, ())):
                if not state.sound:
                    continue
                for target in _targets(state, beam):
                    loud = max(state.trim_db, beam.trim_db if beam.sound else state.trim_db)
                    worst = np.maximum(worst, field.rms_pa(replace(state, trim_db=loud), target))
            total += worst
        yield moment.ref, 20.0 * np.log10(np.maximum(total, 1e-12) / REFERENCE_PA)
