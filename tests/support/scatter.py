"""Panels drawn at random: every shape, loom and fault that a cell map can state."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from beamctl.acoustics import cells as maps
from beamctl.acoustics.cells import CellMap

PAIR_M = 0.0078  # under a wavelength in every air and for every carrier drawn here


class Drawn(NamedTuple):
    """A panel at random: its cells, the keys of its spec, and its air."""

    label: str
    cells: CellMap
    spec: dict[str, Any]
    air: dict[str, float]


def _shape(rng: np.random.Generator, kind: str, widest_m: float) -> np.ndarray:
    """Positions (N, 3) of a grid, of a hexagon, or of a grid shaken by a tenth of its pitch."""
    pitch_m = float(rng.uniform(0.005, widest_m))
    if kind == "hex":
        return maps.hex_positions(int(rng.integers(3, 6)), pitch_m)
    columns, rows = (int(n) for n in rng.integers(6, 15, 2))
    at_m = maps.grid_positions(columns, rows, pitch_m)
    if kind == "csv":
        at_m[:, [0, 2]] += rng.uniform(-0.1, 0.1, (len(at_m), 2)) * pitch_m
    return at_m


def _own_feeds(rng: np.random.Generator, at_m: np.ndarray, shared: bool) -> np.ndarray:
    """Feed numbers out of order; `shared` feeds take in the cell next to theirs, if one is free."""
    feed = np.full(len(at_m), -1)
    numbers = iter(rng.permutation(len(at_m)))
    for n in rng.permutation(len(at_m)):
        if feed[n] < 0:
            feed[n] = next(numbers)
            apart = np.where(feed < 0, np.linalg.norm(at_m - at_m[n], axis=1), np.inf)
            nearest = int(np.argmin(apart))
            if shared and apart[nearest] < PAIR_M:
                feed[nearest] = feed[n]
    return np.unique(feed, return_inverse=True)[1]


def _faults(rng: np.random.Generator, at_m: np.ndarray, feed: np.ndarray) -> CellMap:
    """Reversed, late, trimmed feeds, and up to a tenth of the cells dead."""
    feeds = int(feed.max()) + 1
    return CellMap(
        at_m=at_m,
        feed=feed,
        polarity=rng.choice([-1.0, 1.0], feeds)[feed],
        phase_deg=rng.uniform(-180.0, 180.0, feeds)[feed],
        dead=rng.random(len(at_m)) < rng.uniform(0.0, 0.1),
        trim_db=rng.uniform(-6.0, 0.0, feeds),
    )


def draw_panel(rng: np.random.Generator, index: int) -> Drawn:
    """Panel number `index`: shapes and looms in turn, everything else at random.

    Carriers are multiples of 400 Hz: 480 samples at 192 kHz hold whole periods.
    """
    kind = ("grid", "hex", "csv")[index % 3]
    loom = ("each", "columns", "rows", "own", "shared")[index // 3 % 5]
    at_m = _shape(rng, kind, 0.0065 if loom == "shared" else 0.0105)
    if kind == "csv" and loom in ("columns", "rows"):
        loom = "own"  # shaken cells share no column
    if loom in ("own", "shared"):
        feed = _own_feeds(rng, at_m, loom == "shared")
    else:
        feed = maps.loom(at_m, loom)
    spec = {
        "at_m": tuple(rng.uniform(-3.0, 3.0, 3).tolist()),
        "pan_deg": float(rng.uniform(-180.0, 180.0)),
        "tilt_deg": float(rng.uniform(-60.0, 30.0)),
        "roll_deg": float(rng.uniform(-180.0, 180.0)),
        "carrier_hz": 400.0 * float(rng.integers(96, 105)),
        "cell_mm": float(rng.uniform(4.0, 10.0)),
        "q": float(rng.uniform(3.0, 40.0)),
        "first_feed": int(rng.integers(1, 9)),
    }
    air = {
        "temperature_c": float(rng.uniform(5.0, 30.0)),
        "humidity_pct": float(rng.uniform(10.0, 95.0)),
        "pressure_kpa": float(rng.uniform(80.0, 102.0)),
    }
    return Drawn(f"{index} {kind} {loom}", _faults(rng, at_m, feed), spec, air)
