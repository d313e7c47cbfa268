"""The big glyphs."""

from __future__ import annotations

import string
from itertools import combinations

import pytest

from beamctl.desk.rows.glyphs import ROWS, SIGNS, draw, width_of


@pytest.mark.parametrize("sign", sorted(SIGNS))
def test_every_glyph_is_a_full_rectangle(sign: str) -> None:
    rows = draw(sign, "#")
    assert len(rows) == ROWS >= 4
    assert {len(row) for row in rows} == {width_of(sign)}
    assert set("".join(rows)) <= {" ", "#"}


def test_everything_a_reading_may_hold_is_drawn() -> None:
    assert set(string.digits + string.ascii_uppercase + ".:-+") <= SIGNS
    assert draw("12a", "#") == draw("12A", "#")


def test_no_two_glyphs_look_alike() -> None:
    looks = {sign: tuple(draw(sign, "#")) for sign in SIGNS}
    assert [pair for pair in combinations(looks, 2) if looks[pair[0]] == looks[pair[1]]] == []


def test_digits_are_equally_wide_so_that_a_running_number_stands_still() -> None:
    assert {width_of(digit) for digit in string.digits} == {width_of("0")}


def test_width_is_the_drawn_width() -> None:
    for text in ("12.5", "TRIPPED", "-12.3", "1:02:03", ""):
        assert {len(row) for row in draw(text, "#")} == {width_of(text)}


def test_an_unknown_sign_is_seen_as_unknown() -> None:
    assert draw("ß", "#") == draw("?", "#")
