"""Patterns seen before give the field's own figures again, and never a lower one."""

from __future__ import annotations

import numpy as np
import pytest
from support.rigs import grid, make_show

from beamctl.guard.field import Field
from beamctl.guard.patterns import MOST, Patterns

HZ = 40e3
STALLS = {
    "class": "seats",
    "first_m": [-2.0, 3.0, -0.5],
    "rows": ["A", "B", "C"],
    "row_step_m": [0.0, 1.0, 0.1],
    "seats": 8,
    "seat_step_m": [0.55, 0.0, 0.0],
}
FIELD = Field(make_show(cells=grid(), house={"block": {"stalls": STALLS}}))
FEEDS = grid().feeds


def random(rng: np.random.Generator, *shape: int) -> np.ndarray:
    return (rng.normal(size=shape) + 1j * rng.normal(size=shape)).astype(np.complex64)


def apart_db(patterns: Patterns, vectors: np.ndarray) -> np.ndarray:
    """By how much it is over the field's own figure, per listener."""
    own = FIELD.power_pa2("p", HZ, vectors[:, np.newaxis])[:, 0]
    return 10.0 * np.log10(patterns.power_pa2("p", HZ, vectors) / own)


@pytest.mark.parametrize("seed", range(4))
def test_standing_beams_however_strong_and_mixed(seed: int) -> None:
    rng = np.random.default_rng(seed)
    patterns, beams = Patterns(FIELD), random(rng, FEEDS, 3)
    for _ in range(40):
        count = int(rng.integers(1, 4))
        vectors = beams @ random(rng, 3, count) * 10.0 ** rng.uniform(-3.0, 0.0)
        db = apart_db(patterns, vectors)
        assert np.all((db > -0.01) & (db < 0.05))


@pytest.mark.parametrize("seed", range(4))
def test_beams_that_move_come_and_go(seed: int) -> None:
    """Wholly new ones, slowly turning ones, some that were there, and next to nothing."""
    rng = np.random.default_rng(10 + seed)
    patterns, beams = Patterns(FIELD), random(rng, FEEDS, 4)
    for step in range(120):
        if step % 7 == 0:
            beams[:, step % 4] = random(rng, FEEDS)
        beams += np.float32(10.0 ** rng.uniform(-5.0, -1.0)) * random(rng, FEEDS, 4)
        db = apart_db(patterns, beams[:, : int(rng.integers(1, 5))])
        assert np.all((db > -0.01) & (db < 0.6))


def test_standing_beams_ask_the_field_once_and_the_set_stays_small() -> None:
    rng = np.random.default_rng(3)
    patterns, beams = Patterns(FIELD), random(rng, FEEDS, 2)
    asked: list[int] = []

    class Counting:
        heard_pa2, most_pa2 = staticmethod(FIELD.heard_pa2), staticmethod(FIELD.most_pa2)

        @staticmethod
        def at_places(panel: str, hz: float, vectors: np.ndarray) -> np.ndarray:
            asked.append(vectors.shape[1])
            return FIELD.at_places(panel, hz, vectors)

    patterns._field = Counting()  # type: ignore[assignment]
    for _ in range(30):
        patterns.power_pa2("p", HZ, beams @ random(rng, 2, 2))
    assert sum(asked) == 2
    for _ in range(30):
        patterns.power_pa2("p", HZ, random(rng, FEEDS, 3))
        basis, _ = patterns._kept["p", HZ]
        assert basis.shape[1] <= MOST
        gram = basis.conj().T @ basis
        np.testing.assert_allclose(gram, np.eye(len(gram)), atol=1e-5)


def test_silence_is_zero() -> None:
    patterns = Patterns(FIELD)
    assert not patterns.power_pa2("p", HZ, np.zeros((FEEDS, 1), np.complex64)).any()
    assert not patterns.power_pa2("p", HZ, np.zeros((FEEDS, 0), np.complex64)).any()
