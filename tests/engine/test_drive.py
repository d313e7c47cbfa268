"""A panel held under a ceiling of drive: how soon, how exactly, how smoothly, and its way back."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from beamctl.engine import layout as at
from beamctl.engine.outlet import Outlet, Wire

RATE = 192_000
FEEDS = 8
FOREVER = 1 << 62
SIZES = (64, 256, 333, 1024)
F32 = NDArray[np.float32]


def tone(frames: int, level: float, depth: float = 0.0) -> F32:
    """A carrier on every feed, each at its own phase, modulated by 1 kHz; `level` its amplitude."""
    t = np.arange(frames) / RATE
    phase = np.linspace(0.0, 20.0, FEEDS)
    envelope = level * (1.0 + depth * np.sin(2.0 * np.pi * 1_000.0 * t)) / (1.0 + depth)
    return (envelope[:, None] * np.sin(2.0 * np.pi * 40e3 * t[:, None] + phase)).astype(np.float32)


def drive(samples: F32) -> float:
    """Root of the summed mean squares."""
    return float(np.sqrt(np.sum(np.mean(samples.astype(np.float64) ** 2, axis=0))))


def play(tape: F32, ceiling: float, size: int = 256, later: dict[int, float] | None = None) -> F32:
    """What leaves of a tape; `later` gives the ceiling at frames."""
    later = dict(later or {})
    outlet = Outlet.create(None, 4_096, FEEDS, [Wire(0, FEEDS, 1.0)], 1)
    outlet.grant(FOREVER, [ceiling])
    outlet.host_lives(FOREVER)
    outlet.ask_open(1)
    outlet.flow()
    out = np.zeros_like(tape)
    read = written = 0
    while read < len(tape):
        while written < len(tape) and outlet.room >= 256:
            outlet.push(np.ascontiguousarray(tape[written : written + 256]))
            written = outlet.count(at.WRITTEN)
        if read in later:
            outlet.grant(FOREVER, [later.pop(read)])
        stop = min([read + size, len(tape), *later])
        outlet.pull(out[read:stop])
        read = stop
    return out


def test_a_drive_under_its_ceiling_passes_to_the_bit() -> None:
    tape = tone(19_200, 0.5, 0.8)
    out = play(tape, 1.02 * drive(tone(1_920, 0.5, 0.8)) * 10 ** (1.0 / 20.0))
    np.testing.assert_array_equal(out[1:], tape[1:])


@pytest.mark.parametrize("size", SIZES)
def test_ten_times_too_much_is_held_and_the_start_of_it_costs_little(size: int) -> None:
    """Against the ceiling's energy over a second: the excess of the first 20 ms, by any block."""
    quiet, loud = tone(38_400, 0.03), tone(96_000, 0.3)
    ceiling = 1.003 * drive(quiet[:1_920])
    out = play(np.concatenate((quiet, loud)), ceiling, size)
    np.testing.assert_array_equal(out[1:37_800], quiet[1:37_800])
    held = out[38_400:]
    excess = np.sum(np.mean(held[:3_840].astype(np.float64) ** 2, axis=0)) / ceiling**2 - 1.0
    second_db = 10.0 * np.log10(1.0 + max(0.0, excess) * 3_840 / RATE)
    print(f"excess over a second {second_db:.4f} dB")
    assert second_db < 0.05
    assert drive(held[9_600:]) == pytest.approx(ceiling, rel=1e-3)


def test_the_size_of_a_pull_changes_no_bit() -> None:
    tape = np.concatenate((tone(20_480, 0.1, 0.5), tone(20_480, 0.9, 0.9), tone(20_480, 0.05)))
    later = {9_999: 0.2, 25_000: 0.05, 30_001: 1.5, 41_111: 0.0, 45_000: 2.0}
    wanted = play(tape, 0.4, 256, later)
    assert np.any(wanted != tape)
    for size in SIZES:
        np.testing.assert_array_equal(play(tape, 0.4, size, later), wanted)


def test_a_ceiling_comes_down_and_goes_up_by_a_glide() -> None:
    """20 dB down within 3 ms, up again within 40, and no step between samples but the carrier's."""
    tape = np.full((96_000, FEEDS), 0.25, np.float32)
    full = drive(tape)
    out = play(tape, 2.0 * full, 256, {19_200: 0.1 * full, 48_000: 2.0 * full})
    gain = out[:, 0].astype(np.float64) / 0.25
    assert gain[19_199] == 1.0
    assert gain[19_200 + 576] == pytest.approx(0.1, rel=1e-3)
    assert np.max(np.abs(np.diff(gain[1:]))) < 0.3 / at.CHUNK + 1e-6
    back = 48_000 + int(np.argmax(gain[48_000:] == 1.0))
    print(f"back after {1e3 * (back - 48_000) / RATE:.0f} ms")
    assert back - 48_000 < 0.04 * RATE


def test_a_long_note_held_at_its_ceiling_does_not_pump() -> None:
    """Modulated at 1 kHz and depth 0.9 its envelope keeps its shape: the gain stays in 0.2 dB."""
    tape = tone(192_000, 0.6, 0.9)
    out = play(tape, 0.3 * drive(tape))
    loud = np.abs(tape[96_000:, 0]) > 0.05
    gain = out[96_000:, 0][loud].astype(np.float64) / tape[96_000:, 0][loud]
    swing_db = 20.0 * np.log10(gain.max() / gain.min())
    print(f"gain moves {swing_db:.3f} dB, mean {20 * np.log10(gain.mean()):.2f} dB")
    assert swing_db < 0.2
    assert drive(out[96_000:]) == pytest.approx(0.3 * drive(tape), rel=0.03)


@pytest.mark.parametrize("ceiling", [np.nan, -1.0, -np.inf, 0.0, 5e-324])
def test_an_odd_ceiling_lets_out_nothing(ceiling: float) -> None:
    assert not np.abs(play(tone(9_600, 0.5), ceiling)).max() > 1e-9


def test_gains_that_left_are_told_by_chunk() -> None:
    tape = tone(38_400, 0.5)
    outlet = Outlet.create(None, 4_096, FEEDS, [Wire(0, FEEDS, 1.0)], 1)
    outlet.grant(FOREVER, [0.5 * drive(tape)])
    outlet.host_lives(FOREVER)
    outlet.ask_open(1)
    outlet.flow()
    out = np.zeros((1_000, FEEDS), np.float32)
    sent = []
    for first in range(0, 38_000, 1_000):
        while outlet.room >= 256 and outlet.count(at.WRITTEN) < len(tape):
            written = outlet.count(at.WRITTEN)
            outlet.push(np.ascontiguousarray(tape[written : written + 256]))
        outlet.pull(out)
        sent.append(out.copy())
        if first == 20_000:
            outlet.hush()
    left = np.concatenate(sent)
    for first in (6_400, 12_800, 25_600, 32_000):
        gain = float(outlet.gains_left(first, 2_048)[0])
        heard = drive(left[first : first + 2_048]) / drive(tape[first : first + 2_048])
        assert gain == pytest.approx(heard, abs=1e-4)
