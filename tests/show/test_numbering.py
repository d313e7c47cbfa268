"""References for cues: what is free between two, and runs counted anew."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from beamctl.show.numbering import between, counted
from beamctl.show.order import natural_key
from beamctl.show.sheet import REF_PATTERN


@pytest.mark.parametrize(
    ("low", "high", "free"),
    [
        ("12", "13", "12.5"),
        ("12", "12.5", "12.2"),
        ("12", "12.1", "12.05"),
        ("12.2", "12.3", "12.25"),
        ("12.9", "13", "12.95"),
        ("10", "20", "15"),
        ("12", "12A", "12.5"),
        ("12.5", "12A", "12.7"),
        ("12.5A", "12.6", "12.55"),
        ("12A", "13", "12B"),
        ("12A", "12B", "12AM"),
        ("12z", "13", "12zM"),
        ("1.2.3", "1.2.4", "1.2.35"),
        ("1.2", "1.2.4", "1.2.2"),
        ("", "1", "0"),
        ("", "0.5", "0"),
        ("", "", "1"),
        ("12", "", "13"),
        ("12.5A", "", "13"),
        ("13", "12", "14"),  # neighbours out of order
    ],
)
def test_the_plainest_number_about_half_way_is_free(low: str, high: str, free: str) -> None:
    assert between(low, high, [ref for ref in (low, high) if ref]) == free


def test_a_number_that_counts_as_another_is_not_free() -> None:
    assert between("12", "13", ["12.50"]) == "12M"
    assert between("7", "", ["8", "9", "010"]) == "11"


@pytest.mark.parametrize(("low", "high"), [("", "0"), ("12.5", "12.5.0"), ("12A", "12AA")])
def test_where_there_is_no_room_it_says_so(low: str, high: str) -> None:
    with pytest.raises(ValueError, match="renumber first"):
        between(low, high, [])


refs = st.from_regex(r"[0-9]{1,3}(\.[0-9]{1,2}){0,2}[A-Za-z]{0,2}", fullmatch=True)


@given(st.lists(refs, min_size=2, max_size=6, unique_by=natural_key), st.data())
def test_what_is_free_counts_between_its_neighbours_or_there_is_none(
    some: list[str], data: st.DataObject
) -> None:
    order = sorted(some, key=natural_key)
    at = data.draw(st.integers(0, len(order)))
    low = order[at - 1] if at else ""
    high = order[at] if at < len(order) else ""
    try:
        free = between(low, high, order)
    except ValueError:
        return
    assert REF_PATTERN.fullmatch(free)
    keys = [natural_key(ref) for ref in (*order[:at], free, *order[at:])]
    assert keys == sorted(keys)
    assert len(set(keys)) == len(keys)


def test_runs_are_counted_without_rounding() -> None:
    assert counted("10", "0.1", 12)[-3:] == ["10.9", "11", "11.1"]
    assert counted("100", "10", 2) == ["100", "110"]


@pytest.mark.parametrize(("start", "step"), [("12A", "1"), ("1", "-1"), ("1", "0"), ("", "1")])
def test_only_plain_numbers_count(start: str, step: str) -> None:
    with pytest.raises(ValueError, match=r"expected a number|same number"):
        counted(start, step, 3)
