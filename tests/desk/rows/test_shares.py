"""How the rows are shared out."""

from __future__ import annotations

import pytest

from beamctl.desk.plan import plan
from beamctl.desk.readings import HEIGHT


@pytest.mark.parametrize("height", range(17, 80))
@pytest.mark.parametrize("panels", [1, 2, 8])
def test_every_row_is_used_and_none_twice(height: int, panels: int) -> None:
    share = plan(height - 3, panels)
    used = HEIGHT + share.sheet + share.beams + share.panels + 1 + 1 + 2 + 1 + 3 * share.gap
    assert used == height
    assert min(share.sheet, share.beams, share.panels) >= 0


def test_80_by_24_has_room_for_the_work() -> None:
    share = plan(21, 2)
    assert share.sheet >= 5
    assert share.beams >= 2
    assert share.panels >= 1


def test_a_bigger_screen_shows_more_of_everything() -> None:
    small, big = plan(21, 4), plan(37, 4)
    assert big.sheet > small.sheet
    assert big.beams > small.beams
    assert big.panels > small.panels


def test_a_tiny_terminal_asks_for_no_negative_rows() -> None:
    for height in range(1, 14):
        share = plan(height, 3)
        assert (share.sheet, share.beams, share.panels) == (0, 0, 0)
