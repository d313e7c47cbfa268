"""Small shows made in memory, for tests."""

from __future__ import annotations

from typing import Any

import numpy as np

from beamctl.acoustics import cells as maps
from beamctl.acoustics.cells import CellMap
from beamctl.show.house import House
from beamctl.show.limits import Guard, Wire
from beamctl.show.rig import Rig
from beamctl.show.sheet import Sheet
from beamctl.show.show import Show, SoundFacts

PANEL: dict[str, Any] = {
    "at_m": (0.0, 0.0, 0.0),
    "grid": {"columns": 8, "rows": 8, "pitch_mm": 10.0},
    "volts_at_full_scale": 5.0,
    "max_volts": 7.0,
    "level_db_30cm_10v": 115.0,
    "cell_mm": 9.0,
    "resonance_hz": 40_000.0,
    "q": 20.0,
}


def grid(columns: int = 8, rows: int = 8, pitch_m: float = 0.01, loom: str = "each") -> CellMap:
    """A grid panel's cells."""
    at = maps.grid_positions(columns, rows, pitch_m)
    return maps.cell_map(at, maps.loom(at, loom))


ROW = {  # far off, so that a show that is not about seats has some
    "class": "seats",
    "first_m": [0.0, 30.0, 1.2],
    "rows": ["Z"],
    "row_step_m": [0.0, 1.0, 0.0],
    "seats": 2,
    "seat_step_m": [0.5, 0.0, 0.0],
}


def make_show(
    beams: tuple[str, ...] = ("a",),
    cues: list[dict[str, Any]] | None = None,
    cells: CellMap | None = None,
    house: dict[str, Any] | None = None,
    rate_hz: int = 192_000,
    sounds: tuple[str, ...] = ("tone",),
    **panel: Any,
) -> Show:
    """A show on one panel "p" with these beams and cues; sounds last one second."""
    spec = PANEL | panel
    rig = Rig.model_validate({"format": 1, "rate_hz": rate_hz, "panel": {"p": spec}})
    sheet = Sheet.model_validate(
        {
            "format": 1,
            "title": "test",
            "beam": {b: {"panel": "p"} for b in beams},
            "cue": cues or [],
        }
    )
    return Show(
        folder="",
        sheet=sheet,
        rig=rig,
        house=House.model_validate({"format": 1, "block": {"row": ROW}} | (house or {})),
        guard=Guard(format=1),
        wire=Wire(format=1),
        cells={"p": cells if cells is not None else grid()},
        sounds={name: SoundFacts("", 48_000, 48_000, 1) for name in sounds},
        digests={},
    )


def analytic_tone(frequency_hz: float, seconds: float, rate_hz: int = 192_000) -> np.ndarray:
    """A prepared programme: (frames, 2) float32 at half the device rate, magnitude 1."""
    t = np.arange(round(seconds * rate_hz / 2)) / (rate_hz / 2)
    turns = np.exp(2j * np.pi * frequency_hz * t)
    return np.stack([turns.real, turns.imag], axis=1).astype(np.float32)


def silence(seconds: float, rate_hz: int = 192_000) -> np.ndarray:
    """A prepared programme of exact zeros."""
    return np.zeros((round(seconds * rate_hz / 2), 2), np.float32)
