"""What the watch trips for and what not: sound in the samples, and ceilings passed over."""

from __future__ import annotations

import math
from functools import cache

import numpy as np
import pytest
from support.faults import CAP_DB, FEEDS, RATE_HZ, at_seats, gain_to_cap, tape_of

from beamctl.guard.field import Field
from beamctl.guard.watch import Watch
from beamctl.show.show import Show


@cache
def show_and_field() -> tuple[Show, Field]:
    show = at_seats("dsb", "far")
    return show, Field(show)


def watch() -> Watch:
    show, field = show_and_field()
    return Watch(show, round(0.012 * RATE_HZ), field)


def tones(seconds: float, *parts: tuple[float, float]) -> np.ndarray:
    """Sines (hz, level in dB re full scale) on every feed."""
    t = np.arange(round(seconds * RATE_HZ)) / RATE_HZ
    signal = sum((10.0 ** (db / 20.0) * np.sin(2.0 * np.pi * hz * t) for hz, db in parts), 0.0 * t)
    return np.repeat(signal[:, None], FEEDS, axis=1).astype(np.float32)


def play(watch: Watch, tape: np.ndarray, gain: float = 1.0) -> float:
    """Let a tape leave with one gain; the seconds after which it tripped, inf when it did not."""
    for first in range(0, len(tape) - watch.step_n + 1, watch.step_n):
        watch.take(tape[first : first + watch.step_n])
        watch.left(np.array([gain]))
        if watch.trip:
            return (first + watch.step_n) / RATE_HZ
    return math.inf


CARRIER_DB = -40.0
CARRIER = (40e3, CARRIER_DB)


@pytest.mark.parametrize("carrier_db", [-20.0, CARRIER_DB, -60.0])
@pytest.mark.parametrize("hz", [500.0, 10e3, 17e3])
def test_sound_at_55_db_under_the_carrier_trips_after_a_second(
    hz: float, carrier_db: float
) -> None:
    watching = watch()
    after_s = play(watching, tones(1.5, (40e3, carrier_db), (hz, carrier_db - 55.0)))
    assert after_s == pytest.approx(1.0, abs=2.0 * watching.step_s)
    assert "p0 sends sound below 17.8 kHz" in watching.trip
    assert watching.state == "TRIPPED"


def test_sound_at_65_db_under_the_carrier_never_trips() -> None:
    assert play(watch(), tones(5.0, CARRIER, (10e3, CARRIER_DB - 65.0))) == math.inf


def test_sound_for_less_than_a_second_never_trips() -> None:
    watching = watch()
    sound, pause = tones(0.9, CARRIER, (10e3, CARRIER_DB - 55.0)), tones(0.1, CARRIER)
    for _ in range(4):
        assert play(watching, sound) == math.inf
        assert play(watching, pause) == math.inf


def test_sound_that_does_not_leave_never_trips() -> None:
    assert play(watch(), tones(3.0, CARRIER, (10e3, -45.0)), gain=0.0) == math.inf


def test_carrier_programme_and_silence_never_trip() -> None:
    """A bare carrier of any level, modulated ones, and nothing at all, in one go."""
    show, field = show_and_field()
    programme = tape_of(show, "bursts", 2.0)
    programme = programme * gain_to_cap(show, field, programme)
    for tape in (
        tones(2.0, CARRIER),
        tones(2.0, (40e3, -110.0)),
        tones(2.0),
        programme,
    ):
        assert play(watch(), tape) == math.inf


def test_a_trip_that_was_cleared_must_come_about_anew() -> None:
    watching = watch()
    faulty = tones(1.2, CARRIER, (10e3, CARRIER_DB - 50.0))
    assert play(watching, faulty) < 1.1
    watching.clear()
    assert watching.trip == ""
    assert play(watching, faulty) == pytest.approx(1.0, abs=2.0 * watching.step_s)


def test_a_final_stage_that_does_not_obey_trips() -> None:
    """Six decibels over the cap, its ceilings granted in time and passed over."""
    show, field = show_and_field()
    tape = tape_of(show, "steady", 3.0)
    tape = tape * gain_to_cap(show, field, tape)
    watching = watch()
    assert play(watching, tape) == math.inf
    after_s = play(watching, tape * np.float32(2.0))
    print(f"tripped after {after_s:.2f} s: {watching.trip}")
    assert after_s < 1.0
    assert "in spite of its ceilings" in watching.trip


def test_at_its_cap_the_level_is_the_cap() -> None:
    show, field = show_and_field()
    tape = tape_of(show, "steady", 2.0)
    watching = watch()
    play(watching, tape * gain_to_cap(show, field, tape))
    level_db, _band, cap_db = watching.levels()
    assert set(cap_db) == {CAP_DB}
    assert level_db.max() == pytest.approx(CAP_DB, abs=0.02)
    assert watching.headroom_db() == pytest.approx(0.0, abs=0.02)
    assert watching.state == "NEAR"
