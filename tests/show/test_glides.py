"""How values move: continuous in value and slope, exact at the ends, the same when compiled."""

from __future__ import annotations

import math
from collections.abc import Callable
from itertools import pairwise

import numba
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from beamctl.show import glides
from beamctl.show.beamstate import EASE_S, MIN_GLIDE_S, BeamState
from beamctl.show.records import Record

RATE_HZ = 192_000
SHORTEST_N = round(MIN_GLIDE_S * RATE_HZ)

powers = st.floats(0.0, 1.0)
lengths = st.integers(SHORTEST_N, 5 * RATE_HZ)
angles = st.floats(-1.2, 1.2)
directions = st.builds(
    lambda az, el: (
        math.sin(az) * math.cos(el),
        math.cos(az) * math.cos(el),
        math.sin(el),
    ),
    angles,
    angles,
)
points = st.builds(
    lambda d, r: tuple(r * v for v in d),
    directions,
    st.floats(0.5, 40.0),
)


def level(sample: int, power: float, n: int) -> Record:
    return Record(sample, "level", args={"power": power, "n": n})


def aim(sample: int, goal: tuple[float, ...], n: int, kind: str) -> Record:
    return Record(sample, "aim", args={kind: list(goal), "n": n})


def sounding() -> BeamState:
    """A beam at full power, looking ahead."""
    state = BeamState(RATE_HZ)
    state.level[:] = (0, 0, 1.0, 1.0, 0, 0)
    return state


# -- level, depth -----------------------------------------------------------------------------


@given(st.floats(0.0, 1.0))
def test_a_raised_cosine_meets_its_formula_and_its_mirror_image(u: float) -> None:
    assert glides.raised_cosine(u) == pytest.approx(math.sin(math.pi * u / 2.0) ** 2, abs=1e-15)
    mirrored = 1.0 - glides.raised_cosine(1.0 - u)
    assert glides.raised_cosine(u) == pytest.approx(mirrored, abs=1e-15)


@given(powers, powers, lengths)
def test_ends_are_exact(start: float, goal: float, n: int) -> None:
    row = np.array((1000.0, n, start, goal, 0.0, 0.0))
    assert glides.scalar_at(row, 1000.0) == start
    assert glides.scalar_at(row, 1000.0 + n) == goal
    assert glides.scalar_at(row, 1e12) == goal
    assert glides.is_settled(row, 1000.0 + n)
    assert glides.is_settled(row, 1000.0) == (start == goal)


@given(powers, powers, lengths, st.floats(0.0, 1.0), powers, lengths)
def test_a_level_takes_over_without_a_step_in_value_or_slope(
    start: float, goal: float, n: int, share: float, then: float, m: int
) -> None:
    state = BeamState(RATE_HZ)
    state.level[:] = (0, n, start, goal, 0, 0)
    at = round(share * n)
    before = [glides.scalar_at(state.level, at + d) for d in (0, 1)]
    state.apply(level(at, then, m))
    after = [glides.scalar_at(state.level, at + d) for d in (0, 1)]
    bend = 0.5 * (math.pi / SHORTEST_N) ** 2  # largest second difference of a 20 ms glide of 1
    assert after[0] == before[0]
    carried = state.level[glides.CARRY_N]
    lost = 2.0 * abs(before[1] - before[0]) / carried if carried > 0.0 else 0.0
    assert after[1] == pytest.approx(before[1], abs=bend + lost + 1e-14)


@given(st.lists(st.tuples(st.integers(0, 2 * SHORTEST_N), powers, lengths), min_size=2, max_size=6))
def test_a_level_is_never_negative(changes: list[tuple[int, float, int]]) -> None:
    state, at = BeamState(RATE_HZ), 0
    for wait, power, n in changes:
        at += wait
        state.apply(level(at, power, n))
        for sample in np.linspace(at, at + 2 * SHORTEST_N, 50):
            assert glides.scalar_at(state.level, sample) >= -1e-12


@pytest.mark.parametrize("left", np.linspace(0.02, 0.98, 25).tolist())
def test_the_steepest_fall_taken_over_by_another_stays_above_zero(left: float) -> None:
    state = BeamState(RATE_HZ)
    state.level[:] = (0, SHORTEST_N, 1.0, 0.0, 0, 0)
    at = round((1.0 - left) * SHORTEST_N)
    state.apply(level(at, 0.0, SHORTEST_N))
    values = [glides.scalar_at(state.level, at + d) for d in range(SHORTEST_N + 1)]
    assert min(values) >= -1e-12
    assert values[-1] == 0.0


# -- travels ----------------------------------------------------------------------------------


@given(points, points, st.integers(RATE_HZ // 2, 5 * RATE_HZ))
def test_a_line_travel_keeps_its_speed_between_the_eases(
    start: tuple[float, ...], goal: tuple[float, ...], n: int
) -> None:
    state = sounding()
    state.apply(aim(0, start, 0, "point_m"))
    state.apply(aim(1, goal, n, "point_m"))
    ease = EASE_S * RATE_HZ / n

    def where(share: float) -> np.ndarray:
        x, y, z, distance = state.direction_at(1 + share * n)  # type: ignore[arg-type]
        return np.array((x, y, z)) * distance

    steps = np.diff([where(u) for u in np.linspace(ease, 1.0 - ease, 12)], axis=0)
    size = float(np.linalg.norm(np.subtract(goal, start)))
    even = np.subtract(goal, start) * (1.0 - 2.0 * ease) / (1.0 - ease) / 11
    assert steps == pytest.approx(np.tile(even, (11, 1)), abs=1e-9 * max(1.0, size))
    assert where(1.0) == pytest.approx(np.array(goal), abs=1e-12 * 40)
    assert where(0.0) == pytest.approx(np.array(start), abs=1e-12 * 40)


@given(directions, directions, st.integers(RATE_HZ // 2, 5 * RATE_HZ))
def test_an_arc_travel_stays_on_the_great_circle(
    start: tuple[float, ...], goal: tuple[float, ...], n: int
) -> None:
    state = sounding()
    state.apply(aim(0, start, 0, "direction"))
    state.apply(aim(1, goal, n, "direction"))
    normal = np.cross(start, goal)
    travelled = []
    for sample in np.linspace(1, 1 + n, 20):
        *unit, distance = state.direction_at(sample)  # type: ignore[arg-type]
        assert distance == 0.0
        assert math.hypot(*unit) == pytest.approx(1.0, abs=1e-12)
        assert float(np.dot(normal, unit)) == pytest.approx(0.0, abs=1e-12)
        travelled.append(
            math.atan2(float(np.linalg.norm(np.cross(start, unit))), np.dot(start, unit))
        )
    whole = math.atan2(float(np.linalg.norm(normal)), float(np.dot(start, goal)))
    assert travelled[-1] == pytest.approx(whole, abs=1e-7)
    assert all(b >= a - 1e-7 for a, b in pairwise(travelled))
    ease = EASE_S * RATE_HZ / n  # between the eases, at constant speed
    for share in (ease, 0.3, 0.5, 0.8):
        unit = np.array(state.direction_at(1 + share * n)[:3])  # type: ignore[arg-type]
        way = math.atan2(float(np.linalg.norm(np.cross(start, unit))), float(np.dot(start, unit)))
        assert way == pytest.approx(whole * (share - 0.5 * ease) / (1.0 - ease), abs=1e-7)


@given(
    st.sampled_from(("point_m", "direction")),
    st.sampled_from(("point_m", "direction")),
    points,
    points,
    points,
    st.floats(0.0, 1.0),
    st.integers(RATE_HZ // 4, 3 * RATE_HZ),
)
def test_a_travel_takes_over_without_a_step_in_direction_or_its_slope(
    first: str,
    second: str,
    start: tuple[float, ...],
    goal: tuple[float, ...],
    then: tuple[float, ...],
    share: float,
    n: int,
) -> None:
    def put(at: int, point: tuple[float, ...], length: int, kind: str) -> None:
        unit = tuple(np.asarray(point) / np.linalg.norm(point))
        state.apply(aim(at, point if kind == "point_m" else unit, length, kind))

    state = sounding()
    put(0, start, 0, first)
    put(1, goal, n, first)
    at = 1 + round(share * n)

    def here_and_next() -> np.ndarray:
        return np.array([state.direction_at(at + d)[:3] for d in (0, 1)])

    before = here_and_next()
    put(at, then, n, second)
    after = here_and_next()
    assert after[0] == pytest.approx(before[0], abs=1e-14)
    step = before[1] - before[0]
    lost = 2.1 * float(np.abs(step).max()) / (EASE_S * RATE_HZ)  # (1 - 1/n)² of it is kept
    assert after[1] - after[0] == pytest.approx(step, abs=lost + 1e-11)


@given(directions, points, st.integers(1, RATE_HZ), st.floats(0.0, 1.0))
def test_a_focus_that_follows_is_at_the_target(
    start: tuple[float, ...], goal: tuple[float, ...], n: int, share: float
) -> None:
    state = sounding()
    state.apply(aim(0, start, 0, "direction"))
    state.apply(Record(0, "reach", args={"per_m": "aim", "n": 0}))
    state.apply(aim(0, goal, 0, "point_m"))
    state.apply(aim(1, tuple(2.0 * v for v in goal), n, "point_m"))
    sample = 1 + round(share * n)
    assert state.reach_per_m_at(sample) == pytest.approx(1.0 / state.direction_at(sample)[3])
    state.apply(aim(sample, start, n, "direction"))  # a target without a distance
    held = state.reach_per_m_at(sample)
    assert held > 0.0
    assert state.reach_per_m_at(sample + n + round(EASE_S * RATE_HZ)) == held


# -- compiled ---------------------------------------------------------------------------------

samples = st.floats(0.0, 3e6)
scalars = st.tuples(
    st.integers(0, 10**6).map(float),
    st.integers(0, 10**6).map(float),
    powers,
    powers,
    st.floats(-1e-3, 1e-3),
    st.floats(0.0, 1e4),
)
travels = st.builds(
    lambda head, a, b, drift, drift_n, ease: (*head, *a, *b, *drift, drift_n, ease),
    st.tuples(
        st.integers(0, 10**6).map(float),
        st.integers(0, 10**6).map(float),
        st.sampled_from((glides.ARC, glides.LINE)),
    ),
    directions,
    directions,
    st.tuples(*[st.floats(-1e-4, 1e-4)] * 3),
    st.floats(0.0, 1e4),
    st.floats(0.001, 0.5),
)
sides = st.sampled_from((0.0, 1.0))
reaches = st.builds(lambda row, a, b: (*row, a, b), scalars, sides, sides)


def twin(function: Callable[..., object]) -> Callable[..., object]:
    compiled: Callable[..., object] = numba.njit(function)
    return compiled


scalar_twin = twin(glides.scalar_at)
settled_twin = twin(glides.is_settled)
travel_twin = twin(glides.travel_at)
travel_settled_twin = twin(glides.travel_settled)
reach_twin = twin(glides.reach_at)


@settings(deadline=None)  # the first example compiles
@given(scalars, samples)
def test_compiled_scalars_are_the_same_bits(values: tuple[float, ...], sample: float) -> None:
    row = np.array(values)
    assert scalar_twin(row, sample) == glides.scalar_at(row, sample)
    assert settled_twin(row, sample) == glides.is_settled(row, sample)


@settings(deadline=None)
@given(travels, samples)
def test_compiled_travels_are_the_same_bits(values: tuple[float, ...], sample: float) -> None:
    row = np.array(values)
    assert travel_twin(row, sample) == glides.travel_at(row, sample)
    assert travel_settled_twin(row, sample) == glides.travel_settled(row, sample)


@settings(deadline=None)
@given(reaches, samples, st.just(0.0) | st.floats(0.1, 50.0))
def test_compiled_reaches_are_the_same_bits(
    values: tuple[float, ...], sample: float, distance_m: float
) -> None:
    row = np.array(values)
    assert reach_twin(row, sample, distance_m) == glides.reach_at(row, sample, distance_m)
