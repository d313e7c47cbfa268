"""From seat to seat and from row to row, and what lies nearest to a place in the room."""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple

import numpy as np

from beamctl.show.house import House

Point = tuple[float, float, float]


class Near(NamedTuple):
    """Something that can be aimed at: a seat or a spot by its name, and how far off it is."""

    kind: str  # the act's key: "seat" or "spot"
    name: str
    apart_m: float


def along(house: House, seat: str, by: int) -> str:
    """The seat `by` places on in its row, or the last there is."""
    row = next(row for row in _rows(house) if seat in row)
    names = list(row)
    return names[min(max(names.index(seat) + by, 0), len(names) - 1)]


def across(house: House, seat: str, by: int) -> str:
    """The seat `by` rows on, in the house's order of rows, that is nearest to this one."""
    rows = list(_rows(house))
    here = next(n for n, row in enumerate(rows) if seat in row)
    there = rows[min(max(here + by, 0), len(rows) - 1)]
    return _nearest(there, rows[here][seat])


def nearest(house: House, at_m: Point, spots: bool = True) -> Near | None:
    """The seat or spot nearest to a place as the plan shows it; None in an empty house."""
    places = {("seat", name): point for name, point in house.seats().items()}
    if spots:
        places |= {("spot", name): spot.at_m for name, spot in house.spot.items()}
    if not places:
        return None
    apart = {key: float(np.hypot(x - at_m[0], y - at_m[1])) for key, (x, y, _) in places.items()}
    kind, name = min(apart, key=lambda key: apart[key])
    return Near(kind, name, apart[kind, name])


def ear_height_m(house: House) -> float:
    """The mean height of the ears, else of the spots, else of somebody who sits."""
    at_m = list(house.seats().values()) or [spot.at_m for spot in house.spot.values()]
    return float(np.mean([point[2] for point in at_m])) if at_m else 1.2


def _rows(house: House) -> list[dict[str, Point]]:
    """Seats by name, row by row; a name that stands twice is its first block's."""
    known: set[str] = set()
    rows = []
    for block in house.block.values():
        points = block.seat_points()
        for name in block.rows:
            seats = {f"{name}{n + 1}": points[f"{name}{n + 1}"] for n in range(block.seats)}
            rows.append({seat: at for seat, at in seats.items() if seat not in known})
        known.update(points)
    return [row for row in rows if row]


def _nearest(places: Mapping[str, Point], at_m: Point) -> str:
    """The name of the place nearest to a point."""
    return min(places, key=lambda key: float(np.linalg.norm(np.subtract(places[key], at_m))))
