"""Axes of the room and of the panels, angles, and mirror images.

Shapes: a point or direction is (..., 3), metres or unit length. Room axes are x across, y away from
the stage, z up. Panel axes are right, out, up, as seen from behind the panel looking out. A panel
with pan, tilt and roll 0 looks along +y with its axes along the room's.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

PARALLEL = 1e-12  # volume of the box of three edges, over their lengths, below which they are flat


class Frame(NamedTuple):
    """A panel's place in the room: origin in metres and unit axes, each (3,) in room axes."""

    origin_m: NDArray[np.float64]
    right: NDArray[np.float64]
    out: NDArray[np.float64]
    up: NDArray[np.float64]

    @property
    def axes(self) -> NDArray[np.float64]:
        """(3, 3), one panel axis per row: panel components @ axes = room components."""
        return np.stack((self.right, self.out, self.up))


def panel_frame(
    at_m: ArrayLike, pan_deg: float = 0.0, tilt_deg: float = 0.0, roll_deg: float = 0.0
) -> Frame:
    """The frame of a panel that hangs at `at_m` (3,), turned by pan, then tilt, then roll.

    Pan > 0 turns it toward +x, tilt > 0 up, roll > 0 clockwise as seen from behind.
    """
    pan, tilt, roll = np.deg2rad((pan_deg, tilt_deg, roll_deg))
    level = np.array((np.cos(pan), -np.sin(pan), 0.0))
    out = np.array((np.sin(pan) * np.cos(tilt), np.cos(pan) * np.cos(tilt), np.sin(tilt)))
    upright = np.cross(level, out)
    right = np.cos(roll) * level - np.sin(roll) * upright
    up = np.cos(roll) * upright + np.sin(roll) * level
    return Frame(np.array(at_m, dtype=np.float64), right, out, up)


def to_room(frame: Frame, points_m: ArrayLike) -> NDArray[np.float64]:
    """Points (..., 3) in panel axes, metres, as points in room axes."""
    return turn_to_room(frame, points_m) + frame.origin_m


def to_panel(frame: Frame, points_m: ArrayLike) -> NDArray[np.float64]:
    """Points (..., 3) in room axes, metres, as points in panel axes; inverse of `to_room`."""
    return turn_to_panel(frame, np.asarray(points_m, dtype=np.float64) - frame.origin_m)


def turn_to_room(frame: Frame, directions: ArrayLike) -> NDArray[np.float64]:
    """Directions (..., 3) in panel axes as directions in room axes."""
    return np.asarray(directions, dtype=np.float64) @ frame.axes


def turn_to_panel(frame: Frame, directions: ArrayLike) -> NDArray[np.float64]:
    """Directions (..., 3) in room axes as directions in panel axes; inverse of `turn_to_room`."""
    return np.asarray(directions, dtype=np.float64) @ frame.axes.T


def direction(azimuth_deg: ArrayLike, elevation_deg: ArrayLike) -> NDArray[np.float64]:
    """Unit direction (..., 3) in panel axes; azimuth > 0 to the right, elevation > 0 up."""
    az, el = np.deg2rad(azimuth_deg), np.deg2rad(elevation_deg)
    east, north, up = np.broadcast_arrays(
        np.sin(az) * np.cos(el), np.cos(az) * np.cos(el), np.sin(el)
    )
    return np.stack((east, north, up), axis=-1)


def angles_deg(directions: ArrayLike) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Azimuth and elevation (...) in degrees of directions (..., 3) of any length > 0."""
    right, out, up = np.moveaxis(np.asarray(directions, dtype=np.float64), -1, 0)
    azimuth = np.arctan2(right, out)
    elevation = np.arctan2(up, np.hypot(right, out))
    return np.rad2deg(azimuth), np.rad2deg(elevation)


def mirror_point(
    points_m: ArrayLike, corner_m: ArrayLike, along_m: ArrayLike, up_m: ArrayLike
) -> NDArray[np.float64]:
    """Mirror images (..., 3) of points in the plane of the rectangle corner, along, up (metres).

    ValueError when the rectangle has no area.
    """
    normal = _normal(along_m, up_m)
    offset = np.asarray(points_m, dtype=np.float64) - np.asarray(corner_m, dtype=np.float64)
    return np.asarray(points_m) - 2.0 * (offset @ normal)[..., np.newaxis] * normal


def mirror_direction(
    directions: ArrayLike, along_m: ArrayLike, up_m: ArrayLike
) -> NDArray[np.float64]:
    """Mirror images (..., 3) of directions in a plane parallel to along and up."""
    return mirror_point(directions, np.zeros(3), along_m, up_m)


def mirror_frame(frame: Frame, corner_m: ArrayLike, along_m: ArrayLike, up_m: ArrayLike) -> Frame:
    """The frame of a panel's mirror image: left-handed, so that panel axes keep their meaning."""
    return Frame(
        mirror_point(frame.origin_m, corner_m, along_m, up_m),
        mirror_direction(frame.right, along_m, up_m),
        mirror_direction(frame.out, along_m, up_m),
        mirror_direction(frame.up, along_m, up_m),
    )


def meets_rectangle(
    start_m: ArrayLike, end_m: ArrayLike, corner_m: ArrayLike, along_m: ArrayLike, up_m: ArrayLike
) -> bool:
    """True when the segment start-end meets the rectangle, its edges included; all (3,), metres.

    A segment that lies parallel to the rectangle does not meet it.
    """
    start, corner = np.asarray(start_m, dtype=np.float64), np.asarray(corner_m, dtype=np.float64)
    back = start - np.asarray(end_m, dtype=np.float64)
    edges = np.stack((np.asarray(along_m), np.asarray(up_m), back), axis=-1).astype(np.float64)
    lengths = np.linalg.norm(edges, axis=0)
    if abs(np.linalg.det(edges)) <= PARALLEL * np.prod(lengths):
        return False
    parts = np.linalg.solve(edges, start - corner)
    return bool(np.all((parts >= 0.0) & (parts <= 1.0)))


def _normal(along_m: ArrayLike, up_m: ArrayLike) -> NDArray[np.float64]:
    """Unit normal (3,) of the plane of two edges."""
    along, up = np.asarray(along_m, dtype=np.float64), np.asarray(up_m, dtype=np.float64)
    normal = np.cross(along, up)
    area = np.linalg.norm(normal)
    if area <= PARALLEL * np.linalg.norm(along) * np.linalg.norm(up):
        raise ValueError(f"edges {along.tolist()} and {up.tolist()} span no area")
    return normal / area
