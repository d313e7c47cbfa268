"""What a new block, spot, surface or panel begins as: values that read without an error."""

from __future__ import annotations

from collections.abc import Callable
from itertools import chain, product
from string import ascii_uppercase
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from beamctl.acoustics.geometry import to_room
from beamctl.show.checks import HOUSE, RIG
from beamctl.show.edits import Edit, Put
from beamctl.show.show import Show
from beamctl.show.targets import frame_of

AHEAD_M = 4.0  # in front of the first panel
SEATED_M, STANDING_M = 1.2, 1.6  # ear heights
SEAT_STEP_M, ROW_STEP_M = 0.55, 0.9
ROWS, SEATS = 3, 6
BEYOND_M = 2.0  # from the last seat to a new wall
WALL_M = (10.0, 4.0)  # across, up
APART_M = 0.3  # between the edges of neighbouring panels

Begin = Callable[[Show], dict[str, Any]]


def begun(kind: str, name: str, show: Show) -> Edit:
    """The edit that adds a table of a kind in KINDS."""
    file, begin = KINDS[kind]
    return Edit(f"new {kind} {name}", (Put(file, (kind, name), begin(show)),))


def _block(show: Show) -> dict[str, Any]:
    """Seats in front of the first panel, or behind those that are there."""
    x_m, y_m = _ahead(show)
    if seats := show.house.seats().values():
        y_m = max(seat[1] for seat in seats) + 2 * ROW_STEP_M
    first_m = (x_m - SEAT_STEP_M * (SEATS - 1) / 2.0, y_m, SEATED_M)
    return {
        "class": "seats",
        "first_m": _plain(first_m),
        "rows": _free_rows(show),
        "row_step_m": [0.0, ROW_STEP_M, 0.0],
        "seats": SEATS,
        "seat_step_m": [SEAT_STEP_M, 0.0, 0.0],
    }


def _spot(show: Show) -> dict[str, Any]:
    """In front of the first panel."""
    return {"at_m": _plain((*_ahead(show), STANDING_M))}


def _surface(show: Show) -> dict[str, Any]:
    """A wall behind everything that can be aimed at."""
    house = show.house
    places = chain(house.seats().values(), (spot.at_m for spot in house.spot.values()))
    x_m, y_m = _ahead(show)
    behind_m = max((place[1] for place in places), default=y_m) + BEYOND_M
    return {
        "corner_m": _plain((x_m - WALL_M[0] / 2.0, behind_m, 0.0)),
        "along_m": [WALL_M[0], 0.0, 0.0],
        "up_m": [0.0, 0.0, WALL_M[1]],
        "reflection": 0.9,
    }


def _panel(show: Show) -> dict[str, Any]:
    """One like the last, to the right of it, on the next feeds that are free."""
    name, last = list(show.rig.panel.items())[-1]
    wide_m = float(np.ptp(show.cells[name].at_m[:, 0])) + last.cell_mm / 1000.0
    beside_m = to_room(frame_of(last), (wide_m + APART_M, 0.0, 0.0))
    table = last.model_dump(mode="json", exclude_unset=True, exclude={"measured"})
    return {**table, "at_m": _plain(beside_m), "first_feed": show.channels + 1}


def _ahead(show: Show) -> tuple[float, float]:
    """Where the first panel looks, AHEAD_M away on the floor: x and y."""
    frame = frame_of(next(iter(show.rig.panel.values())))
    level = frame.out[:2] / max(float(np.linalg.norm(frame.out[:2])), 1e-9)
    x_m, y_m = frame.origin_m[:2] + AHEAD_M * level
    return float(x_m), float(y_m)


def _free_rows(show: Show) -> list[str]:
    """Names of rows that no block has: "A", "B", ..., "AA"."""
    taken = {row for block in show.house.block.values() for row in block.rows}
    names = chain(ascii_uppercase, map("".join, product(ascii_uppercase, repeat=2)))
    return [name for name in names if name not in taken][:ROWS]


def _plain(point_m: ArrayLike) -> list[float]:
    """A point to the centimetre; no minus before a zero."""
    return [round(float(value), 2) + 0.0 for value in np.asarray(point_m)]


KINDS: dict[str, tuple[str, Begin]] = {
    "block": (HOUSE, _block),
    "spot": (HOUSE, _spot),
    "surface": (HOUSE, _surface),
    "panel": (RIG, _panel),
}
