"""Frames, angles, and mirror images."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from beamctl.acoustics.geometry import (
    Frame,
    angles_deg,
    direction,
    meets_rectangle,
    mirror_frame,
    mirror_point,
    panel_frame,
    to_panel,
    to_room,
    turn_to_panel,
    turn_to_room,
)

angle = st.floats(-180.0, 180.0)
tilt = st.floats(-90.0, 90.0)
metres = st.floats(-50.0, 50.0)
point = st.tuples(metres, metres, metres)
WALL = ((-6.0, 14.0, 0.0), (12.0, 0.0, 0.0), (0.0, 0.0, 5.0))
SLOPE = ((1.0, 2.0, 3.0), (4.0, -1.0, 0.5), (0.0, 1.0, 2.0))


def test_a_panel_that_hangs_straight_looks_up_the_room() -> None:
    frame = panel_frame((1.0, 2.0, 3.0))
    np.testing.assert_array_equal(frame.axes, np.eye(3))
    np.testing.assert_array_equal(to_room(frame, (1.0, 1.0, 1.0)), (2.0, 3.0, 4.0))


def test_pan_turns_toward_plus_x() -> None:
    frame = panel_frame((0, 0, 0), pan_deg=90.0)
    np.testing.assert_allclose(frame.out, (1, 0, 0), atol=1e-15)
    np.testing.assert_allclose(frame.right, (0, -1, 0), atol=1e-15)
    np.testing.assert_allclose(frame.up, (0, 0, 1), atol=1e-15)


def test_tilt_turns_up() -> None:
    frame = panel_frame((0, 0, 0), tilt_deg=30.0)
    np.testing.assert_allclose(frame.out, (0, np.sqrt(0.75), 0.5), atol=1e-15)
    np.testing.assert_allclose(frame.right, (1, 0, 0), atol=1e-15)
    np.testing.assert_allclose(frame.up, (0, -0.5, np.sqrt(0.75)), atol=1e-15)


def test_roll_is_clockwise_from_behind() -> None:
    frame = panel_frame((0, 0, 0), roll_deg=90.0)
    np.testing.assert_allclose(frame.up, (1, 0, 0), atol=1e-15)
    np.testing.assert_allclose(frame.right, (0, 0, -1), atol=1e-15)
    np.testing.assert_allclose(frame.out, (0, 1, 0), atol=1e-15)


@settings(deadline=None)
@given(point, angle, tilt, angle)
def test_frames_are_right_handed_and_orthonormal(
    at_m: tuple[float, float, float], pan: float, tilt_deg: float, roll: float
) -> None:
    frame = panel_frame(at_m, pan, tilt_deg, roll)
    np.testing.assert_allclose(frame.axes @ frame.axes.T, np.eye(3), atol=1e-14)
    np.testing.assert_allclose(np.cross(frame.right, frame.out), frame.up, atol=1e-14)
    level = panel_frame(at_m, pan, tilt_deg)
    np.testing.assert_allclose(frame.out, level.out, atol=1e-14)  # roll keeps the look


@settings(deadline=None)
@given(point, angle, tilt, angle, point)
def test_to_panel_undoes_to_room(
    at_m: tuple[float, float, float],
    pan: float,
    tilt_deg: float,
    roll: float,
    p: tuple[float, float, float],
) -> None:
    frame = panel_frame(at_m, pan, tilt_deg, roll)
    np.testing.assert_allclose(to_panel(frame, to_room(frame, [p, at_m])), [p, at_m], atol=1e-12)
    np.testing.assert_allclose(turn_to_panel(frame, turn_to_room(frame, p)), p, atol=1e-12)


def test_direction_signs() -> None:
    np.testing.assert_allclose(direction(0.0, 0.0), (0, 1, 0), atol=1e-15)
    np.testing.assert_allclose(direction(30.0, 0.0), (0.5, np.sqrt(0.75), 0), atol=1e-15)
    np.testing.assert_allclose(direction(0.0, 30.0), (0, np.sqrt(0.75), 0.5), atol=1e-15)
    assert direction([0.0, 1.0], [[2.0], [3.0], [4.0]]).shape == (3, 2, 3)


@settings(deadline=None)
@given(st.floats(-179.9, 179.9), st.floats(-89.9, 89.9), st.floats(0.01, 100.0))
def test_angles_undo_direction(azimuth: float, elevation: float, length: float) -> None:
    found = angles_deg(length * direction(azimuth, elevation))
    np.testing.assert_allclose(found, (azimuth, elevation), atol=1e-9)


def test_mirror_in_a_back_wall() -> None:
    np.testing.assert_allclose(mirror_point((1.0, 2.0, 3.0), *WALL), (1.0, 26.0, 3.0), atol=1e-12)
    frame = mirror_frame(panel_frame((0.0, 0.0, 3.0), pan_deg=30.0), *WALL)
    np.testing.assert_allclose(frame.origin_m, (0.0, 28.0, 3.0), atol=1e-12)
    np.testing.assert_allclose(frame.out, (0.5, -np.sqrt(0.75), 0.0), atol=1e-12)
    np.testing.assert_allclose(frame.up, (0.0, 0.0, 1.0), atol=1e-12)


@settings(deadline=None)
@given(point, angle, tilt, angle)
def test_mirroring_twice_changes_nothing(
    at_m: tuple[float, float, float], pan: float, tilt_deg: float, roll: float
) -> None:
    frame = panel_frame(at_m, pan, tilt_deg, roll)
    once = mirror_frame(frame, *SLOPE)
    np.testing.assert_allclose(np.cross(once.right, once.out), -once.up, atol=1e-12)
    for there, back in zip(frame, mirror_frame(once, *SLOPE), strict=True):
        np.testing.assert_allclose(back, there, atol=1e-11)


@settings(deadline=None)
@given(point, point, point)
def test_a_mirror_keeps_distances_and_swaps_sides(
    a: tuple[float, float, float], b: tuple[float, float, float], c: tuple[float, float, float]
) -> None:
    images = mirror_point([a, b], *SLOPE)
    there, here = np.linalg.norm(images[0] - images[1]), np.linalg.norm(np.subtract(a, b))
    assert there == pytest.approx(here, abs=1e-11)
    halfway = (images[0] + a) / 2.0
    normal = np.cross(SLOPE[1], SLOPE[2])
    assert (halfway - SLOPE[0]) @ normal == pytest.approx(0.0, abs=1e-9)
    frame = panel_frame(c, 20.0, 10.0, 5.0)
    in_panel = to_panel(frame, a)
    np.testing.assert_allclose(to_room(mirror_frame(frame, *SLOPE), in_panel), images[0], atol=1e-9)


def test_a_mirror_needs_an_area() -> None:
    with pytest.raises(ValueError, match="span no area"):
        mirror_point((0, 0, 0), (0, 0, 0), (1.0, 2.0, 3.0), (2.0, 4.0, 6.0))
    with pytest.raises(ValueError, match="span no area"):
        mirror_frame(Frame(*np.eye(4, 3)), (0, 0, 0), (1.0, 2.0, 3.0), (0.0, 0.0, 0.0))


@settings(deadline=None)
@given(st.floats(0.01, 0.99), st.floats(0.01, 0.99), st.floats(0.01, 0.99), point)
def test_a_segment_through_the_rectangle_meets_it(
    along: float, up: float, share: float, start: tuple[float, float, float]
) -> None:
    corner, edge, rise = (np.array(v) for v in SLOPE)
    on_it = corner + along * edge + up * rise
    normal = np.cross(edge, rise)
    if abs((start - on_it) @ normal) < 1e-3:
        return
    end = start + (on_it - start) / share
    assert meets_rectangle(start, end, *SLOPE)
    short = start + 0.99 * (on_it - start)
    assert not meets_rectangle(start, short, *SLOPE)
    beside = on_it + 1.0 * edge
    assert not meets_rectangle(start, start + (beside - start) / share, *SLOPE)


def test_a_segment_along_the_wall_does_not_meet_it() -> None:
    assert not meets_rectangle((0.0, 14.0, 1.0), (3.0, 14.0, 1.0), *WALL)
    assert not meets_rectangle((0.0, 13.0, 1.0), (3.0, 13.0, 1.0), *WALL)
    assert meets_rectangle((0.0, 13.0, 1.0), (0.0, 15.0, 1.0), *WALL)
    assert not meets_rectangle((0.0, 13.0, 5.1), (0.0, 15.0, 5.1), *WALL)
