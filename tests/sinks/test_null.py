"""The sink without a device keeps time as a device does."""

from __future__ import annotations

import hashlib
import threading
import time

import numpy as np
import pytest
from support.collecting import Collecting
from support.running import wait_for

from beamctl.sinks.null import NullSink
from beamctl.sinks.open import open_sink

RATE_HZ = 192_000
PERIOD = 256


class Clock:
    """Time that passes only in sleeps, up to an hour that never comes, and by hand."""

    def __init__(self, until_s: float) -> None:
        self.now_s = 100.0
        self.until_s = 100.0 + until_s
        self.reached = threading.Event()
        self._never = threading.Event()

    def __call__(self) -> float:
        return self.now_s

    def sleep(self, seconds: float) -> None:
        if self.now_s + seconds > self.until_s:
            self.reached.set()
            self._never.wait(20.0)
        self.now_s += seconds

    def end(self, sink: NullSink) -> None:
        """Close the sink once the hour is reached."""
        assert self.reached.wait(20.0)
        sink.abandon()
        self._never.set()
        sink.close()


def test_it_keeps_real_time() -> None:
    outlet = Collecting(2)
    began_s = time.monotonic()
    sink = open_sink("null", RATE_HZ, outlet, 0, PERIOD)
    time.sleep(0.3)
    sink.close()
    assert (sink.route, sink.period, sink.trouble) == ("clock", PERIOD, None)
    due_s = np.arange(len(outlet.at_s)) * PERIOD / RATE_HZ
    ahead_s = due_s - (np.array(outlet.at_s) - outlet.at_s[0])
    # The first may itself be late, and what was owed comes soon.
    assert ahead_s.max() <= outlet.at_s[0] - began_s + 1e-6
    assert ahead_s[-1] >= -0.1
    assert len(outlet.at_s) * PERIOD / RATE_HZ >= 0.2


def test_rounding_in_sleeps_does_not_add_up() -> None:
    clock = Clock(100.0)  # 75,000 periods

    class Slow(Collecting):
        def pull(self, out: np.ndarray, now_ns: int) -> None:
            self.at_s.append(clock.now_s)
            clock.now_s += 1e-5

    outlet = Slow(2)
    clock.end(NullSink(RATE_HZ, outlet, PERIOD, clock, clock.sleep))
    assert len(outlet.at_s) in (75_000, 75_001)  # the last falls on the hour
    due_s = 100.0 + np.arange(len(outlet.at_s)) * PERIOD / RATE_HZ
    np.testing.assert_allclose(outlet.at_s, due_s, rtol=0.0, atol=1e-9)


def test_a_clock_that_runs_fast_pulls_fast() -> None:
    outlet = Collecting(2)
    sink = NullSink(RATE_HZ, outlet, PERIOD, clock=lambda: 3.0 * time.monotonic())
    time.sleep(0.3)
    sink.close()
    spent_s = outlet.at_s[-1] - outlet.at_s[0]
    assert (len(outlet.at_s) - 1) * PERIOD / RATE_HZ == pytest.approx(3.0 * spent_s, rel=0.1)


def test_what_is_owed_after_a_hold_up_is_pulled_at_once() -> None:
    clock = Clock(10.0)

    class Held(Collecting):
        def pull(self, out: np.ndarray, now_ns: int) -> None:
            super().pull(out, now_ns)
            if len(self.at_s) == 3:
                clock.now_s += 5.0

    outlet = Held(2, clock=clock)
    sink = NullSink(RATE_HZ, outlet, PERIOD, clock, clock.sleep)
    clock.end(sink)
    at_s = np.array(outlet.at_s) - 100.0
    due_s = np.arange(len(at_s)) * PERIOD / RATE_HZ
    held_s = due_s[2] + 5.0
    np.testing.assert_allclose(at_s[:3], due_s[:3], rtol=0.0, atol=1e-9)
    np.testing.assert_allclose(at_s[3:], np.maximum(held_s, due_s[3:]), rtol=0.0, atol=1e-9)
    assert len(at_s) in (7500, 7501)  # none left out
    assert {len(block) for block in outlet.given} == {PERIOD}
    assert sink.digest == hashlib.sha256(outlet.everything.tobytes()).hexdigest()


def test_the_digest_is_of_every_byte_that_was_given() -> None:
    outlet = Collecting(5)
    sink = open_sink("null", RATE_HZ, outlet, 0, PERIOD)
    wait_for(lambda: outlet.callbacks > 20, "some pulls")
    sink.close()
    assert sink.digest == hashlib.sha256(outlet.everything.tobytes()).hexdigest()


def test_a_closed_sink_pulls_nothing_more() -> None:
    outlet = Collecting(2)
    sink = open_sink("null", RATE_HZ, outlet, 0, PERIOD)
    wait_for(lambda: outlet.callbacks > 3, "some pulls")
    sink.close()
    sink.close()
    pulled = outlet.callbacks
    time.sleep(0.02)
    assert outlet.callbacks == pulled


def test_an_abandoned_sink_waits_for_nothing() -> None:
    stuck = threading.Event()

    class Stuck(Collecting):
        def pull(self, out: np.ndarray, now_ns: int) -> None:
            super().pull(out, now_ns)
            stuck.wait(20.0)

    outlet = Stuck(2)
    sink = open_sink("null", RATE_HZ, outlet, 0, PERIOD)
    wait_for(lambda: outlet.callbacks == 1, "a pull")
    began_s = time.monotonic()
    sink.abandon()
    assert time.monotonic() - began_s < 0.2
    stuck.set()
    sink.close()
    assert outlet.callbacks == 1
