"""The carrier's field as signs: how far it is under the level where the beam lands."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from beamctl.desk.format import Role

OVER, OVER_DB = "M", 6.0
BANDS = ((-OVER_DB, OVER), (3.0, "#"), (6.0, "%"), (12.0, "+"), (20.0, ":"), (30.0, "."))
"""dB under the beam's level where it lands, at most → sign; nearer the panel it is louder."""
LEFT_OUT = " "
ROLES: dict[str, Role] = {OVER: "text", "#": "live", "%": "text"}
TARGET, PEAK, SECOND = "@", "X", "2"
MARKS_KEY = f"{TARGET} target  {PEAK} peak  {SECOND} second beam"

_EDGES = np.array([most_db for most_db, _ in BANDS])
_SIGNS = np.array([*(sign for _, sign in BANDS), LEFT_OUT])


def ground(levels_db: NDArray[np.float64], peak_db: float) -> list[str]:
    """A text for every row of levels (height, width), a sign a cell."""
    signs = _SIGNS[np.searchsorted(_EDGES, peak_db - levels_db)]
    return ["".join(row) for row in signs]


def key(peak_db: float) -> str:
    """What the signs mean."""
    said = " ".join(f"{sign}{most_db:g}" for most_db, sign in BANDS[1:])
    return f"{said} dB under {peak_db:.1f}, {OVER}{OVER_DB:g} over"
