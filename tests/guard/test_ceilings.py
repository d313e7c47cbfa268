"""Ceilings of drive for amplitudes at random: what the panels may have keeps every seat's cap."""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any, cast

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from beamctl.guard.ceilings import LEAST, MAJOR, MINOR_RISE, TRACE, Ceilings
from beamctl.guard.estimator import Estimator, Step

STEP_S = 0.0107
BANDS, HOME = 3, 1
LOUD = 1e6  # a converter that gives any drive


def ceilings_of(most: np.ndarray) -> Ceilings:
    """With an estimator of which only the most that a drive of 1 can make is known."""
    known: Any = SimpleNamespace(most=most, home_band=lambda _panel: HOME)
    return Ceilings(cast(Estimator, known), np.full(len(most), LOUD), 4)


class Scene:
    """Panels with random patterns at random seats, each driven somehow."""

    def __init__(self, seed: int, panels: int, loud_db: float) -> None:
        rng = np.random.default_rng(seed)
        seats = int(rng.integers(1, 6))
        self.drive = 10.0 ** rng.uniform(-2.0, 0.5, panels)
        self.most = 10.0 ** rng.uniform(-2.0, 0.3, (panels, seats))
        pattern = self.most[:, np.newaxis] * rng.random((panels, BANDS, seats)) ** 2
        amplitude = pattern * self.drive[:, np.newaxis, np.newaxis]
        self.scale = 10.0 ** (loud_db / 20.0) / amplitude.sum(axis=0).max()
        self.most *= self.scale
        self.amplitude = amplitude * self.scale
        self.allowed = rng.uniform(0.3, 2.0, (BANDS, seats))

    @property
    def step(self) -> Step:
        nothing = np.zeros(len(self.drive))
        return Step(self.amplitude, self.drive, nothing, nothing)


scenes = st.builds(Scene, st.integers(0, 10**6), st.integers(1, 4), st.floats(-20.0, 20.0))


def settled(scene: Scene) -> np.ndarray:
    """Ceilings once the scene has stood for a while."""
    ceilings = ceilings_of(scene.most)
    return [ceilings.next(scene.step, scene.allowed, STEP_S) for _ in range(6)][-1]


@given(scenes)
def test_panels_at_their_ceilings_keep_every_cap(scene: Scene) -> None:
    """All in the patterns seen, at once, up to what they have or may have, whichever is less.

    Only what a panel adds to a seat that it hardly reaches may be more, until it is seen there.
    """
    given_to = settled(scene)
    gains = np.minimum(1.0, given_to / scene.drive)
    total = np.tensordot(gains, scene.amplitude, 1)
    assert np.all(total <= np.sqrt(scene.allowed) * (1.0 + 1e-9) + minors(scene, gains))


def minors(scene: Scene, gains: np.ndarray) -> np.ndarray:
    """What panels below a tenth of a seat's pressure bring there: they are not held for it."""
    total = scene.amplitude.sum(axis=0)
    small = scene.amplitude < MAJOR * total
    return np.asarray((small * scene.amplitude).sum(axis=0))


@given(scenes, st.integers(0, 3))
def test_one_panel_may_rise_to_its_ceiling(scene: Scene, which: int) -> None:
    """Tenfold, the others as they are: it brings no seat that is under its cap over it."""
    panel = which % len(scene.drive)
    total = scene.amplitude.sum(axis=0)
    if np.any(total > np.sqrt(scene.allowed)):
        return
    given_to = settled(scene)
    own = scene.amplitude[panel]
    grown = total - own + own * np.clip(given_to[panel] / scene.drive[panel], 1.0, 1.0 / LEAST)
    traces = np.where(own < TRACE * total, own / LEAST, 0.0)
    assert np.all(grown <= np.sqrt(scene.allowed) * (1.0 + 1e-9) + traces)


@given(scenes)
def test_a_single_panel_in_any_pattern_of_its_least_ceiling(scene: Scene) -> None:
    """What it may have in silence passes no cap in the carrier's band, whatever its pattern."""
    ceilings = ceilings_of(scene.most[:1])
    nothing = np.zeros(1)
    silence = Step(np.zeros_like(scene.amplitude[:1]), nothing, nothing, nothing)
    given_to = ceilings.next(silence, scene.allowed, STEP_S)
    assert np.all(given_to[0] * scene.most[0] <= np.sqrt(scene.allowed[HOME]) * (1.0 + 1e-9))


@given(scenes, st.floats(2.0, 30.0))
def test_a_still_pattern_keeps_its_ceiling_when_its_level_rises(scene: Scene, rise: float) -> None:
    """What is held of a panel alone is what its pattern may have, however loud it comes."""
    for name in ("amplitude", "most"):
        setattr(scene, name, getattr(scene, name)[:1])
    scene.drive = scene.drive[:1]
    ceilings = ceilings_of(scene.most)
    for _ in range(4):
        ceilings.next(scene.step, scene.allowed, STEP_S)
    scene.amplitude = scene.amplitude * rise
    scene.drive = scene.drive * rise
    given_to = ceilings.next(scene.step, scene.allowed, STEP_S)
    reached = scene.amplitude[0] * min(1.0, given_to[0] / scene.drive[0])
    assert np.all(reached <= np.sqrt(scene.allowed) * (1.0 + 1e-9))


def test_a_panel_is_not_held_for_one_that_comes_down_anyway() -> None:
    """A fault in one that, at ten times its level, reaches the other's seat as well."""
    most = np.full((2, 2), 2.0)
    ceilings = ceilings_of(most)
    amplitude = np.zeros((2, BANDS, 2))
    amplitude[0, HOME] = 10.0, 0.4
    amplitude[1, HOME] = 0.0, 0.95
    nothing = np.zeros(2)
    step = Step(amplitude, np.array([5.0, 0.5]), nothing, nothing)
    ceilings.next(step, np.ones((BANDS, 2)), STEP_S)
    assert ceilings.held[0] == 0.1
    assert ceilings.held[1] == 1.0


def test_little_swings_change_no_ceiling() -> None:
    """A voice at a seat far below its cap: swings of 2 dB, for a minute."""
    rng = np.random.default_rng(2)
    ceilings = ceilings_of(np.array([[0.4]]))
    nothing = np.zeros(1)
    given_to = []
    for _ in range(5_600):
        drive = 10.0 ** rng.uniform(-0.1, 0.0, 1)
        amplitude = np.full((1, BANDS, 1), 0.1) * drive
        step = Step(amplitude, drive, nothing, nothing)
        given_to.append(float(ceilings.next(step, np.full((BANDS, 1), 2.0), STEP_S)[0]))
    changes = int(np.count_nonzero(np.diff(given_to)))
    print(f"{changes} changes in a minute")
    assert changes < 20
    assert MINOR_RISE < 2.0 < min(given_to)
