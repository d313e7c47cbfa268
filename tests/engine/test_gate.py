"""The final stage's gate: who opens it, what closes it, and how; and a ring that runs dry."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np
import pytest
from numpy.typing import NDArray

from beamctl.engine import layout as at
from beamctl.engine.envelopes import gain_ramp
from beamctl.engine.outlet import Event, Outlet, Wire
from beamctl.show.beamstate import MIN_GLIDE_S, BeamState
from beamctl.show.records import Record

RATE = 192_000
RAMP_N = round(MIN_GLIDE_S * RATE)
RING = 4_096
FOREVER = 10**15
LEVEL = 0.75  # what the feeds carry; products with it are rounded once
F32 = NDArray[np.float32]


def fresh(ramp_n: int = RAMP_N) -> Outlet:
    """Flowing, with nothing granted and nothing asked."""
    outlet = Outlet.create(None, RING, 1, (Wire(0, 1, 1.0),), ramp_n)
    outlet.grant(0, [1.0])
    outlet.host_lives(FOREVER)
    outlet.flow()
    return outlet


def told(outlet: Outlet) -> list[Event]:
    """What the gate did; grants taken and rings that were short are not its matter."""
    return [event for event in outlet.events() if event.name not in ("granted", "short")]


def pull(outlet: Outlet, frames: int, fill: bool = True) -> F32:
    """The next frames; the ring is kept full of LEVEL unless told otherwise."""
    if fill:
        outlet.push(np.full((outlet.room, 1), LEVEL, np.float32))
    out = np.full((frames, 1), np.nan, np.float32)
    outlet.pull(out)
    return out[:, 0]


def play(outlet: Outlet, frames: int, size: int, acts: Mapping[int, Callable[[], object]]) -> F32:
    """`frames` from frame 0 on, `size` at a time, a block starting at each of `acts`."""
    parts = []
    at_frame = 0
    while at_frame < frames:
        if at_frame in acts:
            acts[at_frame]()
        stop = min([at_frame + size, frames, *(frame for frame in acts if frame > at_frame)])
        parts.append(pull(outlet, stop - at_frame))
        at_frame = stop
    return np.concatenate(parts)


def journalled(frames: int, events: list[Event]) -> F32:
    """The gate's gain by a BeamState that a journal tells the same."""
    gate = BeamState(RATE)
    gains = np.zeros(frames, np.float32)
    stops = [*(event.sample for event in events[1:]), frames]
    for event, stop in zip(events, stops, strict=True):
        args = {"power": float(event.name == "opened"), "n": event.value}
        gate.apply(Record(event.sample, "level", args=args))
        gain_ramp(gains[event.sample : stop], gate.level, event.sample, stop - event.sample)
    return gains


# -- who opens it ----------------------------------------------------------------------------------


@pytest.mark.parametrize("hushed", [False, True])
@pytest.mark.parametrize("leased", [False, True])
@pytest.mark.parametrize("asked", [False, True])
def test_it_opens_only_when_asked_and_leased_and_not_hushed(
    asked: bool, leased: bool, hushed: bool
) -> None:
    """What was asked in vain is forgotten: what was missing does not open it when it comes."""
    outlet = fresh()
    pull(outlet, 256)
    if asked:
        outlet.ask_open(RAMP_N)
    if leased:
        outlet.grant(FOREVER)
    if hushed:
        outlet.hush()
    opens = asked and leased and not hushed
    heard = np.concatenate([pull(outlet, 1_000) for _ in range(5)])
    assert heard[0] == 0.0  # the ramp's first frame
    assert heard[1:].all() == heard.any() == opens
    assert outlet.count(at.GATE) == int(opens)
    outlet.grant(FOREVER)
    assert pull(outlet, 1_000).any() == opens
    assert told(outlet) == ([Event(256, "opened", RAMP_N)] if opens else [])


@pytest.mark.parametrize("close", ["hush", "lease-over", "host-over"])
def test_once_closed_a_lease_alone_does_not_open_it(close: str) -> None:
    outlet = fresh()
    outlet.grant(FOREVER)
    outlet.ask_open(RAMP_N)
    pull(outlet, RAMP_N)
    assert pull(outlet, 10).all()
    if close == "hush":
        outlet.hush()
    elif close == "lease-over":
        outlet.grant(0)
    else:
        outlet.host_lives(0)
    pull(outlet, RAMP_N)
    assert [event.name for event in told(outlet)] == [
        "opened",
        close if close != "hush" else "hushed",
    ]
    outlet.grant(FOREVER)
    outlet.host_lives(FOREVER)
    assert not np.concatenate([pull(outlet, 2_000) for _ in range(5)]).view(np.uint32).any()
    outlet.ask_open(RAMP_N)
    assert pull(outlet, 10)[1:].all()


def test_what_is_asked_before_anything_flows_waits_for_the_first_block() -> None:
    outlet = Outlet.create(None, RING, 1, (Wire(0, 1, 1.0),), RAMP_N)
    outlet.grant(FOREVER, [1.0])
    outlet.host_lives(FOREVER)
    outlet.host_lives(FOREVER)
    outlet.ask_open(RAMP_N)
    out = np.full((64, 1), np.nan, np.float32)
    outlet.pull(out)
    assert not out.any()
    assert told(outlet) == []
    assert pull(outlet, 64)[1:].all()  # a full ring flows
    assert told(outlet) == [Event(0, "opened", RAMP_N)]


@pytest.mark.parametrize("asked_n", [0, 1, RAMP_N - 1, -5])
def test_it_never_opens_faster_than_the_shortest_glide(asked_n: int) -> None:
    outlet = fresh()
    outlet.grant(FOREVER)
    outlet.ask_open(asked_n)
    heard = np.concatenate([pull(outlet, 1_000) for _ in range(5)])
    np.testing.assert_array_equal(heard, LEVEL * journalled(5_000, told(outlet)))
    assert heard[RAMP_N - 1] < LEVEL
    assert (heard[RAMP_N:] == LEVEL).all()


# -- how it moves ----------------------------------------------------------------------------------


@pytest.mark.parametrize("size", [1, 256, 333, 2_048])
def test_the_lease_ends_in_a_ramp_at_the_next_block(size: int) -> None:
    outlet = fresh()
    outlet.grant(6_000)
    outlet.ask_open(RAMP_N)
    heard = play(outlet, 14_000, size, {})
    (over,) = [event for event in told(outlet) if event.name == "lease-over"]
    assert over == Event(-(-6_000 // size) * size, "lease-over", RAMP_N)
    assert (heard[RAMP_N : over.sample + 1] == LEVEL).all()
    assert (heard[: over.sample + RAMP_N][1:] > 0.0).all()
    assert not heard[over.sample + RAMP_N :].view(np.uint32).any()
    wanted = journalled(14_000, [Event(0, "opened", RAMP_N), over])
    np.testing.assert_array_equal(heard, np.float32(LEVEL) * wanted)


def test_hush_acts_at_the_very_next_pull() -> None:
    outlet = fresh()
    outlet.grant(FOREVER)
    outlet.ask_open(RAMP_N)
    play(outlet, 5_000, 256, {})
    outlet.hush()
    heard = pull(outlet, 2)
    assert heard[0] == LEVEL
    assert heard[1] < LEVEL
    assert told(outlet)[1:] == [Event(5_000, "hushed", RAMP_N)]


@pytest.mark.parametrize("seed", range(20))
def test_any_order_of_events_gives_the_journal_s_samples_without_a_step_in_slope(seed: int) -> None:
    """Twenty closings and openings, most of which interrupt the one before.

    A raised cosine over N frames bends by at most c = π²/2 / N² a frame a frame. What takes over at
    a value v from a slope k < 0 lets it die away over 2.4 v / -k, which bends by 4 k² / 2.4 v; as a
    curve that bends by c and stays above zero has k² ≤ 2 c v, that is at most 10/3 c more. Bound:
    two interruptions in a row. A step in slope would be up to π/2 / N, eighty times as much.
    """
    rng = np.random.default_rng(seed)
    outlet = fresh()
    acts: dict[int, Callable[[], object]] = {}
    frame = 0
    for i in range(20):
        frame += int(rng.integers(1, RAMP_N if rng.random() < 0.8 else 3 * RAMP_N))
        if i % 2 == 0:
            n = int(rng.integers(RAMP_N, 2 * RAMP_N))
            acts[frame] = lambda n=n: (outlet.grant(FOREVER), outlet.ask_open(n))
        else:
            acts[frame] = outlet.hush if rng.random() < 0.5 else lambda: outlet.grant(0)
    length = frame + 2 * RAMP_N
    heard = play(outlet, length, 333, acts)
    events = told(outlet)
    assert [event.sample for event in events] == list(acts)
    assert {event.name for event in events[::2]} == {"opened"}
    assert {event.name for event in events[1::2]} <= {"hushed", "lease-over"}
    np.testing.assert_array_equal(heard, np.float32(LEVEL) * journalled(length, events))
    bend = np.abs(np.diff(heard.astype(np.float64) / LEVEL, 2)).max() * RAMP_N**2
    print(f"sharpest bend {bend:.1f} / N²")
    cosine = np.pi**2 / 2
    rounding = 4 * 2.0**-24 * RAMP_N**2
    assert bend <= cosine * (1 + 10 / 3 * (1 + 10 / 3)) + rounding


def test_only_the_oldest_of_many_unread_events_are_lost() -> None:
    outlet = fresh()
    outlet.grant(FOREVER)
    for _ in range(200):
        outlet.ask_open(RAMP_N)
        pull(outlet, 3)
        outlet.hush()
        pull(outlet, 4)
    last = told(outlet)
    wanted = [Event(7 * i, "opened", RAMP_N) for i in range(200)]
    wanted += [Event(7 * i + 3, "hushed", RAMP_N) for i in range(200)]
    assert last == sorted(wanted, key=lambda event: event.sample)[-256:]
    assert told(outlet) == []


# -- a dry ring ------------------------------------------------------------------------------------


def counting(first: int, frames: int) -> F32:
    """Frames that tell their place, exact in float32 and under full scale."""
    return (np.arange(first, first + frames, dtype=np.float32) * 2.0**-20 + 0.25)[:, None]


def test_a_drought_gives_zeros_and_comes_back_by_the_ramp() -> None:
    """No frame is lost or told twice; one event a drought, one count a pull."""
    outlet = fresh()
    outlet.grant(FOREVER)
    outlet.ask_open(RAMP_N)
    outlet.push(counting(0, RING))
    assert pull(outlet, 4_000, fill=False).any()
    assert pull(outlet, 50, fill=False)[-1] == counting(4_049, 1)[0, 0]
    dry = pull(outlet, 256, fill=False)
    np.testing.assert_array_equal(dry[:46], counting(4_050, 46)[:, 0])
    assert not dry[46:].view(np.uint32).any()
    for _ in range(9):
        assert not pull(outlet, 256, fill=False).view(np.uint32).any()
    assert outlet.count(at.EMPTY) == 10
    assert outlet.count(at.READ) == RING
    outlet.push(counting(RING, RING))
    back = pull(outlet, RING + 4, fill=False)  # and dry again
    gains = journalled(RING, [Event(0, "opened", RAMP_N)])
    np.testing.assert_array_equal(back[:RING], gains * counting(RING, RING)[:, 0])
    assert not back[RING:].view(np.uint32).any()
    assert outlet.count(at.EMPTY) == 11
    assert told(outlet) == [
        Event(0, "opened", RAMP_N),
        Event(RING, "dry", RAMP_N),
        Event(2 * RING, "dry", RAMP_N),
    ]


@pytest.mark.parametrize("when", ["before", "during"])
def test_a_gate_that_closes_around_a_drought_stays_shut(when: str) -> None:
    """Where the ramp was cut short by silence, it does not take up again."""
    outlet = fresh()
    outlet.grant(FOREVER)
    outlet.ask_open(RAMP_N)
    play(outlet, 2 * RAMP_N, 256, {})
    if when == "before":
        outlet.hush()
    while outlet.count(at.WRITTEN) > outlet.count(at.READ):
        pull(outlet, 100, fill=False)
    pull(outlet, 100, fill=False)
    if when == "during":
        outlet.hush()
        pull(outlet, 100, fill=False)
    assert outlet.count(at.EMPTY) > 0
    heard = np.concatenate([pull(outlet, 256) for _ in range(40)])
    assert not heard.view(np.uint32).any()
