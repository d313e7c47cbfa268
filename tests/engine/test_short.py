"""A ring that holds less than the final stage looks ahead: told, and played again to the bit."""

from __future__ import annotations

import numpy as np
import pytest

from beamctl.engine import layout as at
from beamctl.engine.outlet import Outlet, Wire

RATE = 192_000
FEEDS = 6
FOREVER = 1 << 62


def loud(frames: int) -> np.ndarray:
    """Noise over its ceiling and its rating, whose level jumps."""
    rng = np.random.default_rng(8)
    levels = np.repeat(10.0 ** rng.uniform(-1.5, 0.0, frames // 700 + 1), 700)[:frames]
    return (levels[:, None] * rng.uniform(-1.0, 1.0, (frames, FEEDS))).astype(np.float32)


def fresh() -> Outlet:
    outlet = Outlet.create(None, 2_304, FEEDS, [Wire(0, 4, 0.4), Wire(4, 2, 1.0)], 1)
    outlet.grant(FOREVER, [0.3, 0.2])
    outlet.host_lives(FOREVER)
    outlet.ask_open(1)
    outlet.flow()
    return outlet


def fill(outlet: Outlet, tape: np.ndarray, room_left: int) -> None:
    while outlet.room >= 64 + room_left and outlet.count(at.WRITTEN) < len(tape):
        written = outlet.count(at.WRITTEN)
        outlet.push(np.ascontiguousarray(tape[written : written + 64]))


@pytest.mark.parametrize("seed", range(6))
def test_what_a_late_ring_sent_is_sent_again_from_a_full_one(seed: int) -> None:
    rng = np.random.default_rng(seed)
    tape, frames = loud(60_000), 57_000
    late, sent, told = fresh(), np.zeros((frames, FEEDS), np.float32), []
    while (read := late.count(at.READ)) < frames:
        n = min(int(rng.integers(1, 1_200)), frames - read)
        empty = 0 if rng.random() < 0.6 else int(rng.integers(0, late.frames - n - 64))
        fill(late, tape, empty)
        n = min(n, late.count(at.WRITTEN) - read)
        late.pull(sent[read : read + n])
        told += [event for event in late.events() if event.name == "short"]
    assert late.count(at.EMPTY) == 0
    assert {event.value == 0 for event in told} == {True, False}

    full, again = fresh(), np.zeros((frames, FEEDS), np.float32)
    seen = {event.sample: event.value for event in told}
    while (read := full.count(at.READ)) < frames:
        fill(full, tape, 0)
        if read in seen:
            full.see_to(seen.pop(read))
        stop = min([read + 512, frames, *(sample for sample in seen if sample > read)])
        full.pull(again[read:stop])
    np.testing.assert_array_equal(again, sent)

    blind = fresh()
    plain = np.zeros((frames, FEEDS), np.float32)
    while (read := blind.count(at.READ)) < frames:
        fill(blind, tape, 0)
        blind.pull(plain[read : min(read + 512, frames)])
    assert np.any(plain != sent)  # it does make a difference


def test_a_full_ring_tells_nothing() -> None:
    outlet, tape = fresh(), loud(20_000)
    out = np.zeros((256, FEEDS), np.float32)
    while outlet.count(at.READ) < 15_000:
        fill(outlet, tape, 0)
        outlet.pull(out)
    assert [event.name for event in outlet.events()] == ["granted", "opened"]
