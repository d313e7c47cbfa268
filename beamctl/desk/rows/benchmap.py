"""The Bench's picture: the carrier's field with the room over it, its edge and its key."""

from __future__ import annotations

from beamctl.desk.bench.look import Look
from beamctl.desk.format import Row, Span, fit
from beamctl.desk.projection import Projection
from beamctl.desk.rows import fieldmap
from beamctl.desk.rows.canvas import Canvas
from beamctl.desk.rows.groundplan import Mark, draw_room, edge_row
from beamctl.show.show import Show

BELOW = 2  # rows under the picture


class RoomMap:
    """Draws pictures of one room; what stands still is put on its canvas once."""

    def __init__(self) -> None:
        self._room: tuple[Show, Projection, Canvas] | None = None

    def rows(self, show: Show, look: Look) -> list[Row]:
        """The picture with BELOW rows under it, as wide as its projection."""
        canvas = Canvas(look.projection)
        for mark in _marks(look):
            canvas.put(*mark)
        canvas.under(self._standing(show, look.projection))
        ground = fieldmap.ground(look.levels_db, look.sight.peak_db)
        rows = canvas.rows(ground, fieldmap.ROLES)
        return [*rows, *_below(look)]

    def _standing(self, show: Show, projection: Projection) -> Canvas:
        if self._room is None or self._room[0] is not show or self._room[1] != projection:
            canvas = Canvas(projection)
            draw_room(canvas, show)
            self._room = show, projection, canvas
        return self._room[2]


def _below(look: Look) -> list[Row]:
    """The edge with the plane's words on it, and what the signs and marks mean."""
    width = look.projection.width
    edge = "".join(span.text for span in edge_row(look.projection))
    plane = f"{look.plane} "
    said = f"{fieldmap.key(look.sight.peak_db)}  {fieldmap.MARKS_KEY}"
    return [fit((Span(plane + edge[len(plane) :]),), width), fit((Span(said),), width)]


def _marks(look: Look) -> list[Mark]:
    sight = look.sight
    marks = []
    if sight.target_m is not None:
        x, y, z = sight.target_m.tolist()
        marks.append(Mark((x, y, z), fieldmap.TARGET, "attention"))
    marks.append(Mark(sight.landing.way_m[-1], fieldmap.PEAK, "attention"))
    ends = [beam.landing.way_m[-1] for beam in sight.seconds]
    return [*marks, *(Mark(end, fieldmap.SECOND, "attention") for end in ends)]
