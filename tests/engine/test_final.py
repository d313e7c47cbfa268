"""The final stage's samples: nothing gets out but what was rendered, never above the rating."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray

from beamctl.engine import final
from beamctl.engine import layout as at
from beamctl.engine.outlet import Event, Outlet, Wire

RATE = 192_000
RAMP_N = 3_840
SIZES = (1, 64, 256, 333, 1000, 1024, 2048)
QUANTUM = 256
RING = 3_001  # a prime: the seam falls everywhere
LEAD = 4_096  # silent frames while the gate opens
TAIL = 1_024  # silent frames so that the last ones are seen coming
CHANNELS = 13
WIRES = (Wire(2, 5, 1.0), Wire(8, 3, 1.0))  # 0, 1, 7, 11 and 12 are nobody's
OWNED = [2, 3, 4, 5, 6, 8, 9, 10]
FOREVER = 10**15
F32 = NDArray[np.float32]


UNHELD = (1e6, 1e6)  # ceilings of drive that hold nothing


def open_outlet(*ratings: float) -> Outlet:
    """Open from frame 0 on; fully so after RAMP_N frames."""
    wires = [replace(wire, rating=r) for wire, r in zip(WIRES, ratings or (1.0, 1.0), strict=True)]
    outlet = Outlet.create(None, RING, CHANNELS, wires, RAMP_N)
    let(outlet)
    outlet.ask_open(RAMP_N)
    return outlet


def let(outlet: Outlet) -> None:
    """Guard and host let it sound, held by nothing but its ratings."""
    outlet.grant(FOREVER, UNHELD[: outlet.count(at.PANELS)])
    outlet.host_lives(FOREVER)


def run(
    outlet: Outlet, tape: F32, size: int, acts: Mapping[int, Callable[[], object]] | None = None
) -> F32:
    """What leaves of `tape`, all but its last TAIL frames, pulled `size` at a time.

    A block starts at each frame in `acts`, and what stands there is called before it is pulled.
    """
    acts = dict(acts or {})
    out = np.full((len(tape) - TAIL, tape.shape[1]), np.nan, np.float32)
    written = read = 0
    while read < len(out):
        while written < len(tape) and outlet.room >= QUANTUM:
            outlet.push(tape[written : written + QUANTUM])
            written += QUANTUM
        if read in acts:
            acts.pop(read)()
        stop = min([read + size, len(out), *acts])
        outlet.pull(out[read:stop])
        read = stop
    assert not acts
    assert outlet.count(at.EMPTY) == 0
    return out


def tape_of(sound: F32) -> F32:
    """LEAD, then (n, CHANNELS) sound, then TAIL."""
    return np.concatenate(
        [np.zeros((LEAD, CHANNELS), np.float32), sound, np.zeros((TAIL, CHANNELS), np.float32)]
    )


def noise(frames: int, peak: float, seed: int = 1) -> F32:
    return np.random.default_rng(seed).uniform(-peak, peak, (frames, CHANNELS)).astype(np.float32)


def programme(frames: int, peak: float, seed: int = 2) -> F32:
    """A 40 kHz carrier whose level jumps at random, from `peak` to 40 dB below, every 8 ms."""
    rng = np.random.default_rng(seed)
    marks = peak * 10.0 ** -rng.uniform(0.0, 2.0, frames // 1_536 + 1)
    marks[rng.integers(4, len(marks))] = peak
    levels = np.repeat(marks, 1_536)[:frames]
    phases = rng.uniform(0.0, 2.0 * np.pi, CHANNELS)
    angle = 2.0 * np.pi * 40_000 / RATE * np.arange(frames)[:, None] + phases
    return (levels[:, None] * np.sin(angle)).astype(np.float32)


def largest(out: F32) -> float:
    """In double precision: a comparison in single would round the ceiling, too."""
    return float(np.abs(out).max())


def assert_same_bits(a: F32, b: F32) -> None:
    np.testing.assert_array_equal(a.view(np.uint32), b.view(np.uint32))


# -- poison --------------------------------------------------------------------------------------

BAD_BITS = {
    "nan": 0x7FC00000,
    "-nan": 0xFFC00000,
    "signalling": 0x7F800001,
    "-signalling": 0xFF800001,
    "nan of ones": 0x7FFFFFFF,
    "-nan of ones": 0xFFFFFFFF,
    "inf": 0x7F800000,
    "-inf": 0xFF800000,
    "1e30": int(np.float32(1e30).view(np.uint32)),
    "-1e30": int(np.float32(-1e30).view(np.uint32)),
    "largest": 0x7F7FFFFF,
    "-largest": 0xFF7FFFFF,
}


@pytest.mark.parametrize("size", SIZES)
@pytest.mark.parametrize("bits", BAD_BITS.values(), ids=BAD_BITS)
def test_what_is_no_sample_becomes_zero_and_a_fault_of_its_feed(bits: int, size: int) -> None:
    sound = noise(3_000, 0.9)
    frame, channel = LEAD + 777, 9
    begin = frame - min(size - 1, 20)
    tape = tape_of(sound)
    tape.view(np.uint32)[frame, channel] = bits
    outlet = open_outlet()
    faults: list[int] = []

    def look() -> None:
        faults.append(outlet.count(at.FAULTS))

    out = run(outlet, tape, size, {begin: look, begin + size: look})
    wanted = tape[: len(out)].copy()
    wanted[frame, channel] = 0.0
    assert_same_bits(out[:, OWNED], wanted[:, OWNED])
    assert faults == [0, 1]  # one block later it is known
    assert outlet.count(at.FAULT_FEED) == channel + 1
    assert outlet.events()[2:] == [Event(frame, "fault", channel + 1)]
    assert outlet.count(at.CLIPS) == 0


@pytest.mark.parametrize("sign", [0, 0x80000000])
def test_every_number_that_is_none_becomes_zero(sign: int) -> None:
    """All 2^23 patterns of infinity and of what is not a number, of either sign."""
    wires = (Wire(0, 64, 1.0),)
    outlet = Outlet.create(None, 8_192, 64, wires, 0)  # opens at once
    let(outlet)
    outlet.ask_open(0)
    outlet.flow()
    for first in range(0, 1 << 23, 64 * 4_096):
        bits = np.arange(first, first + 64 * 4_096, dtype=np.uint32) | (0x7F800000 | sign)
        outlet.push(bits.view(np.float32).reshape(-1, 64))
        out = np.full((4_096, 64), np.nan, np.float32)
        outlet.pull(out)
        assert not out.view(np.uint32).any()
    assert outlet.count(at.FAULTS) == (1 << 23) // 64  # every frame
    assert outlet.count(at.FAULT_FEED) == 1  # the first of them


@pytest.mark.parametrize("size", SIZES)
def test_bits_at_random_stay_under_the_limit(size: int) -> None:
    rng = np.random.default_rng(3)
    bits = rng.integers(0, 1 << 32, (6_000, CHANNELS), dtype=np.uint32)
    outlet = open_outlet(0.4, 0.9)
    out = run(outlet, tape_of(bits.view(np.float32)), size)
    assert largest(out[:, 2:7]) <= np.float32(0.4)
    assert largest(out[:, 8:11]) <= np.float32(0.9)
    assert outlet.count(at.FAULTS) > 0
    assert np.abs(out).max() > 0.0


def test_a_poisoned_panel_is_fault_enough_when_all_else_is_silent() -> None:
    sound = np.zeros((1_000, CHANNELS), np.float32)
    sound[:, 2:7] = np.nan
    outlet = open_outlet()
    out = run(outlet, tape_of(sound), 256)
    assert not out.view(np.uint32).any()
    assert outlet.count(at.FAULTS) == 1_000
    assert outlet.events()[2:] == [Event(LEAD, "fault", 3)]


def test_a_poisoned_feed_hides_no_peak_of_its_neighbours() -> None:
    """The shared gain is what it would be if that feed were silent; nothing is cut off."""
    sound = programme(8_000, 1.0)
    sound[:, 4] = 0.0
    clean = run(open_outlet(0.25, 1.0), tape_of(sound), 256)
    sound[:, 4] = np.inf
    outlet = open_outlet(0.25, 1.0)
    poisoned = run(outlet, tape_of(sound), 256)
    assert_same_bits(np.abs(poisoned), np.abs(clean))
    assert outlet.count(at.CLIPS) == 0


@pytest.mark.parametrize("rating", [np.nan, -1.0, -np.inf])
def test_an_odd_rating_lets_out_nothing(rating: float) -> None:
    outlet = open_outlet(rating, 1.0)
    out = run(outlet, tape_of(programme(8_000, 4.0)), 256)
    assert not out[:, 2:7].any()
    assert outlet.count(at.CLIPS) == 0


@pytest.mark.parametrize(("rating", "limit"), [(0.3, 0.3), (1e300, 1.0), (np.inf, 1.0)])
def test_a_rating_holds_and_full_scale_always(rating: float, limit: float) -> None:
    outlet = open_outlet(rating, 1.0)
    out = run(outlet, tape_of(programme(8_000, 4.0)), 256)
    assert 0.99 * limit <= largest(out[:, 2:7]) <= limit
    assert outlet.count(at.CLIPS) == 0


# -- what is ordinary passes untouched -----------------------------------------------------------


@pytest.mark.parametrize("size", SIZES)
def test_ordinary_samples_pass_to_the_bit(size: int) -> None:
    sound = noise(3 * RING, 1.0)
    sound[1_000:2_000] *= np.float32(1e-39)  # denormal
    sound[2_000:2_100] = -0.0
    tape = tape_of(sound)
    outlet = open_outlet(1.0, 1.0)
    out = run(outlet, tape, size)
    assert_same_bits(out[:, OWNED], tape[: len(out), OWNED])
    nobodys = [c for c in range(CHANNELS) if c not in OWNED]
    assert not out[:, nobodys].view(np.uint32).any()
    assert outlet.count(at.FAULTS) == outlet.count(at.CLIPS) == 0
    assert [event.name for event in outlet.events()] == ["granted", "opened"]


def test_a_nearly_empty_ring_sends_all_it_has() -> None:
    outlet = Outlet.create(None, RING, CHANNELS, WIRES, 0)
    let(outlet)
    outlet.ask_open(0)
    outlet.flow()
    sound = noise(4_000, 1.0)
    sound[:1_005] = 0.0
    for begin in range(0, 4_000, 10):
        outlet.push(sound[begin : begin + 10])
        out = np.empty((10, CHANNELS), np.float32)
        outlet.pull(out)
        assert_same_bits(out[:, OWNED], sound[begin : begin + 10, OWNED])


def test_the_size_of_a_pull_changes_no_bit() -> None:
    """With the ceiling at work, a broken sample, and the gate closing, opening, and closing."""
    tape = tape_of(programme(24_000, 1.0))
    tape[LEAD + 15_000, 5] = np.nan

    def played(size: int) -> tuple[F32, list[Event]]:
        outlet = open_outlet(0.25, 0.4)
        outlet.grant(FOREVER, [0.3, 1.0])
        acts = {
            9_001: outlet.hush,
            10_111: lambda: outlet.ask_open(5_000),
            17_003: lambda: outlet.grant(17_003),
            18_000: lambda: (outlet.grant(FOREVER, [0.2, 0.5]), outlet.ask_open(RAMP_N)),
        }
        return run(outlet, tape, size, acts), outlet.events()

    wanted, events = played(256)
    names = ["granted", "opened", "hushed", "opened", "lease-over", "granted", "opened", "fault"]
    assert [event.name for event in events] == names
    assert np.abs(wanted).max() > 0.2
    for size in SIZES:
        out, told = played(size)
        assert_same_bits(out, wanted)
        assert told == events


@pytest.mark.parametrize("wire", [Wire(10, 4, 1.0), Wire(-1, 2, 1.0), Wire(3, -1, 1.0)])
def test_a_panel_beyond_the_channels_is_refused(wire: Wire) -> None:
    with pytest.raises(ValueError, match="do not fit"):
        Outlet.create(None, RING, CHANNELS, (wire,), RAMP_N)
    with pytest.raises(ValueError, match="do not fit"):
        Outlet.create(None, RING, CHANNELS, WIRES * 40, RAMP_N)


# -- the rating ------------------------------------------------------------------------------------


def gain_of(out: F32, tape: F32) -> NDArray[np.float64]:
    """Gain of panel 1 per frame, from the largest of its feeds; nan where it is silent."""
    sent = tape[: len(out), 2:7].astype(np.float64)
    loudest = np.abs(sent).argmax(axis=1)[:, None]
    value = np.take_along_axis(sent, loudest, 1)[:, 0]
    with np.errstate(invalid="ignore", divide="ignore"):
        gain = np.take_along_axis(out[:, 2:7].astype(np.float64), loudest, 1)[:, 0] / value
    gain[np.abs(value) < 1e-3] = np.nan
    return gain


@pytest.mark.parametrize("seed", range(5))
@pytest.mark.parametrize("ceiling", [0.6, 0.25, 0.03])
def test_the_gain_is_smooth_and_nothing_passes_the_rating(ceiling: float, seed: int) -> None:
    """A held peak P is taken in over 8 chunks of 64 frames: the demand climbs by at most P / 512 a
    frame, and where gain = ceiling / demand is below 1, it falls by at most P / (512 ceiling).
    """
    tape = tape_of(programme(48_000, 1.0, seed))
    outlet = open_outlet(ceiling, 1.0)
    out = run(outlet, tape, 256)
    assert largest(out[:, 2:7]) <= ceiling
    assert_same_bits(out[LEAD:, 8:11], tape[LEAD : len(out), 8:11])  # the other panel's is its own
    assert outlet.count(at.CLIPS) == 0
    gain = gain_of(out, tape)[LEAD:]
    step = np.nanmax(np.abs(np.diff(gain)))
    peak = largest(tape[:, 2:7])
    bound = peak / ceiling / 512 + 2e-6
    print(f"steepest gain {step:.2e} a frame, bound {bound:.2e}")
    assert step <= bound
    assert np.nanmax(gain) <= 1.0
    assert np.abs(out[:, 2:7]).max() > 0.9 * ceiling


def test_what_was_not_seen_coming_is_cut_off_and_counted() -> None:
    wires = (replace(WIRES[0], rating=0.1), WIRES[1])
    outlet = Outlet.create(None, RING, CHANNELS, wires, 0)
    let(outlet)
    outlet.ask_open(0)
    outlet.flow()
    out = np.empty((64, CHANNELS), np.float32)
    sound = np.zeros((64, CHANNELS), np.float32)
    for _ in range(20):
        outlet.push(sound)
        outlet.pull(out)
    sound[10:, 4], sound[10:, 5] = 0.4, -0.4
    outlet.push(sound)
    outlet.pull(out)
    np.testing.assert_allclose(out[10:, 4], 0.1, rtol=1e-6)
    np.testing.assert_allclose(out[10:, 5], -0.1, rtol=1e-6)
    assert largest(out) <= 0.1
    assert outlet.count(at.CLIPS) == 54
    clips = [event for event in outlet.events() if event.name == "clip"]
    assert clips == [Event(20 * 64 + 10, "clip", 5)]
    assert outlet.count(at.FAULTS) == 0


def test_the_gain_comes_back_at_its_own_pace() -> None:
    """After one peak of 12 dB: 6 dB in 64 ln 0.5 / ln RELEASE frames, 77 ms at 192 kHz."""
    tape = tape_of(np.full((60_000, CHANNELS), 0.01, np.float32))
    tape[LEAD + 2_000, 3] = 1.0
    outlet = open_outlet(0.25, 1.0)
    gain = gain_of(run(outlet, tape, 256), tape)
    lowest = LEAD + 2_000
    assert gain[lowest] == pytest.approx(0.25, rel=1e-3)
    times = [int(np.argmax(gain[lowest:] > 0.25 * 10 ** (db / 20))) for db in (3, 9)]
    frames = times[1] - times[0]
    print(f"6 dB back in {1e3 * frames / RATE:.1f} ms")
    assert frames == pytest.approx(64 * np.log(0.5) / np.log(final.RELEASE), rel=0.01)
    assert frames / RATE == pytest.approx(0.077, abs=0.001)
    assert gain[lowest + 3 * frames] == pytest.approx(1.0)


@pytest.mark.parametrize("tone_hz", [1_000, 400, 100])
def test_the_gain_does_not_pump_with_the_programme(tone_hz: int) -> None:
    """Ripple of the gain on a steady tone, depth 0.8, 6 dB above the ceiling at its peaks.

    Peaks are held for HOLD chunks; only between those that lie further apart the release shows.
    """
    t = np.arange(80_000) / RATE
    wave = (1.0 + 0.8 * np.sin(2.0 * np.pi * tone_hz * t)) / 1.8 * np.sin(2.0 * np.pi * 40_000 * t)
    tape = tape_of(np.repeat(wave[:, None], CHANNELS, 1).astype(np.float32))
    gain = gain_of(run(open_outlet(0.5, 1.0), tape, 256), tape)[LEAD + 4_000 : LEAD + 78_000]
    ripple_db = 20.0 * np.log10(np.nanmax(gain) / np.nanmin(gain))
    released = max(0.0, RATE / tone_hz / at.CHUNK - at.HOLD)  # chunks
    bar_db = 0.01 - released * 20.0 * np.log10(final.RELEASE)
    print(f"{tone_hz} Hz: ripple {ripple_db:.3f} dB, bar {bar_db:.3f} dB")
    assert ripple_db <= bar_db
