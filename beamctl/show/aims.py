"""Cross checks of aims: whether a panel, as it hangs and is wired, can point where an act asks."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import cKDTree

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.cells import SAME_M, CellMap, steerable
from beamctl.acoustics.geometry import (
    Frame,
    angles_deg,
    direction,
    meets_rectangle,
    mirror_point,
    panel_frame,
    to_panel,
)
from beamctl.show.checks import HOUSE, SHEET, Finding, Parts
from beamctl.show.house import House, Surface
from beamctl.show.rig import PanelSpec
from beamctl.show.sheet import Act

WIDEST_DEG = 80.0  # as far as an act may ask in angles
NEAREST_M = 0.1
SQUARE = 0.02  # cosine of the angle between a surface's edges: within about a degree of square
HALF_POWER = 0.443  # sinc(0.443)² = 1/2: a uniform aperture of L falls to half at sin = 0.443 λ/L


class Throw(NamedTuple):
    """A panel as it hangs: what its loom steers, and how far that is of use.

    steers         azimuth, elevation
    half_width     sine of the angle at half power, for the axes the loom leaves fixed
    lattice        (K, 3) directions in which the second beam may come nearest, panel axes
    widest         component of an aim along `lattice` at which the second beam is as loud
    """

    frame: Frame
    steers: tuple[bool, bool]
    half_width: tuple[float, float]
    lattice: NDArray[np.float64]
    widest: float


def check_aims(parts: Parts) -> Iterator[Finding]:
    """Acts that ask a panel for what it cannot do, and surfaces that are no rectangle."""
    house = parts.house
    if house is None:
        return
    flat = {name: what for name, s in house.surface.items() if (what := _shape(s))}
    for name, what in flat.items():
        yield Finding(HOUSE, ("surface", name), what)
    if parts.sheet is None or parts.rig is None:
        return
    c_m_s = sound_speed_m_s(Air(**house.air.model_dump()))
    throws = {
        name: throw_of(parts.rig.panel[name], cells, c_m_s) for name, cells in parts.cells.items()
    }
    seats = house.seats()
    for i, cue in enumerate(parts.sheet.cue):
        for j, act in enumerate(cue.act):
            beam = parts.sheet.beam.get(act.beam)
            throw = throws.get(beam.panel) if beam else None
            if throw and act.aims and act.via not in flat:
                for key, what, warns in told_of(act, throw, house, seats):
                    where = ("cue", i, "act", j, key)
                    yield Finding(SHEET, where, what, "warning" if warns else "error")


Told = Iterator[tuple[str, str, bool]]  # key, what, and whether it is only a warning
Point = tuple[float, float, float]


def told_of(act: Act, throw: Throw, house: House, seats: dict[str, Point]) -> Told:
    """What one act that aims asks its panel for in vain; `seats` are the house's."""
    if act.azimuth_deg is not None or act.elevation_deg is not None:
        yield from _angles(act, throw)
        return
    key, point = _target(act, house, seats)
    if point is None or (act.via is not None and act.via not in house.surface):
        return  # an unknown name, told elsewhere
    aim_m: NDArray[np.float64] = np.array(point)
    if act.via is not None:
        s = house.surface[act.via]
        aim_m = mirror_point(aim_m, s.corner_m, s.along_m, s.up_m)
        if not meets_rectangle(throw.frame.origin_m, aim_m, s.corner_m, s.along_m, s.up_m):
            yield "via", f'the path by "{act.via}" misses its rectangle', False
            return
    yield from _room(key, to_panel(throw.frame, aim_m), throw)


def _target(act: Act, house: House, seats: dict[str, Point]) -> tuple[str, Point | None]:
    """The key that names the target in the room, and its point in metres."""
    if act.seat is not None:
        return "seat", seats.get(act.seat)
    if act.spot is not None:
        return "spot", house.spot[act.spot].at_m if act.spot in house.spot else None
    return "point_m", act.point_m


def _angles(act: Act, throw: Throw) -> Told:
    asked = {"azimuth_deg": act.azimuth_deg or 0.0, "elevation_deg": act.elevation_deg or 0.0}
    for (key, angle_deg), steers in zip(asked.items(), throw.steers, strict=True):
        if angle_deg and not steers:
            axis = key.removesuffix("_deg")
            yield key, f"{angle_deg:g}, but the loom cannot steer in {axis}: expected 0", False
    key = max(asked, key=lambda k: abs(asked[k]))
    yield from _second_beam(key, direction(*asked.values()), throw)


def _room(key: str, aim_m: NDArray[np.float64], throw: Throw) -> Told:
    """A target at `aim_m` (3,), panel axes."""
    distance_m = float(np.linalg.norm(aim_m))
    if distance_m < NEAREST_M:
        yield key, "the target is the panel itself", False
        return
    azimuth_deg, elevation_deg = (float(angle) for angle in angles_deg(aim_m))
    if max(abs(azimuth_deg), abs(elevation_deg)) > WIDEST_DEG:
        place = f"azimuth {azimuth_deg:.0f}°, elevation {elevation_deg:.0f}° from the panel"
        yield key, f"{place}: behind it or beyond {WIDEST_DEG:.0f}°", False
        return
    aim = aim_m / distance_m
    sines = float(aim[0]), float(aim[2])
    for axis, sine, steers, half in zip(
        ("azimuth", "elevation"), sines, throw.steers, throw.half_width, strict=True
    ):
        if not steers and abs(sine) > half:
            off_deg, half_deg = np.rad2deg(np.arcsin((abs(sine), half)))
            what = f"{off_deg:.1f}° off the panel's axis in {axis}, which its loom cannot steer"
            yield key, f"{what}; its beam is half as strong at {half_deg:.1f}°", False
    yield from _second_beam(key, aim, throw)


def _second_beam(key: str, aim: NDArray[np.float64], throw: Throw) -> Told:
    """Warns where a grating lobe passes the beam itself.

    With unit aim s and lattice vector g (length λ/d), the second beam stands at s - g. Both are
    weighed by the pattern of one feed, which falls away from the axis, so the second one is louder
    when |s - g| < |s|, that is when the part of s along g is over |g|/2.
    """
    steered = aim * (throw.steers[0], 0.0, throw.steers[1])
    part = float(np.max(np.abs(throw.lattice @ steered)))
    if part > throw.widest:
        off_deg, widest_deg = np.rad2deg(np.arcsin((part, throw.widest)))
        what = f"{off_deg:.1f}° of steering: beyond {widest_deg:.1f}° a second beam is louder"
        yield key, f"{what} than this one", True


def throw_of(spec: PanelSpec, cells: CellMap, c_m_s: float) -> Throw:
    """What a panel of these cells can throw at a speed of sound of `c_m_s`."""
    wavelength_m = c_m_s / spec.carrier_hz
    sides_m = np.ptp(cells.at_m[~cells.dead], axis=0) + spec.cell_mm / 1000.0
    lattice, spacing_m = _lattice(spec, cells)
    return Throw(
        frame=panel_frame(spec.at_m, spec.pan_deg, spec.tilt_deg, spec.roll_deg),
        steers=steerable(cells, wavelength_m),
        half_width=tuple(min(1.0, HALF_POWER * wavelength_m / side) for side in sides_m[::2]),
        lattice=lattice,
        widest=min(1.0, wavelength_m / (2.0 * spacing_m)),
    )


def _lattice(spec: PanelSpec, cells: CellMap) -> tuple[NDArray[np.float64], float]:
    """Directions (K, 3) of the lattice vectors g, and the spacing d in |g| = λ/d, metres.

    Full hexagons have rows in three directions, √(3/4) of a pitch apart; everything else is taken
    as columns and rows, as close as its nearest feeds.
    """
    if spec.hex is not None and spec.loom == "each":
        angles = np.deg2rad((30.0, 90.0, 150.0))
        vectors = np.stack((np.cos(angles), np.zeros(3), np.sin(angles)), axis=-1)
        return vectors, spec.hex.pitch_mm / 1000.0 * float(np.sqrt(0.75))
    square = np.array(((1.0, 0.0, 0.0), (0.0, 0.0, 1.0)))
    count = np.bincount(cells.feed)[:, np.newaxis]
    centres = np.stack([np.bincount(cells.feed, along) for along in cells.at_m.T], axis=-1) / count
    if len(centres) < 2:
        return square, SAME_M
    nearest_m, _ = cKDTree(centres).query(centres, k=2)
    return square, max(SAME_M, float(np.min(nearest_m[:, 1])))


def _at_right_angles(surface: Surface) -> bool:
    along, up = np.array(surface.along_m), np.array(surface.up_m)
    return abs(float(along @ up)) <= SQUARE * float(np.linalg.norm(along) * np.linalg.norm(up))


def _shape(surface: Surface) -> str:
    """What keeps a surface from being a rectangle; empty when nothing does."""
    sides = [float(np.linalg.norm(side)) for side in (surface.along_m, surface.up_m)]
    if min(sides) < 0.01:
        return "along_m and up_m must both have a length"
    return "" if _at_right_angles(surface) else "along_m and up_m must be at right angles"
