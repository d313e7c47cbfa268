"""The guard's figures against direct sums at seats of random venues, for ten thousand pairs.

A pair is a seat and a cue: beams on every panel. Of most the guard is given the carriers' phasors;
of a share it is given samples, with programmes that reach 4 kHz to both sides of the carrier.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

import numpy as np
import pytest
from support.radiation import Array, Complex
from support.venues import LINE_HZ, PERIOD_N, SEATS, Venue, draw_phasors, draw_venue
from threadpoolctl import threadpool_limits

from beamctl.guard.estimator import Estimator, cap_pa
from beamctl.guard.field import Field
from beamctl.show.standing import GUARDED

CARRIERS, CARRIER_CUES = 150, 7  # venues, cues of each
PLAYED, PLAYED_CUES = 40, 5
PAIRS, NEAR = 10_000, 1_000
LOWER_DB, UPPER_DB, NEAR_DB = 0.5, 3.0, 3.0
PLACES = 600  # in a head
REACH_HZ, LINES = 4000.0, 40
HEARD = 1e-6  # of its cap: pressures below are nobody's matter


class Found(NamedTuple):
    """Pressures re each cap: (bands, SEATS, cues); `head` of the worst place, nan where not known.

    head  (SEATS, cues) in the carrier's band
    home  place of the first panel's carrier in the bands
    """

    label: str
    guard: Array
    brute: Array
    head: Array
    home: int


def band_places(hz: Array) -> np.ndarray:
    """Place in 12.5 to 80 kHz of the third that holds each frequency, IEC 61260-1 base 10."""
    return np.floor(10.0 * np.log10(hz / 1000.0) + 0.5).astype(int) - 11


def heads(rng: np.random.Generator, ears_m: Array) -> Array:
    """Places (SEATS, PLACES, 3) all over the volume of each head, half of them on its surface."""
    way = rng.normal(size=(PLACES, 3))
    way /= np.linalg.norm(way, axis=1, keepdims=True)
    way[::2] *= rng.random((PLACES // 2, 1)) ** (1 / 3)
    return np.asarray(ears_m[:, None] + 0.25 * way)


def drawn(rng: np.random.Generator, index: int) -> Venue:
    """Every fourth with one panel and no surface, the others with one or two of both."""
    if index % 4 == 0:
        return draw_venue(rng, index // 4, 1, 0)
    return draw_venue(rng, index, 1 + index % 2, int(rng.integers(0, 3)))


def worst_places(rng: np.random.Generator, venue: Venue, hz: Array, drives: Complex) -> Array:
    """Rms pressure (SEATS, cues) at the worst place of heads, for drives (f, feeds, cues)."""
    found = []
    for places_m in heads(rng, venue.ears_m):
        pressure = venue.radiators[0].transfers_pa(places_m, hz) @ drives
        found.append(np.sqrt(np.sum(np.abs(pressure) ** 2, axis=0)).max(axis=0))
    return venue.margins[0] * np.array(found)


def level_to_cap(rng: np.random.Generator, found: Found, peak: Array) -> Found:
    """As if every cue were trimmed until its worst seat is within 3 dB of its cap, or driven full.

    `peak` (cues,) is the largest amplitude on a feed.
    """
    wanted = 10.0 ** (rng.uniform(-2.5, 2.5, peak.shape) / 20.0)
    gain = np.minimum(wanted / np.maximum(found.brute.max(axis=(0, 1)), 1e-9), 1.0 / peak)
    scaled = {name: getattr(found, name) * gain for name in ("guard", "brute", "head")}
    return found._replace(**scaled)


def with_carriers(seed: int) -> Found:
    """One venue with standing carriers."""
    rng = np.random.default_rng(seed)
    venue = drawn(rng, seed)
    field, count = Field(venue.show), len(venue.radiators)
    caps = cap_pa(field, venue.show.caps)
    guard = np.zeros((len(GUARDED), SEATS, CARRIER_CUES))
    power = np.zeros_like(guard)
    pressures: dict[float, Complex] = {}
    peak = np.zeros(CARRIER_CUES)
    for n, hz in enumerate(venue.carriers_hz):
        at = np.array([hz])
        beams = [
            sum(draw_phasors(rng, venue, n, at)[0] for _ in range(rng.integers(1, 4)))
            for _ in range(CARRIER_CUES)
        ]
        drives = np.stack(beams, axis=1)
        peak = np.maximum(peak, np.abs(drives).max(axis=0))
        place = band_places(at)[0]
        square = field.power_pa2(f"p{n}", hz, drives[:, :, np.newaxis])
        guard[place] += venue.margins[n] * np.sqrt(square)
        pa = venue.radiators[n].with_walls_pa(venue.ears_m, at, venue.surfaces)[0] @ drives
        pressures[hz] = pressures.get(hz, 0.0) + venue.margins[n] * pa
    for hz, pa in pressures.items():
        power[band_places(np.array(hz))] += np.abs(pa) ** 2
    home = int(band_places(np.array(venue.carriers_hz[0])))
    head = np.full((SEATS, CARRIER_CUES), np.nan)
    if count == 1 and not venue.surfaces:
        head = worst_places(rng, venue, at, drives[np.newaxis]) / caps[home][:, np.newaxis]
    caps = caps[..., np.newaxis]
    found = Found(f"carriers {seed}", guard / caps, np.sqrt(power) / caps, head, home)
    return level_to_cap(rng, found, peak)


def programme(rng: np.random.Generator, offsets: Array) -> Complex:
    """Amplitudes of the lines at offsets (LINES,) from the carrier, the first of them the carrier.

    Both sides alike, one side, or any noise; sometimes without a carrier.
    """
    lines = rng.normal(size=(len(offsets), 2)) @ (1.0, 1j) * rng.uniform(0.02, 0.3)
    kind = rng.integers(4)
    if kind < 2:
        lines *= (offsets > 0.0) == bool(kind)
    lines[0] = rng.choice([0.0, 1.0], p=[0.2, 0.8])
    return np.asarray(lines)


def play(
    rng: np.random.Generator, venue: Venue, offsets: Array, beams: tuple[int, int]
) -> Iterator[tuple[Array, Complex]]:
    """Lines in hertz and their phasors (LINES, feeds) of one cue, per panel."""
    for n, carrier_hz in enumerate(venue.carriers_hz):
        hz = carrier_hz + offsets
        each = (
            programme(rng, offsets)[:, np.newaxis] * draw_phasors(rng, venue, n, hz)
            for _ in range(rng.integers(*beams))
        )
        yield hz, sum(each, np.zeros((), np.complex128))


def samples_of(venue: Venue, cue: list[tuple[Array, Complex]]) -> np.ndarray:
    """(PERIOD_N, channels) float32, one period."""
    spectrum = np.zeros((PERIOD_N // 2 + 1, venue.show.channels), np.complex128)
    first = 0
    for hz, phasors in cue:
        bins = np.round(hz / LINE_HZ).astype(int)
        spectrum[bins, first : first + phasors.shape[1]] = phasors
        first += phasors.shape[1]
    return np.fft.irfft(spectrum * (PERIOD_N / 2), axis=0).astype(np.float32)


def listened(estimator: Estimator, samples: np.ndarray) -> Array:
    """(bands, SEATS) rms pressure re cap, over one period of a standing programme."""
    steps = np.split(samples, 4)
    estimator.take(steps[-1])  # what was before is still in the first frame
    return np.sqrt(np.mean([estimator.take(s).amplitude.sum(axis=0) ** 2 for s in steps], axis=0))


def with_programmes(seed: int, beams: tuple[int, int] = (1, 3)) -> Found:
    """One venue with played programmes; `beams` on each panel from … to one less than …"""
    rng = np.random.default_rng(10_000 + seed)
    venue = drawn(rng, seed)
    field, caps = Field(venue.show), venue.show.caps
    estimator = Estimator(venue.show, field, caps)
    reach = int(REACH_HZ / LINE_HZ)
    beside = rng.choice(np.delete(np.arange(-reach, reach + 1), reach), LINES - 1, replace=False)
    offsets = LINE_HZ * np.concatenate(([0], beside))
    cues = [list(play(rng, venue, offsets, beams)) for _ in range(PLAYED_CUES)]
    guard = np.stack([listened(estimator, samples_of(venue, cue)) for cue in cues], axis=-1)
    pressure = np.zeros((PERIOD_N // 2 + 1, SEATS, PLAYED_CUES), np.complex128)
    for n, radiator in enumerate(venue.radiators):
        hz = cues[0][n][0]
        transfer = radiator.with_walls_pa(venue.ears_m, hz, venue.surfaces)
        phasors = np.stack([cue[n][1] for cue in cues], axis=-1)
        bins = np.round(hz / LINE_HZ).astype(int)
        pressure[bins] += venue.margins[n] * (transfer @ phasors)
    places = band_places(np.maximum(LINE_HZ * np.arange(len(pressure)), 1.0))
    power = [np.sum(np.abs(pressure[places == b]) ** 2, axis=0) for b in range(len(GUARDED))]
    home = int(band_places(np.array(venue.carriers_hz[0])))
    head = np.full((SEATS, PLAYED_CUES), np.nan)
    if len(venue.radiators) == 1 and not venue.surfaces:
        inside = band_places(hz) == home
        worst = worst_places(rng, venue, hz[inside], phasors[inside])
        head = worst / estimator.cap_pa[home][:, np.newaxis]
    brute = np.sqrt(power) / estimator.cap_pa[..., np.newaxis]
    found = Found(f"programmes {seed}", guard, brute, head, home)
    peak = np.array([np.abs(samples_of(venue, cue)).max() for cue in cues])
    return level_to_cap(rng, found, peak)


@pytest.fixture(scope="module")
def carriers() -> list[Found]:
    with threadpool_limits(1):  # small products: threads only get in each other's way
        return [with_carriers(seed) for seed in range(CARRIERS)]


@pytest.fixture(scope="module")
def programmes() -> list[Found]:
    with threadpool_limits(1):
        return [with_programmes(seed) for seed in range(PLAYED)]


def decibels(ratio: Array) -> Array:
    return np.asarray(20.0 * np.log10(ratio))


def told(what: str, db: Array) -> None:
    low, mid, high = np.min(db), np.median(db), np.max(db)
    print(f"{what}: {low:.2f} to {high:.2f} dB, median {mid:.2f} ({db.size})")


def above_seat(found: Found) -> Array:
    """Guard over sum in every band and pair that holds anything."""
    heard = found.brute > HEARD
    return decibels(found.guard[heard] / found.brute[heard])


def above_head(found: Found) -> Array:
    """Guard over worst place of the head, carrier's band, where that was worked out."""
    heard = found.head > HEARD
    return decibels(found.guard[found.home][heard] / found.head[heard])


def test_ten_thousand_pairs_with_a_thousand_near_their_cap(
    carriers: list[Found], programmes: list[Found]
) -> None:
    every = carriers + programmes
    worst = np.concatenate([f.guard.max(axis=0).ravel() for f in every])
    assert worst.size >= PAIRS
    near = np.abs(decibels(np.maximum(worst, 1e-9))) <= NEAR_DB
    by_sum = np.concatenate([f.brute.max(axis=0).ravel() for f in every])
    near_by_sum = np.abs(decibels(np.maximum(by_sum, 1e-9))) <= NEAR_DB
    print(f"{worst.size} pairs; within 3 dB of the cap {near.sum()}, the sum {near_by_sum.sum()}")
    assert np.count_nonzero(near) >= NEAR
    assert np.count_nonzero(near_by_sum) >= NEAR


@pytest.mark.parametrize("kind", ["carriers", "programmes"])
def test_the_guard_is_never_below_the_sum(kind: str, request: pytest.FixtureRequest) -> None:
    every: list[Found] = request.getfixturevalue(kind)
    told(f"{kind}: over the sum at the seat", np.concatenate([above_seat(f) for f in every]))
    low = {f.label: float(above_seat(f).min()) for f in every if above_seat(f).min() < -LOWER_DB}
    assert not low


@pytest.mark.parametrize("kind", ["carriers", "programmes"])
def test_one_panel_is_not_far_above_the_head(kind: str, request: pytest.FixtureRequest) -> None:
    every: list[Found] = request.getfixturevalue(kind)
    db = np.concatenate([above_head(f) for f in every])
    told(f"{kind}: over the worst place in the head", db)
    high = {f.label: float(above_head(f).max(initial=-99)) for f in every}
    assert not {label: most for label, most in high.items() if most > UPPER_DB}


def near_the_cap(every: list[Found]) -> Array:
    """Guard over worst place of the head, of pairs less than 6 dB under their cap."""
    near = [f.head > 10.0 ** (-6.0 / 20.0) for f in every]
    pairs = zip(every, near, strict=True)
    return np.concatenate([decibels(f.guard[f.home][n] / f.head[n]) for f, n in pairs])


def test_near_the_cap_the_worst_place_in_the_head_is_heard(carriers: list[Found]) -> None:
    db = near_the_cap(carriers)
    told("within 6 dB of the cap, over the worst place in the head", db)
    assert db.size > 200
    assert db.min() > -1.0


def test_six_unlike_programmes_on_a_panel_are_told_apart() -> None:
    with threadpool_limits(1):
        crowd = [with_programmes(seed, beams=(6, 7)) for seed in range(0, 40, 4)]
    at_seats = np.concatenate([above_seat(f) for f in crowd])
    told("six beams: over the sum at the seat", at_seats)
    assert at_seats.min() >= -LOWER_DB
    db = near_the_cap(crowd)
    told("six beams, within 6 dB of the cap: over the worst place in the head", db)
    assert db.size > 30
    assert db.max() <= UPPER_DB
