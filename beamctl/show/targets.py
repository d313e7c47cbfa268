"""Where an act points: its target in the axes of the panel that throws the beam."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from beamctl.acoustics.geometry import Frame, direction, mirror_point, panel_frame, to_panel
from beamctl.show.house import House
from beamctl.show.rig import PanelSpec
from beamctl.show.sheet import Act

Triple = tuple[float, float, float]


@dataclass(frozen=True, slots=True)
class Target:
    """A point in metres or a unit direction, panel axes (right, out, up), and its words.

    A point that is aimed at by way of the surface `via` is the mirror image of the one meant.
    """

    label: str
    point_m: Triple | None = None
    direction: Triple | None = None
    via: str = ""

    def unit(self) -> Triple:
        """Unit direction to the target."""
        if self.direction is not None:
            return self.direction
        return _triple(np.asarray(self.point_m) / np.linalg.norm(np.asarray(self.point_m)))


def frame_of(panel: PanelSpec) -> Frame:
    """The panel's frame as it hangs."""
    return panel_frame(panel.at_m, panel.pan_deg, panel.tilt_deg, panel.roll_deg)


def target_of(act: Act, house: House, panel: PanelSpec) -> Target:
    """The target an act names; a bounce aims at the mirror image of its point in the surface.

    KeyError for a seat, spot or surface that the house does not have; ValueError when the act
    names no target.
    """
    if act.azimuth_deg is not None or act.elevation_deg is not None:
        angles = direction(act.azimuth_deg or 0.0, act.elevation_deg or 0.0)
        return Target("", direction=_triple(angles))
    label, point = _room_point(act, house)
    if act.via is not None:
        surface = house.surface[act.via]
        label = f"{label} via {act.via}"
        point = _triple(mirror_point(point, surface.corner_m, surface.along_m, surface.up_m))
    return Target(label, _triple(to_panel(frame_of(panel), point)), via=act.via or "")


def _room_point(act: Act, house: House) -> tuple[str, Triple]:
    if act.seat is not None:
        return f"seat {act.seat}", house.seats()[act.seat]
    if act.spot is not None:
        return f"spot {act.spot}", house.spot[act.spot].at_m
    if act.point_m is not None:
        return "point " + " ".join(f"{v:g}" for v in act.point_m), act.point_m
    raise ValueError("the act names no target")


def _triple(vector: object) -> Triple:
    x, y, z = np.asarray(vector, np.float64).tolist()
    return x, y, z
