"""Averages and what may follow them, and dose: against sums over every window there is."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from beamctl.guard.windows import OVERSHOOT, Dose, Windows

STEP_S = 2_048 / 192_000
shares = st.lists(st.sampled_from([0.0, 0.3, 0.9, 1.0]), min_size=3, max_size=40)
averagings = st.sampled_from([0.02, 0.25, 1.0, 1.7, 5.0])


def windows_of(power: np.ndarray, averaging_s: float) -> np.ndarray:
    """Mean of every window of as many steps as hold an averaging time."""
    count = int(np.ceil(averaging_s / STEP_S))
    sums = np.cumsum(np.concatenate(([0.0], power)))
    return np.asarray((sums[count:] - sums[:-count]) / count)


@given(averaging_s=averagings, shares=shares, seed=st.integers(0, 999))
def test_what_keeps_to_what_is_allowed_passes_no_cap(
    averaging_s: float, shares: list[float], seed: int
) -> None:
    """Of what is allowed a share that changes now and then, for three averaging times and more."""
    windows = Windows((1,), STEP_S, averaging_s)
    rng = np.random.default_rng(seed)
    count = int(3.0 * averaging_s / STEP_S)
    taken = np.repeat(rng.choice(shares, count), rng.integers(1, 30, count))[:count]
    sent = []
    for share in taken:
        sent.append(float(windows.allowed()[0]) * share)
        windows.add(np.array(sent[-1:]))
    most_db = 10.0 * np.log10(max(windows_of(np.array(sent), averaging_s).max(), 1e-9))
    assert most_db <= 0.1


@given(averaging_s=averagings, seed=st.integers(0, 999))
def test_the_mean_is_never_below_the_newest_window(averaging_s: float, seed: int) -> None:
    windows = Windows((1,), STEP_S, averaging_s)
    rng = np.random.default_rng(seed)
    power = rng.choice([0.0, 0.1, 1.0, 30.0], int(2.5 * averaging_s / STEP_S) + 3)
    count = max(1, int(averaging_s / STEP_S))
    for n, value in enumerate(power, 1):
        windows.add(np.array([value]))
        newest = power[max(0, n - count) : n].sum() * STEP_S / averaging_s
        assert windows.mean()[0] >= newest * (1.0 - 1e-9)


@pytest.mark.parametrize("averaging_s", [0.25, 1.0, 1.7, 60.0])
def test_a_steady_level_at_its_cap_may_go_on(averaging_s: float) -> None:
    windows = Windows((1,), STEP_S, averaging_s)
    for _ in range(int(2.2 * averaging_s / STEP_S)):
        windows.add(np.array([1.0]))
    assert windows.mean()[0] == pytest.approx(1.0, abs=0.05)
    assert 0.7 < windows.allowed()[0] <= 1.0 + 1e-9


def test_after_silence_a_moment_may_have_more_but_only_so_much() -> None:
    windows = Windows((2,), STEP_S, 1.0)
    assert windows.allowed() == pytest.approx([OVERSHOOT, OVERSHOOT])
    for _ in range(60):
        windows.add(np.array([1.5, 0.0]))
    allowed = windows.allowed()
    assert allowed[0] < 1.0 < allowed[1] == OVERSHOOT


def test_dose_is_a_hundred_percent_after_a_window_at_the_cap() -> None:
    dose = Dose(2, STEP_S, 30.0)
    for _ in range(round(30.0 / STEP_S)):
        dose.add(np.array([1.0, 0.25]))
    assert dose.percent == pytest.approx([100.0, 25.0], rel=0.01)
    assert dose.since_doors == pytest.approx([100.0, 25.0], rel=0.01)
    for _ in range(round(31.0 / STEP_S)):
        dose.add(np.zeros(2))
    assert dose.percent == pytest.approx([0.0, 0.0], abs=1e-9)
    assert dose.since_doors == pytest.approx([100.0, 25.0], rel=0.01)


@given(seed=st.integers(0, 999), at=st.integers(1, 400))
def test_a_dose_taken_over_goes_on(seed: int, at: int) -> None:
    """By a second guard at any moment: no less than one guard all along, and the same in all."""
    power = np.random.default_rng(seed).uniform(0.0, 3.0, (600, 2))
    first, second, alone = (Dose(2, STEP_S, 4.0) for _ in range(3))
    for n, row in enumerate(power):
        alone.add(row)
        if n == at:
            second.carry_on(np.stack((first.percent, first.since_doors)))
        (first if n < at else second).add(row)
    assert np.all(second.percent >= alone.percent * 0.98)
    assert second.since_doors == pytest.approx(alone.since_doors)
