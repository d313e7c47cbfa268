"""What each record does to a beam, and what freezing holds."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from beamctl.show import glides
from beamctl.show.beamstate import LAWS, MIN_GLIDE_S, SWAP_S, BeamState
from beamctl.show.records import SOUNDING, Record

RATE_HZ = 192_000
SHORTEST_N = round(MIN_GLIDE_S * RATE_HZ)
SWAP_N = round(SWAP_S * RATE_HZ)
SECOND = RATE_HZ


def tell(state: BeamState, sample: int, what: str, **args: Any) -> None:
    state.apply(Record(sample, what, args=args))


def beam(power: float = 0.25) -> BeamState:
    """A beam that has sounded "one" for a long time at sample 0, aimed at a point 5 m ahead."""
    state = BeamState(RATE_HZ)
    tell(state, -10 * SECOND, "aim", point_m=[0.0, 5.0, 0.0], n=0)
    tell(state, -10 * SECOND, "play", sound="one", loop=True)
    tell(state, -10 * SECOND, "level", power=power, n=SECOND)
    return state


def weights(state: BeamState, sample: int) -> dict[str, float]:
    return {v.sound: glides.scalar_at(v.weight, sample) for v in state.voices}


def law_weights(state: BeamState, sample: int) -> list[float]:
    return [glides.scalar_at(row, sample) for row in state.law]


def test_a_fresh_beam_is_silent_with_the_defaults() -> None:
    state = BeamState(RATE_HZ)
    assert state.silent(0)
    assert state.depth_at(0) == 0.7
    assert state.law_name() == "dsb"
    assert state.reach_per_m_at(0) == 0.0
    assert state.direction_at(0) == (0.0, 1.0, 0.0, 0.0)


def test_every_sounding_record_but_the_gate_is_taken_and_no_other() -> None:
    args = {
        "play": {"sound": "two", "loop": False},
        "stop": {"n": 100},
        "level": {"power": 0.5, "n": 100},
        "depth": {"depth": 0.5, "n": 100},
        "law": {"law": "ssb", "n": 100},
        "aim": {"direction": [0.0, 1.0, 0.0], "n": 100},
        "reach": {"per_m": 0.2, "n": 100},
        "freeze": {},
        "thaw": {},
    }
    assert args.keys() == SOUNDING
    for what, given_args in args.items():
        tell(beam(), 0, what, **given_args)
    for what in ("gate", "go", "hush"):
        with pytest.raises(KeyError):
            tell(beam(), 0, what, open=1, n=0)


def test_a_level_takes_its_time_and_never_less_than_20_ms() -> None:
    state = beam(0.25)
    tell(state, 0, "level", power=1.0, n=SECOND)
    assert state.power_at(SECOND // 2) == pytest.approx(0.75**2)  # the gain glides, from a half
    assert state.power_at(SECOND) == 1.0
    tell(state, 2 * SECOND, "level", power=0.0, n=0)
    assert state.power_at(2 * SECOND + SHORTEST_N // 2) == pytest.approx(0.5**2)
    assert not state.silent(2 * SECOND + SHORTEST_N - 1)
    assert state.silent(2 * SECOND + SHORTEST_N)


def test_depth_glides() -> None:
    state = beam()
    tell(state, 0, "depth", depth=0.3, n=SECOND)
    assert state.depth_at(SECOND // 2) == pytest.approx(0.5)
    assert state.depth_at(SECOND) == 0.3


def test_a_law_crossfades() -> None:
    state = beam()
    tell(state, 0, "law", law="mam", n=0)
    assert state.law_name() == "mam"
    assert law_weights(state, SWAP_N // 2) == pytest.approx([0.5, 0.0, 0.0, 0.5])
    assert law_weights(state, SWAP_N) == [0.0, 0.0, 0.0, 1.0]


@given(
    st.lists(
        st.tuples(st.integers(0, SECOND), st.sampled_from(LAWS), st.integers(0, SECOND)),
        min_size=1,
        max_size=6,
    ),
    st.integers(0, 2 * SECOND),
)
def test_law_weights_sum_to_one(changes: list[tuple[int, str, int]], later: int) -> None:
    state, at = beam(), 0
    for wait, law, n in changes:
        at += wait
        tell(state, at, "law", law=law, n=n)
        shares = law_weights(state, at + n // 3)
        assert sum(shares) == pytest.approx(1.0, abs=1e-12)
        assert min(shares) >= -1e-12
    assert sum(law_weights(state, at + later)) == pytest.approx(1.0, abs=1e-12)


def test_a_travel_and_a_focus_that_follows_it() -> None:
    state = beam()
    tell(state, 0, "reach", per_m="aim", n=SECOND)
    assert state.reach_per_m_at(SECOND // 2) == pytest.approx(0.1)
    assert state.reach_per_m_at(SECOND) == pytest.approx(0.2)
    tell(state, SECOND, "aim", point_m=[0.0, 10.0, 0.0], n=SECOND)
    assert state.travelling(SECOND)
    assert state.reach_per_m_at(SECOND + SECOND // 2) == pytest.approx(1.0 / 7.5)
    assert not state.travelling(2 * SECOND)
    assert state.reach_per_m_at(2 * SECOND) == pytest.approx(0.1)


def test_a_reach_in_metres_does_not_follow() -> None:
    state = beam()
    tell(state, 0, "reach", per_m=0.5, n=0)
    tell(state, 0, "aim", point_m=[0.0, 10.0, 0.0], n=0)
    assert state.reach_per_m_at(SECOND) == 0.5


# -- sounds -------------------------------------------------------------------------------------


def test_a_sound_from_silence_is_whole_at_once() -> None:
    state = BeamState(RATE_HZ)
    tell(state, 0, "play", sound="one", loop=False)
    assert weights(state, 0) == {"one": 1.0}


def test_a_sound_after_silence_takes_nothing_over() -> None:
    state = beam()
    tell(state, 0, "level", power=0.0, n=0)
    tell(state, SECOND, "play", sound="two", loop=False)
    assert weights(state, SECOND) == {"two": 1.0}


@given(st.lists(st.integers(0, 2 * SWAP_N), min_size=1, max_size=5), st.floats(0.0, 1.5))
def test_swapped_sounds_crossfade_with_weights_that_sum_to_one(
    waits: list[int], later: float
) -> None:
    state, at = beam(), 0
    for i, wait in enumerate(waits):
        at += wait
        before = weights(state, at)
        tell(state, at, "play", sound=f"s{i}", loop=True)
        after = weights(state, at)
        assert after.pop(f"s{i}") == 0.0
        assert after == pytest.approx({k: v for k, v in before.items() if k in after}, abs=1e-12)
    shares = weights(state, at + round(later * SWAP_N))
    assert sum(shares.values()) == pytest.approx(1.0, abs=1e-12)
    assert min(shares.values()) >= -1e-12
    done = weights(state, at + SWAP_N)
    assert done.pop(f"s{len(waits) - 1}") == 1.0
    assert set(done.values()) <= {0.0}


def test_stop_fades_the_programme() -> None:
    state = beam()
    tell(state, 0, "stop", n=SECOND)
    assert weights(state, SECOND // 2) == pytest.approx({"one": 0.5})
    assert weights(state, SECOND) == {"one": 0.0}


def test_a_sound_played_during_a_long_stop_replaces_the_old_one_within_a_swap() -> None:
    state = beam()
    tell(state, 0, "level", power=0.0, n=10 * SECOND)
    tell(state, 0, "stop", n=10 * SECOND)
    tell(state, SECOND, "play", sound="two", loop=True)
    assert weights(state, SECOND + SWAP_N) == {"one": 0.0, "two": 1.0}


# -- hold ---------------------------------------------------------------------------------------


def moving() -> BeamState:
    """Everything glides for two seconds from sample 0."""
    state = beam(0.25)
    tell(state, 0, "level", power=1.0, n=2 * SECOND)
    tell(state, 0, "depth", depth=0.1, n=2 * SECOND)
    tell(state, 0, "law", law="ssb", n=2 * SECOND)
    tell(state, 0, "reach", per_m=0.5, n=2 * SECOND)
    tell(state, 0, "aim", point_m=[3.0, 5.0, 0.0], n=2 * SECOND)
    return state


def everything(state: BeamState, sample: int) -> list[float]:
    scalars = [state.power_at(sample), state.depth_at(sample), state.reach_per_m_at(sample)]
    return [*scalars, *state.direction_at(sample), *law_weights(state, sample)]


@given(st.integers(1, 2 * SECOND - 1), st.integers(SECOND // 10, 100 * SECOND))
def test_freeze_holds_every_glide_and_thaw_ends_on_every_goal(at: int, wait: int) -> None:
    free, state = moving(), moving()
    tell(state, at, "freeze")
    assert everything(state, at) == pytest.approx(everything(free, at), abs=1e-12)
    eased = everything(state, at + SECOND // 10)
    assert everything(state, at + wait) == pytest.approx(eased, abs=1e-12)
    assert eased == pytest.approx(everything(free, at), abs=0.06)  # eased to rest, not jumped
    tell(state, at + wait, "thaw")
    assert everything(state, at + wait) == pytest.approx(eased, abs=1e-12)
    left = max(2 * SECOND - at, SHORTEST_N)
    goals = [1.0, 0.1, 0.5, 3 / 34**0.5, 5 / 34**0.5, 0.0, 34**0.5, 0.0, 0.0, 1.0, 0.0]
    assert everything(state, at + wait + left) == pytest.approx(goals, abs=1e-12)


def test_a_level_thawed_just_before_its_end_still_takes_20_ms() -> None:
    state = beam(0.25)
    tell(state, 0, "level", power=1.0, n=SECOND)
    tell(state, SECOND - 1000, "freeze")
    tell(state, 2 * SECOND, "thaw")
    assert state.power_at(2 * SECOND + SHORTEST_N - 1) < 1.0
    assert state.power_at(2 * SECOND + SHORTEST_N) == 1.0


def test_a_freeze_of_a_beam_at_rest_changes_nothing() -> None:
    state = beam()
    before = everything(state, 0)
    tell(state, 0, "freeze")
    tell(state, SECOND, "thaw")
    assert everything(state, 2 * SECOND) == before


def test_a_second_freeze_keeps_the_first_goals() -> None:
    state = moving()
    tell(state, SECOND, "freeze")
    tell(state, 2 * SECOND, "freeze")
    tell(state, 3 * SECOND, "thaw")
    assert state.power_at(4 * SECOND) == 1.0


def test_thaw_alone_changes_nothing() -> None:
    state = moving()
    tell(state, SECOND // 2, "thaw")
    assert everything(state, SECOND) == everything(moving(), SECOND)


def test_what_falls_while_held_stays_silent_afterwards() -> None:
    state = moving()
    tell(state, SECOND, "freeze")
    tell(state, 2 * SECOND, "level", power=0.0, n=SECOND)
    tell(state, 2 * SECOND, "stop", n=SECOND)
    tell(state, 4 * SECOND, "thaw")
    assert state.silent(4 * SECOND)
    assert state.power_at(10 * SECOND) == 0.0
    assert state.depth_at(10 * SECOND) == pytest.approx(0.1)  # the others go on


def test_a_fall_that_is_held_keeps_its_sound_until_it_goes_on() -> None:
    state = beam(1.0)
    tell(state, 0, "level", power=0.0, n=2 * SECOND)
    tell(state, 0, "stop", n=2 * SECOND)
    tell(state, SECOND, "freeze")
    assert weights(state, 9 * SECOND) == pytest.approx({"one": 0.5}, abs=1e-9)
    tell(state, 9 * SECOND, "thaw")
    assert state.silent(10 * SECOND)
    assert weights(state, 10 * SECOND) == {"one": 0.0}


def test_a_hold_lets_sounds_that_change_places_past_each_other() -> None:
    state = beam()
    tell(state, 0, "play", sound="two", loop=True)
    tell(state, SWAP_N // 2, "freeze")
    assert weights(state, SWAP_N) == {"one": 0.0, "two": 1.0}
    tell(state, SECOND, "thaw")
    assert weights(state, 2 * SECOND) == {"one": 0.0, "two": 1.0}


def test_rows_may_be_views_into_larger_arrays() -> None:
    levels = np.full((3, glides.SCALAR_SIZE), 9.0)
    state = BeamState(RATE_HZ, level=levels[1])
    tell(state, 0, "level", power=0.5, n=0)
    assert levels[1, glides.TO] == 0.5**0.5
    assert levels[0].tolist() == [9.0] * glides.SCALAR_SIZE
