"""Venues drawn at random: a signed show for the guard, and the same rig as plain radiators."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from support.directsum import absorption_np_m
from support.radiation import Array, Complex, Medium, Radiator, Rectangle
from support.rigs import PANEL, make_show
from support.scatter import draw_panel

from beamctl.acoustics.cells import CellMap
from beamctl.show.limits import Guard
from beamctl.show.rig import Rig
from beamctl.show.show import Show

SEATS = 8
MARGIN = 10.0 ** (10.0 / 20.0)  # by which an unmeasured panel counts louder
RATE_HZ, PERIOD_N = 192_000, 8192
LINE_HZ = RATE_HZ / PERIOD_N  # programmes repeat after a period: all their lines are multiples


@dataclass(frozen=True)
class Venue:
    """What was drawn; panels are named "p0", "p1", and share their carrier or do not.

    margins  (panels,) by which each panel counts louder
    ears_m   (SEATS, 3) in the house's order
    """

    show: Show
    radiators: list[Radiator]
    margins: list[float]
    carriers_hz: list[float]
    surfaces: list[Rectangle]
    ears_m: Array


def draw_venue(rng: np.random.Generator, index: int, panels: int, surfaces: int) -> Venue:
    """Venue number `index`; shapes and looms in turn, everything else at random."""
    medium = Medium(float(rng.uniform(2.0, 30.0)), float(rng.uniform(10.0, 95.0)))
    ears_m = np.array((0.0, 1.0, 0.0)) + rng.uniform((-4.0, 0.0, -2.5), (4.0, 9.0, 1.0), (SEATS, 3))
    walls = [_surface(rng) for _ in range(surfaces)]
    carrier_hz = _carrier(rng)
    specs: dict[str, Any] = {}
    cells, radiators, margins, carriers = {}, [], [], []
    first_feed = 1
    for n in range(panels):
        drawn = draw_panel(rng, index + n)
        if n and rng.random() < 0.5:
            carrier_hz = _carrier(rng)
        measured = "p.csv" if rng.random() < 0.6 else ""
        spec = PANEL | {
            "at_m": tuple(rng.uniform((-2.0, -0.5, -0.5), (2.0, 0.5, 2.0)).tolist()),
            "pan_deg": float(rng.uniform(-35.0, 35.0)),
            "tilt_deg": float(rng.uniform(-30.0, 15.0)),
            "roll_deg": float(rng.uniform(-180.0, 180.0)),
            "carrier_hz": carrier_hz,
            "cell_mm": float(rng.uniform(4.0, 16.0)),
            "resonance_hz": carrier_hz + float(rng.uniform(-500.0, 500.0)),
            "q": float(rng.uniform(3.0, 40.0)),
            "level_db_30cm_10v": float(rng.uniform(108.0, 120.0)),
            "first_feed": first_feed,
            "measured": measured,
        }
        specs[f"p{n}"], cells[f"p{n}"] = spec, drawn.cells
        first_feed += drawn.cells.feeds
        radiators.append(_radiator(spec, drawn.cells, medium))
        margins.append(1.0 if measured else MARGIN)
        carriers.append(carrier_hz)
    guard = {
        "format": 1,
        "seats_db": float(rng.uniform(90.0, 110.0)),
        "signed": {"by": "a venue", "on": "2026-01-01", "digest": "seal"},
    }
    show = replace(
        make_show(house=_house(ears_m, walls, medium)),
        rig=Rig.model_validate({"format": 1, "rate_hz": RATE_HZ, "panel": specs}),
        cells=cells,
        guard=Guard.model_validate(guard),
        seal="seal",
    )
    return Venue(show, radiators, margins, carriers, walls, ears_m)


def draw_phasors(rng: np.random.Generator, venue: Venue, panel: int, hz: Array) -> Complex:
    """(f, feeds) of one beam: at a seat, its image or a place, near or far focus; or any phases."""
    radiator = venue.radiators[panel]
    trims = 10.0 ** (venue.show.cells[f"p{panel}"].trim_db / 20.0)
    kind = rng.random()
    if kind < 0.05:
        return np.tile(np.exp(2j * np.pi * rng.random(radiator.feeds)) * trims, (len(hz), 1))
    aim_m = venue.ears_m[rng.integers(SEATS)] + rng.normal(0.0, 0.2, 3)
    if kind < 0.3 and venue.surfaces:
        aim_m = venue.surfaces[rng.integers(len(venue.surfaces))].mirrored(aim_m)
    elif kind > 0.8:
        aim_m = np.array(rng.uniform((-5.0, 1.0, -3.0), (5.0, 12.0, 2.0)))
    return radiator.phasors(aim_m, bool(rng.random() < 0.4), hz) * trims


def _carrier(rng: np.random.Generator) -> float:
    """From 25 to 60 kHz on a line; half of them near 40 kHz."""
    low, high = (25e3, 60e3) if rng.random() < 0.5 else (39e3, 41e3)
    return float(np.round(rng.uniform(low, high) / LINE_HZ) * LINE_HZ)


def _surface(rng: np.random.Generator) -> Rectangle:
    """A back wall, a side wall, a ceiling or a leaning board; whole or small."""
    turn = rng.normal(0.0, 0.1, 2)
    shapes = (
        ((-6.0, 12.0, -4.0), (12.0, turn[0], 0.0), (0.0, turn[1], 8.0)),
        ((5.0, -1.0, -4.0), (turn[0], 13.0, 0.0), (turn[1], 0.0, 8.0)),
        ((-6.0, -1.0, 4.0), (12.0, 0.0, turn[0]), (0.0, 13.0, turn[1])),
        ((-1.0, 6.0, 2.0), (2.0, turn[0], turn[1]), (0.0, 0.8, 0.8)),
    )
    corner, along, up = (np.array(v) for v in shapes[rng.integers(len(shapes))])
    return Rectangle(corner, along, up, float(rng.uniform(0.3, 1.0)))


def _house(ears_m: Array, walls: list[Rectangle], medium: Medium) -> dict[str, Any]:
    one = {"class": "seats", "rows": ("A",), "row_step_m": (0.0, 1.0, 0.0), "seats": 1}
    one |= {"seat_step_m": (0.5, 0.0, 0.0)}
    return {
        "air": {"temperature_c": medium.celsius, "humidity_pct": medium.humidity_pct},
        "block": {f"e{n}": one | {"first_m": tuple(e.tolist())} for n, e in enumerate(ears_m)},
        "surface": {
            f"s{n}": {
                "corner_m": tuple(wall.corner_m.tolist()),
                "along_m": tuple(wall.along_m.tolist()),
                "up_m": tuple(wall.up_m.tolist()),
                "reflection": wall.reflection,
            }
            for n, wall in enumerate(walls)
        },
    }


def _radiator(spec: dict[str, Any], cells: CellMap, medium: Medium) -> Radiator:
    """A panel as it hangs: turned by pan, tilt and roll, clockwise as seen from behind."""
    pan, tilt, roll = np.deg2rad([spec[f"{turn}_deg"] for turn in ("pan", "tilt", "roll")])
    level = np.array((np.cos(pan), -np.sin(pan), 0.0))
    out = np.array((np.sin(pan) * np.cos(tilt), np.cos(pan) * np.cos(tilt), np.sin(tilt)))
    upright = np.cross(level, out)
    right = np.cos(roll) * level - np.sin(roll) * upright
    up = np.sin(roll) * level + np.cos(roll) * upright
    loss = absorption_np_m(spec["carrier_hz"], medium.celsius, medium.humidity_pct)
    pascals = 20e-6 * 10.0 ** (spec["level_db_30cm_10v"] / 20.0)
    volts = spec["volts_at_full_scale"]
    x_m, _, z_m = cells.at_m.T
    return Radiator(
        cells_m=np.array(spec["at_m"]) + x_m[:, None] * right + z_m[:, None] * up,
        axis=out,
        feed=cells.feed,
        feeds=len(cells.trim_db),
        gain=~cells.dead * cells.polarity * np.exp(1j * np.deg2rad(cells.phase_deg)),
        cell_m=spec["cell_mm"] / 1e3,
        pa_m=float(pascals * 0.3 * volts / 10.0 * np.exp(0.3 * loss)),
        resonance_hz=spec["resonance_hz"],
        q=spec["q"] if spec["measured"] else 0.0,
        medium=medium,
    )
