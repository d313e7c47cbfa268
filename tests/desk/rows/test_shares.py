"""How the rows are shared out."""

from __future__ import annotations

import pytest

from beamctl.desk.rows.shares import plan


@pytest.mark.parametrize("height", range(4, 70))
@pytest.mark.parametrize("panels", [1, 2, 8])
def test_every_row_is_used_and_none_twice(height: int, panels: int) -> None:
    share = plan(height, panels)
    used = share.sheet + share.beams + share.panels + share.wire + 1 + 3 * share.gap
    assert used == height
    assert min(share.sheet, share.beams, share.panels) >= 0


def test_80_by_24_has_room_for_the_work() -> None:
    share = plan(9, 2)
    assert share.sheet >= 5
    assert share.beams >= 2
    assert share.panels >= 1


def test_a_bigger_screen_shows_more_of_everything() -> None:
    small, big = plan(9, 4), plan(25, 4)
    assert big.sheet > small.sheet
    assert big.beams > small.beams
    assert big.panels > small.panels


def test_a_tiny_terminal_asks_for_no_negative_rows() -> None:
    for height in (0, 1):
        share = plan(height, 3)
        assert (share.sheet, share.beams, share.panels) == (0, 0, 0)
