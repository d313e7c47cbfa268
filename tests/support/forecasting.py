"""Panels as the forecast has them, and the same as radiators of the independent sums."""

from __future__ import annotations

from typing import Any

import numpy as np
from support.radiation import Medium, Radiator, Rectangle
from support.rigs import PANEL, grid, make_show

from beamctl.show.show import Show

CELSIUS, HUMIDITY_PCT = 20.0, 50.0
AIR = {"temperature_c": CELSIUS, "humidity_pct": HUMIDITY_PCT}
MEDIUM = Medium(CELSIUS, HUMIDITY_PCT)
HZ = 40_000.0


def panel_show(columns: int, rows: int, pitch_mm: float, **more: Any) -> Show:
    """One panel "p" of so many feeds in 20 °C and 50 %, with a beam "a"."""
    house = {"air": AIR} | more.pop("house", {})
    cells = grid(columns, rows, pitch_mm / 1000.0, more.pop("loom", "each"))
    shape = {"columns": columns, "rows": rows, "pitch_mm": pitch_mm}
    return make_show(cells=cells, house=house, **({"grid": shape} | more))


def radiator(show: Show) -> Radiator:
    """The panel once more, from what rig.toml says of it: no roll, all cells alike."""
    spec, cells = show.rig.panel["p"], show.cells["p"]
    pan, tilt = np.deg2rad((spec.pan_deg, spec.tilt_deg))
    right = np.array((np.cos(pan), -np.sin(pan), 0.0))
    out = np.array((np.sin(pan) * np.cos(tilt), np.cos(pan) * np.cos(tilt), np.sin(tilt)))
    up = np.array((-np.sin(pan) * np.sin(tilt), -np.cos(pan) * np.sin(tilt), np.cos(tilt)))
    at_m = np.array(spec.at_m) + cells.at_m[:, :1] * right + cells.at_m[:, 2:] * up
    loss_db = 0.3 * 1.31824  # ISO 9613-1 at 40 kHz, 20 °C, 50 %: the data sheet's 0.3 m of air
    pa = 20e-6 * 10.0 ** ((PANEL["level_db_30cm_10v"] + loss_db) / 20.0) * 0.3
    return Radiator(
        at_m,
        out,
        cells.feed,
        cells.feeds,
        np.ones(len(cells.feed), np.complex128),
        spec.cell_mm / 1000.0,
        pa * spec.volts_at_full_scale / 10.0,
        spec.resonance_hz,
        0.0,
        MEDIUM,
    )


def rectangle(surface: Any) -> Rectangle:
    """A surface of house.toml."""
    sides = (np.array(v) for v in (surface.corner_m, surface.along_m, surface.up_m))
    return Rectangle(*sides, surface.reflection)
