"""The order of cue references."""

from __future__ import annotations

import random

import pytest
from hypothesis import given
from hypothesis import strategies as st

from beamctl.show.order import natural_key

COUNTED = ["2", "9", "12", "12.2", "12.25", "12.3", "12.5", "12.5A", "12A", "12B", "13", "100"]


def test_references_sort_as_they_are_counted() -> None:
    mixed = COUNTED.copy()
    random.Random(4).shuffle(mixed)
    assert sorted(mixed, key=natural_key) == COUNTED


@pytest.mark.parametrize(("one", "other"), [("12.50", "12.5"), ("007", "7"), ("12a", "12A")])
def test_spellings_of_one_place_are_equal(one: str, other: str) -> None:
    assert natural_key(one) == natural_key(other)


@given(st.integers(0, 10**6), st.integers(0, 10**6))
def test_whole_numbers_sort_by_value(low: int, high: int) -> None:
    assert (natural_key(str(low)) < natural_key(str(high))) == (low < high)


def test_a_number_of_any_length_has_a_key() -> None:
    assert natural_key("9" * 5000) < natural_key("1" + "0" * 5000)


@pytest.mark.parametrize("text", ["", "A", "12.", "12-5", "1 2"])
def test_what_is_no_reference_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match="no cue reference"):
        natural_key(text)
