"""Wiring faults put into a fake rig are found from its levels, all of them and nothing else."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from support.fakerig import FakeRig
from support.rigs import grid, make_show

from beamctl.acoustics.cells import CellMap
from beamctl.errors import ShowError
from beamctl.guard.lowdrive import DRIVE_DB, at_microphone, at_seats, from_centre
from beamctl.guard.wiring import (
    Finding,
    Reading,
    cells_at_fault,
    findings,
    over_model_db,
    reference_among,
)
from beamctl.show.show import Show

MIC_M = 1.0
SEEDS = range(12)


def pairs() -> CellMap:
    """Eight feeds of two cells, wired by hand: mixed polarities and phases, one cell known dead."""
    cells = grid(8, 2, loom="columns")
    turned, ahead, dead = cells.polarity.copy(), cells.phase_deg.copy(), cells.dead.copy()
    turned[np.isin(cells.feed, (1, 6))] = -1.0
    ahead[cells.feed == 4] = 40.0
    dead[3] = True
    return cells._replace(polarity=turned, phase_deg=ahead, dead=dead)


RIGS = {
    "64 feeds": grid(),
    "sixteen columns of four": grid(16, 4, loom="columns"),
    "pairs": pairs(),
}
FIRST = 5  # the rig's number of the panel's first feed


def show_of(cells: CellMap, **panel: Any) -> Show:
    return make_show(cells=cells, first_feed=FIRST, tilt_deg=-17.0, **panel)


def judged(
    rig: FakeRig, show: Show, reference: int, seed: int
) -> tuple[set[tuple[int, str, int | None]], float | None]:
    """What is found of a fake rig, as feed from 0, kind and other; and its level over the model."""
    at = at_microphone(show, "p", MIC_M)
    rows = rig.measure(at.phasors, MIC_M, reference, np.random.default_rng(seed))
    readings = [
        Reading(FIRST + feed, None if heard is None else FIRST + heard, alone, together)
        for feed, heard, alone, together in rows
    ]
    expected = {r.feed: float(at.expected_db[r.feed - FIRST]) for r in readings}
    named = reference_among(readings)
    assert named == FIRST + reference
    found = findings(readings, expected, named)
    return {
        (f.feed - FIRST, f.kind, None if f.other is None else f.other - FIRST) for f in found
    }, over_model_db(readings, expected)


def faulty(cells: CellMap, seed: int) -> tuple[FakeRig, list[int], int]:
    """A rig with one dead, one reversed and one swapped pair, those feeds, and a good reference."""
    dead, turned, a, b = np.random.default_rng(seed).permutation(cells.feeds)[:4].tolist()
    rig = FakeRig(cells, dead={dead}, reversed={turned})
    rig.swap(a, b)
    reference = next(f for f in from_centre(cells) if f not in (dead, turned, a, b))
    return rig, [dead, turned, a, b], reference


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("name", RIGS)
def test_one_dead_one_reversed_and_one_swapped_pair_are_found(name: str, seed: int) -> None:
    rig, (dead, turned, a, b), reference = faulty(RIGS[name], seed)
    found, over_db = judged(rig, show_of(RIGS[name]), reference, seed)
    assert found == {
        (dead, "dead", None),
        (turned, "reversed", None),
        (a, "swapped", b),
        (b, "swapped", a),
    }
    assert over_db is not None
    assert abs(over_db) < 1.0


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("name", RIGS)
def test_nothing_is_found_of_a_good_rig(name: str, seed: int) -> None:
    cells = RIGS[name]
    found, over_db = judged(FakeRig(cells), show_of(cells), from_centre(cells)[0], seed)
    assert found == set()
    assert over_db is not None
    assert abs(over_db) < 1.0


@pytest.mark.parametrize("seed", SEEDS)
def test_a_reversed_reference_is_told_from_all_others_reversed(seed: int) -> None:
    cells = grid()
    reference = from_centre(cells)[0]
    other = int(np.random.default_rng(seed).choice([f for f in range(64) if f != reference]))
    rig = FakeRig(cells, reversed={reference, other})
    found, _ = judged(rig, show_of(cells), reference, seed)
    assert found == {(reference, "reversed", None), (other, "reversed", None)}


def test_weak_feeds_are_found_and_told_from_dead_ones() -> None:
    cells = grid()
    rig = FakeRig(cells, gain_db={9: -6.0, 20: -12.0}, reversed={9})
    found, _ = judged(rig, show_of(cells), from_centre(cells)[0], 3)
    assert found == {(9, "weak", None), (9, "reversed", None), (20, "weak", None)}


def test_a_ring_of_three_is_not_called_a_swap() -> None:
    cells = grid()
    rig = FakeRig(cells, plugged={1: 2, 2: 3, 3: 1})
    found, _ = judged(rig, show_of(cells), from_centre(cells)[0], 3)
    assert found == {(1, "moved", 2), (2, "moved", 3), (3, "moved", 1)}


def test_a_rig_that_is_louder_than_its_file_says_so() -> None:
    cells = grid()
    _, over_db = judged(
        FakeRig(cells), show_of(cells, level_db_30cm_10v=111.0), from_centre(cells)[0], 3
    )
    assert over_db == pytest.approx(4.0, abs=0.6)


def test_polarity_is_not_told_by_a_reference_that_is_dead_or_elsewhere() -> None:
    cells = grid()
    with pytest.raises(ShowError, match=r"feed 32, the reference, is \d+ dB under the others"):
        judged(FakeRig(cells, gain_db={27: -30.0}), show_of(cells), 27, 1)
    with pytest.raises(ShowError, match="feed 32, the reference, was heard nowhere"):
        judged(FakeRig(cells, dead={27}), show_of(cells), 27, 1)
    rig = FakeRig(cells)
    rig.swap(27, 3)
    with pytest.raises(ShowError, match="feed 32, the reference, was heard at 8"):
        judged(rig, show_of(cells), 27, 1)


def test_one_reading_alone_must_be_the_reference() -> None:
    some = [Reading(1, 1, 50.0), Reading(2, 2, 50.0, 56.0), Reading(3, 3, 50.0)]
    with pytest.raises(ShowError, match="empty for 2 feeds with a level: 1, 3"):
        reference_among(some)
    with pytest.raises(ShowError, match="empty for 0 feeds"):
        reference_among([Reading(2, 2, 50.0, 56.0)])


def test_marks_by_ear_become_findings() -> None:
    readings = [
        Reading(1, 1),
        Reading(2, None),
        Reading(3, 3, ear="reversed"),
        Reading(4, 4, ear="weak"),
        Reading(5, 6),
        Reading(6, 5),
        Reading(7, 70),  # of another panel
        Reading(8, 8),
    ]
    assert findings(readings, {}, 1) == [
        Finding(2, "dead"),
        Finding(3, "reversed"),
        Finding(4, "weak"),
        Finding(5, "swapped", 6),
        Finding(6, "swapped", 5),
        Finding(7, "moved", 70),
    ]
    assert over_model_db(readings, {}) is None


@pytest.mark.parametrize(
    ("cells", "under_db", "said"),
    [
        (4, 2.5, (1, "dead")),
        (4, 6.0, (1, "reversed")),
        (2, 6.0, (1, "dead")),
        (1, 6.0, None),
        (16, 3.5, (3, "reversed")),
    ],
)
def test_how_many_cells_make_a_feed_weak(
    cells: int, under_db: float, said: tuple[int, str] | None
) -> None:
    assert cells_at_fault(cells, under_db) == said


def test_the_drive_arrives_in_phase_and_is_low() -> None:
    cells = pairs()
    at = at_microphone(show_of(cells), "p", MIC_M)
    rig = FakeRig(cells)
    arrives = [rig.pressure([(f, at.phasors[f])], (0.0, MIC_M, 0.0)) for f in range(cells.feeds)]
    turned = np.angle(np.array(arrives) / arrives[0], deg=True)
    assert np.max(np.abs(turned)) < 5.0  # two formulas for the speed of sound
    np.testing.assert_allclose(np.abs(at.phasors), 10.0 ** (DRIVE_DB / 20.0))
    np.testing.assert_allclose(at.expected_db, 20.0 * np.log10(np.abs(arrives) / 20e-6), atol=0.5)


def test_the_nearest_seat_comes_first_and_stays_far_under_its_cap() -> None:
    house = {
        "block": {
            "stalls": {
                "class": "seats",
                "first_m": (0.0, 6.0, -1.5),
                "rows": ("A", "B"),
                "row_step_m": (0.0, -2.0, 0.0),
                "seats": 1,
                "seat_step_m": (0.5, 0.0, 0.0),
            }
        }
    }
    near, far = at_seats(show_of(grid(), house=house), "p")
    assert (near.listener, far.listener) == ("stalls B1", "stalls A1")
    assert near.cap_db == 100.0
    # one cell from 4.3 m, the head's nearest place counting, and 10 dB for want of a measurement
    by_hand_db = 115.0 - 6.0 - 40.0 - 20.0 * np.log10((4.27 - 0.25) / 0.3) - 1.3 * 3.8 + 10.0
    assert near.alone_db == pytest.approx(by_hand_db, abs=1.5)
    assert near.with_reference_db == pytest.approx(near.alone_db + 6.02, abs=0.01)
    assert far.alone_db < near.alone_db


def test_a_feed_without_a_live_cell_is_not_stepped_through() -> None:
    cells = pairs()
    cells.dead[cells.feed == 5] = True
    assert sorted(from_centre(cells)) == [0, 1, 2, 3, 4, 6, 7]
    at = at_microphone(show_of(cells), "p", MIC_M)
    assert at.phasors[5] == 0.0
    assert at.expected_db[5] == -np.inf
