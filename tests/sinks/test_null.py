"""The sink without a device keeps time as a device does."""

from __future__ import annotations

import time

import numpy as np
import pytest

from beamctl.errors import DeviceError
from beamctl.sinks.null import NullSink
from beamctl.sinks.open import open_sink

BLOCK = np.zeros((256, 2), np.float32)


class Clock:
    """Time that passes only in sleeps, and by hand."""

    def __init__(self) -> None:
        self.now_s = 100.0

    def __call__(self) -> float:
        return self.now_s

    def sleep(self, seconds: float) -> None:
        self.now_s += seconds


def fake(ring_ms: float = 10.0) -> tuple[NullSink, Clock]:
    clock = Clock()
    return NullSink(192_000, 2, ring_ms, clock=clock, sleep=clock.sleep), clock


def test_it_keeps_real_time() -> None:
    sink = open_sink("null", 192_000, 2, 32.0, 256)
    began_s = time.monotonic()
    blocks = 0
    while time.monotonic() - began_s < 0.3:
        sink.write(BLOCK)
        blocks += 1
    ahead_s = blocks * 256 / 192_000 - (time.monotonic() - began_s)
    assert ahead_s <= 256 / 192_000 + 1e-9  # never more than the block just due
    assert ahead_s >= -0.032 or sink.late > 0  # nor further behind than the ring, unless late


def test_rounding_in_sleeps_does_not_add_up() -> None:
    sink, clock = fake()
    for _ in range(75_001):  # the last is due 100 s after the first
        sink.write(BLOCK)
        clock.now_s += 1e-5
    assert clock.now_s - 200.0 == pytest.approx(1e-5, abs=1e-6)
    assert sink.late == 0


def test_late_counts_only_beyond_the_ring() -> None:
    sink, clock = fake(ring_ms=10.0)
    sink.write(BLOCK)
    clock.now_s += 256 / 192_000 + 0.0099
    sink.write(BLOCK)
    assert sink.late == 0
    clock.now_s += 256 / 192_000 + 0.0002  # 10.1 ms behind in all
    sink.write(BLOCK)
    assert sink.late == 1


def test_after_a_dry_spell_the_ring_fills_at_once_and_time_goes_on_from_there() -> None:
    sink, clock = fake(ring_ms=10.0)
    sink.write(BLOCK)
    clock.now_s += 5.0
    for _ in range(7):  # 7 blocks of 1.33 ms fit the ring of 10 ms
        sink.write(BLOCK)
    assert clock.now_s == pytest.approx(105.0, abs=1e-9)
    assert sink.late == 1
    sink.write(BLOCK)
    sink.write(BLOCK)
    assert clock.now_s == pytest.approx(105.0 + 8 * 256 / 192_000 - 0.010, abs=1e-9)
    assert sink.late == 1


def test_a_closed_sink_takes_nothing() -> None:
    sink, _clock = fake()
    sink.close()
    sink.close()
    with pytest.raises(DeviceError, match="closed"):
        sink.write(BLOCK)
