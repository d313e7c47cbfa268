"""The room in signs: seats, crew points, spots, surfaces, panels, and the beams that cross it.

From above, with the stage's edge below, so that right on the screen is right as a panel looks out;
or cut open from the side, with the stage at the left. Every sign differs without colour.
"""

from __future__ import annotations

from collections.abc import Iterable
from itertools import pairwise
from typing import NamedTuple

import numpy as np

from beamctl.acoustics.geometry import direction, turn_to_room
from beamctl.desk.format import BLANK, Role, Row, Span
from beamctl.desk.projection import Projection, X, Y, Z, fitted
from beamctl.desk.rows.canvas import Canvas
from beamctl.forecast.landing import Point, Room, corners_m, places_m
from beamctl.show.show import Show
from beamctl.show.targets import frame_of
from beamctl.snapshot import BeamView

SEAT, CREW, SPOT, SURFACE, BEAM_END = "o", "c", "x", "=", "*"
KEY = f"{SEAT} seat  {CREW} crew  {SPOT} spot  {SURFACE} surface  ^v<> panel  {BEAM_END} beam's end"
LEAST = (18, 5)  # columns and rows; a smaller plan tells nothing


class Mark(NamedTuple):
    """A sign at a place of the room; of marks in one cell the first is drawn."""

    at_m: Point
    sign: str
    role: Role = "text"
    name: str = ""


class Trace(NamedTuple):
    """A beam's way through the room, from corner to corner; without a sign drawn by its slope."""

    way_m: tuple[Point, ...]
    end: str = BEAM_END
    role: Role = "live"
    name: str = ""
    sign: str = ""


def plan_rows(
    show: Show,
    width: int,
    height: int,
    marks: Iterable[Mark] = (),
    traces: Iterable[Trace] = (),
) -> list[Row]:
    """`height` rows of `width` cells: the ground plan, and the stage's edge below.

    marks   stand over everything else: seats signed by their margin, say, in place of plain ones
    traces  beams, as `beam_trace` makes them
    """
    if width < 1 or height < 2:
        return [BLANK] * max(height, 0)
    canvas = Canvas(ground_plan(show, width, height - 1))
    draw_room(canvas, show, marks, traces)
    return [*canvas.rows(), edge_row(canvas.projection)]


def ground_plan(show: Show, width: int, height: int) -> Projection:
    """The projection from above."""
    return fitted(places_m(show), X, Y, width, height)


def section(show: Show, width: int, height: int) -> Projection:
    """The projection from the side: away from the stage to the right, up as it is."""
    return fitted(places_m(show), Y, Z, width, height)


def draw_room(
    canvas: Canvas, show: Show, marks: Iterable[Mark] = (), traces: Iterable[Trace] = ()
) -> None:
    """Put everything on a canvas, what matters most first, since that keeps its cell."""
    for mark in marks:
        canvas.put(*mark)
    for name, panel in show.rig.panel.items():
        canvas.put(panel.at_m, _looks(show, name, canvas.projection), "text", name)
    traces = tuple(traces)
    for trace in traces:
        canvas.put(trace.way_m[-1], trace.end, trace.role, trace.name)
    for name, spot in show.house.spot.items():
        canvas.put(spot.at_m, SPOT, "dim", name)
    for block in show.house.block.values():
        for at_m in block.seat_points().values():
            canvas.put(at_m, CREW if block.class_ == "crew" else SEAT)
    for trace in traces:
        for a, b in pairwise(trace.way_m):
            canvas.line(a, b, trace.sign, trace.role)
    for surface in show.house.surface.values():
        corners = corners_m(surface)
        for a, b in zip(corners, np.roll(corners, -1, axis=0), strict=True):
            canvas.line(a, b, SURFACE)


def edge_row(projection: Projection) -> Row:
    """What lies below the picture: the stage's edge of a plan, the floor of a section."""
    width = projection.width
    if projection.up == Z:
        return (Span(("stage " + " floor ".center(max(width - 6, 0), "-"))[:width]),)
    return (Span(" stage ".center(width, "-")[:width]),)


def beam_trace(show: Show, room: Room, beam: BeamView) -> Trace:
    """The way that a beam's carrier takes now, to whoever it meets first."""
    frame = frame_of(show.rig.panel[beam.panel])
    toward = turn_to_room(frame, direction(*(beam.peak_deg or beam.aim_deg)))
    landing = room.landing(frame.origin_m, toward)
    return Trace(landing.way_m, name=beam.name)


def _looks(show: Show, panel: str, projection: Projection) -> str:
    """The way a panel looks, as one sign."""
    out = frame_of(show.rig.panel[panel]).out
    across, up = out[projection.across], out[projection.up]
    if abs(across) > abs(up):
        return ">" if across > 0.0 else "<"
    return "^" if up >= 0.0 else "v"
