"""Room metres and cells of the terminal."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from beamctl.desk.projection import HIGH, MARGIN_M, Projection, X, Y, Z, fitted

METRES = st.floats(-50.0, 50.0)
POINTS = st.lists(st.tuples(METRES, METRES, METRES), min_size=1, max_size=12)
SIZES = st.integers(1, 150)


@given(POINTS, st.sampled_from([(X, Y), (Y, Z)]), SIZES, SIZES)
def test_every_place_is_in_the_picture(points, axes, width: int, height: int) -> None:
    made = fitted(points, *axes, width, height)
    assert all(made.shows(made.cell(point)) for point in points)


@given(POINTS, st.sampled_from([(X, Y), (Y, Z)]), st.integers(4, 60), st.integers(4, 60))
def test_the_middle_of_a_cell_lies_in_it(points, axes, width: int, height: int) -> None:
    made = fitted(points, *axes, width, height)
    for stacked in (1, 2):
        centres = made.points_m(1.7, stacked)
        assert centres.shape == (height, stacked, width, 3)
        for row, column in ((0, 0), (height - 1, width - 1), (height // 2, width // 2)):
            for point in centres[row, :, column]:
                assert made.cell(point) == (column, row)


@given(POINTS, st.sampled_from([(X, Y), (Y, Z)]), SIZES, SIZES)
def test_it_is_true_to_scale(points, axes, width: int, height: int) -> None:
    made = fitted(points, *axes, width, height)
    assert made.row_m == pytest.approx(HIGH * made.column_m)


def test_right_is_right_and_away_from_the_stage_is_up() -> None:
    plan = fitted([(-4.0, 0.0, 1.0), (4.0, 8.0, 1.0)], X, Y, 44, 22)
    near_left, far_right = plan.cell((-4.0, 0.0, 1.0)), plan.cell((4.0, 8.0, 1.0))
    assert near_left[0] < far_right[0]
    assert near_left[1] > far_right[1]


def test_a_section_stands_on_the_floor_with_the_stage_at_the_left() -> None:
    cut = fitted([(0.0, 0.0, 3.0), (0.0, 8.0, 1.2)], Y, Z, 60, 12)
    assert cut.bottom_m == 0.0
    assert cut.cell((0.0, 4.0, 0.0))[1] == cut.height - 1
    assert cut.cell((0.0, 0.0, 3.0))[0] < cut.cell((0.0, 8.0, 1.2))[0]


def test_the_room_fills_the_picture_but_for_its_margin() -> None:
    points = [(-4.0, 0.0, 1.0), (4.0, 2.0, 1.0)]
    made = fitted(points, X, Y, 88, 40)
    assert made.column_m == pytest.approx((8.0 + 2 * MARGIN_M) / 88)
    assert made.cell(points[0])[0] == int(MARGIN_M / made.column_m)


@given(st.tuples(METRES, METRES, METRES), st.tuples(METRES, METRES, METRES))
def test_a_line_has_no_gap_and_stays_in_the_picture(a, b) -> None:
    made = Projection(X, Y, -20.0, -20.0, 0.5, 80, 40)
    cells = made.between(a, b)
    assert all(made.shows(cell) for cell in cells)
    if made.shows(made.cell(a)) and made.shows(made.cell(b)):
        assert {made.cell(a), made.cell(b)} <= set(cells)
        steps = np.abs(np.diff(cells, axis=0))
        assert steps.max(initial=0) <= 1
