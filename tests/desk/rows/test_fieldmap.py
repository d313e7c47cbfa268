"""The carrier's field as signs."""

from __future__ import annotations

import numpy as np
import pytest

from beamctl.desk.rows.fieldmap import BANDS, LEFT_OUT, ground, key


@pytest.mark.parametrize(
    ("under_db", "sign"),
    [(-20.0, "M"), (-6.0, "M"), (-5.9, "#"), (0.0, "#"), (3.0, "#"), (3.1, "%"), (6.1, "+"),
     (12.1, ":"), (20.1, "."), (30.0, "."), (30.1, LEFT_OUT), (300.0, LEFT_OUT)],
)  # fmt: skip
def test_signs_by_the_level_under_the_beam_s(under_db: float, sign: str) -> None:
    assert ground(np.array([[90.0 - under_db]]), 90.0) == [sign]


def test_a_row_of_signs_for_every_row_of_levels() -> None:
    levels = np.array([[90.0, 80.0, 65.0], [88.0, 50.0, 96.5]])
    assert ground(levels, 90.0) == ["#+.", "# M"]


def test_the_key_says_the_level_and_every_sign() -> None:
    said = key(87.25)
    assert "dB under 87.2" in said
    assert all(sign in said for _, sign in BANDS)


def test_no_band_looks_like_something_in_the_room() -> None:
    assert not {sign for _, sign in BANDS} & {"o", "c", "x", "=", "^", "v", "<", ">", "*"}
