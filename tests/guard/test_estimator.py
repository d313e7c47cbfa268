"""From samples to levels per band: near a band's edge, sidebands in other bands, margins."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from support.directsum import absorption_np_m
from support.radiation import Array, Complex, Medium, Radiator
from support.rigs import PANEL, grid, make_show

from beamctl.acoustics.bands import band_at
from beamctl.guard.estimator import Estimator
from beamctl.guard.field import Field
from beamctl.guard.spectrum import Analyser
from beamctl.guard.watch import ALARM, Watch
from beamctl.show.limits import Guard
from beamctl.show.show import Show
from beamctl.show.standing import GUARDED

RATE_HZ, PERIOD_N = 192_000, 16_384
LINE_HZ = RATE_HZ / PERIOD_N
MARGIN_DB = 10.0
PLACE = {band.nominal_hz: n for n, band in enumerate(GUARDED)}
EDGES_HZ = {20e3: (17782.79, 22387.21), 25e3: (22387.21, 28183.83)}  # IEC 61260-1 base 10
EDGES_HZ |= {31.5e3: (28183.83, 35481.34), 40e3: (35481.34, 44668.36), 50e3: (44668.36, 56234.13)}
STALLS = {
    "class": "seats",
    "first_m": (-2.0, 4.0, -0.8),
    "rows": ("A", "B"),
    "row_step_m": (0.3, 1.4, 0.1),
    "seats": 4,
    "seat_step_m": (1.1, 0.0, 0.0),
}


def show_of(carrier_hz: float, **more: Any) -> Show:
    """A panel of 8 by 8 at the origin, and eight seats; unsigned unless `measured`."""
    spec = {"carrier_hz": carrier_hz, "resonance_hz": carrier_hz} | more
    show = make_show(house={"block": {"stalls": STALLS}}, **spec)
    if "measured" not in spec:
        return show
    signed = {"by": "a venue", "on": "2026-01-01", "digest": "seal"}
    guard = Guard.model_validate({"format": 1, "signed": signed})
    return replace(show, guard=guard, seal="seal")


def radiator(show: Show) -> Radiator:
    """The same panel, cell by cell."""
    spec, medium = show.rig.panel["p"], Medium(20.0, 50.0)
    at_m = grid().at_m
    loss = absorption_np_m(spec.carrier_hz, 20.0, 50.0)
    pascals = 20e-6 * 10.0 ** (PANEL["level_db_30cm_10v"] / 20.0)
    return Radiator(
        cells_m=at_m,
        axis=np.array((0.0, 1.0, 0.0)),
        feed=np.arange(64),
        feeds=64,
        gain=np.ones(64, np.complex128),
        cell_m=spec.cell_mm / 1e3,
        pa_m=float(pascals * 0.3 * 5.0 / 10.0 * np.exp(0.3 * loss)),
        resonance_hz=spec.resonance_hz,
        q=spec.q if spec.measured else 0.0,
        medium=medium,
    )


def ears(show: Show) -> Array:
    return np.array(list(show.house.seats().values()))


def lines(carrier_hz: float, **amplitudes: float) -> dict[float, float]:
    """Amplitudes by frequency, on whole lines: lines(40e3, c=1, u6000=0.3, l6000=0.3)."""
    found = {}
    for name, amplitude in amplitudes.items():
        offset_hz = 0.0 if name == "c" else float(name[1:]) * (1.0 if name[0] == "u" else -1.0)
        found[float(np.round((carrier_hz + offset_hz) / LINE_HZ) * LINE_HZ)] = amplitude
    return found


def played(show: Show, sounding: dict[float, float], aim_m: Array) -> tuple[np.ndarray, Complex]:
    """One period of samples (PERIOD_N, 64), and every line's pressure (lines, seats)."""
    panel, hz = radiator(show), np.array(list(sounding))
    phasors = panel.phasors(aim_m, False, hz) * np.array(list(sounding.values()))[:, np.newaxis]
    spectrum = np.zeros((PERIOD_N // 2 + 1, 64), np.complex128)
    spectrum[np.round(hz / LINE_HZ).astype(int)] = phasors
    samples = np.fft.irfft(spectrum * (PERIOD_N / 2), axis=0).astype(np.float32)
    transfer = panel.transfers_pa(ears(show), hz)
    return samples, np.asarray((transfer @ phasors[:, :, np.newaxis])[..., 0])


def listened_db(show: Show, samples: np.ndarray) -> Array:
    """(bands, seats) level re cap over a standing period."""
    estimator = Estimator(show, Field(show), show.caps)
    steps = np.split(samples, PERIOD_N // 2048)
    estimator.take(steps[-1])
    power = np.mean([estimator.take(s).amplitude.sum(axis=0) ** 2 for s in steps], axis=0)
    return np.asarray(10.0 * np.log10(np.maximum(power, 1e-20)))


def level_db(pressure: Complex, hz: Array, nominal_hz: float) -> Array:
    """(seats,) of the lines in one band, margin included, re 20 µPa."""
    low_hz, high_hz = EDGES_HZ[nominal_hz]
    inside = (hz >= low_hz) & (hz < high_hz)
    power = np.sum(np.abs(pressure[inside]) ** 2, axis=0)
    return np.asarray(10.0 * np.log10(np.maximum(power, 1e-30) / 4e-10) + MARGIN_DB)


@pytest.mark.parametrize("audio_hz", [2650, 3000, 4000, 6000])
def test_audio_above_2_61_khz_on_25_khz_is_held_to_the_20_khz_band(audio_hz: int) -> None:
    """25 kHz - 2.61 kHz is the lower edge of the 25 kHz third: 22.387 kHz; 70 dB hold below it."""
    show = show_of(25e3)
    sounding = lines(25e3, c=0.02, **{f"u{audio_hz}": 0.004, f"l{audio_hz}": 0.004})
    seat = ears(show)[2]
    samples, pressure = played(show, sounding, seat)
    found_db = listened_db(show, samples)
    low_db = level_db(pressure, np.array(list(sounding)), 20e3)
    assert np.all(found_db[PLACE[20e3]] >= low_db - 70.0 - 0.5)
    assert found_db[PLACE[20e3], 2] <= low_db[2] - 70.0 + 1.5
    assert np.argmax(found_db[:, 2]) == PLACE[20e3]
    home_db = level_db(pressure, np.array(list(sounding)), 25e3)
    assert -0.1 <= found_db[PLACE[25e3], 2] - (home_db[2] - 100.0) <= 1.5  # the head is nearer


@pytest.mark.parametrize("audio_hz", [500, 1500, 2200])
def test_audio_below_that_is_the_25_khz_bands_matter(audio_hz: int) -> None:
    show = show_of(25e3)
    sounding = lines(25e3, c=0.02, **{f"u{audio_hz}": 0.004, f"l{audio_hz}": 0.004})
    samples, _ = played(show, sounding, ears(show)[2])
    found_db = listened_db(show, samples)
    assert np.argmax(found_db[:, 2]) == PLACE[25e3]


def watched(show: Show, samples: np.ndarray, seconds: float) -> Watch:
    """A watch that took a standing sound, and let out what it allowed."""
    watch = Watch(show, 2048)
    ceiling = np.ones(1)
    for n in range(round(seconds / watch.step_s)):
        at = n * watch.step_n % PERIOD_N
        step = samples[at : at + watch.step_n]
        drive = np.sqrt(np.mean(np.sum(step**2, axis=1)))
        ceiling = watch.take(step)
        watch.left(np.minimum(1.0, ceiling / drive))
    return watch


def test_the_watch_holds_a_25_khz_carrier_by_its_lower_sideband() -> None:
    show = show_of(25e3)
    seat = ears(show)[2]
    sounding = lines(25e3, c=0.02, u4000=0.004, l4000=0.004)
    samples, pressure = played(show, sounding, seat)
    over_db = float(level_db(pressure, np.array(list(sounding)), 20e3)[2]) - 70.0
    assert over_db > 6.0
    watch = watched(show, samples, 2.0)
    assert watch.state == "CAPPING"
    assert watch.held_db()["p"] == pytest.approx(over_db, abs=2.5)
    assert watch.held_db()["p"] >= over_db - 0.2
    _, bands, caps_db = watch.levels()
    assert bands[2] == PLACE[20e3]
    assert caps_db[2] == pytest.approx(70.0)
    bare, _ = played(show, lines(25e3, c=0.02), seat)
    assert watched(show, bare, 1.0).held_db() == {}


@pytest.mark.parametrize("carrier_hz", [24e3, 25e3])
def test_the_skirts_of_a_low_carrier_do_not_ring_the_samples_alarm(carrier_hz: float) -> None:
    """Sidebands reach down to 22.4 kHz at the most; below 17.8 kHz nothing may seem to be."""
    lowest = int(carrier_hz - 22_400.0)
    show = show_of(carrier_hz)
    sounding = lines(carrier_hz, c=0.1, **{f"u{lowest}": 0.05, f"l{lowest}": 0.05})
    samples, _ = played(show, sounding, ears(show)[2])
    estimator = Estimator(show, Field(show), show.caps)
    steps = [estimator.take(step) for step in np.split(samples, PERIOD_N // 2048)][1:]
    worst = max(float(step.audible[0] / step.carrier[0]) for step in steps)
    print(f"{carrier_hz:.0f} Hz: {10.0 * np.log10(worst):.1f} dB re the carrier")
    assert worst < ALARM


@pytest.mark.parametrize("seed", range(8))
def test_6_khz_about_40_khz_is_bounded_in_its_neighbours(seed: int) -> None:
    rng = np.random.default_rng(seed)
    more = {"q": float(rng.uniform(2.0, 60.0)), "measured": "p.csv"} if seed % 2 else {}
    show = show_of(40e3, **more, cell_mm=float(rng.uniform(4.0, 14.0)))
    resonance_hz = float(rng.uniform(36e3, 48e3))
    spec = show.rig.panel["p"].model_copy(update={"resonance_hz": resonance_hz})
    show = replace(show, rig=show.rig.model_copy(update={"panel": {"p": spec}}))
    aim_m = ears(show)[rng.integers(8)]
    sides = {f"{side}{hz}": float(rng.uniform(0.01, 0.1)) for side in "ul" for hz in (6000, 5500)}
    sounding = lines(40e3, c=0.2, **sides)
    samples, pressure = played(show, sounding, aim_m)
    found_db = listened_db(show, samples) + 100.0
    hz = np.array(list(sounding))
    margin_db = 0.0 if more else MARGIN_DB
    over = []
    for nominal_hz in (31.5e3, 40e3, 50e3):
        true_db = level_db(pressure, hz, nominal_hz) - MARGIN_DB + margin_db
        assert true_db.max() > 60.0
        over.append(found_db[PLACE[nominal_hz]] - true_db)
        assert over[-1].min() >= -0.5
    told = ", ".join(f"{db.min():.2f} to {db.max():.2f}" for db in over)
    print(f"31.5, 40, 50 kHz: {told} dB over the sum at eight seats")


def test_an_unmeasured_rig_counts_10_db_louder_than_a_flat_one() -> None:
    flat = show_of(40e3, q=1e-3, measured="p.csv")
    bare = show_of(40e3, q=30.0)
    samples, _ = played(bare, lines(40e3, c=0.1, u2000=0.03, l2000=0.03, u6000=0.01), ears(bare)[0])
    louder_db = listened_db(bare, samples) - listened_db(flat, samples)
    heard = [PLACE[nominal_hz] for nominal_hz in (40e3, 50e3)]
    assert louder_db[heard] == pytest.approx(MARGIN_DB, abs=0.01)


def test_an_unmeasured_rig_gets_no_credit_for_its_resonance() -> None:
    aside = {"resonance_hz": 38e3, "q": 30.0}
    samples, _ = played(show_of(40e3), lines(40e3, c=0.1), ears(show_of(40e3))[0])
    on, off = (listened_db(show_of(40e3, **more), samples) for more in ({}, aside))
    assert np.allclose(on, off, atol=0.01)
    credited = listened_db(show_of(40e3, measured="p.csv", **aside), samples)
    (hz,) = lines(40e3, c=0.1)
    answer = 1.0 / np.hypot(1.0, 30.0 * (hz / 38e3 - 38e3 / hz))
    home = PLACE[40e3]
    assert (credited - on)[home] == pytest.approx(20.0 * np.log10(answer) - MARGIN_DB, abs=0.15)


def test_a_sideband_at_a_sharp_resonance_counts_in_full() -> None:
    """A carrier far off the resonance, and its upper sideband on it."""
    show = show_of(38e3, q=150.0, resonance_hz=39.2e3, measured="p.csv")
    sounding = lines(38e3, c=0.2, u1200=0.2, u2000=0.1)
    samples, pressure = played(show, sounding, ears(show)[3])
    true_db = level_db(pressure, np.array(list(sounding)), 40e3) - MARGIN_DB
    over_db = listened_db(show, samples)[PLACE[40e3]] + 100.0 - true_db
    assert over_db.min() >= -0.5
    assert over_db[3] <= 1.5


@pytest.mark.parametrize("nominal_hz", [25e3, 40e3, 63e3])
def test_no_power_is_lost_between_bands_and_vectors(nominal_hz: float) -> None:
    rng = np.random.default_rng(4)
    band = band_at(nominal_hz)
    assert band is not None
    analyser = Analyser(RATE_HZ, 12, band.mid_hz, 3e-4)
    analyser.take(rng.normal(0.0, 0.1, (2048, 12)).astype(np.float32))
    for _ in range(3):
        found = analyser.take(rng.normal(0.0, 0.1, (2048, 12)).astype(np.float32))
        kept = sum(float(np.sum(np.abs(v) ** 2)) for _, v in found.parts) + found.rest
        assert kept == pytest.approx(found.carrier, rel=1e-3)
        every = found.carrier + sum(float(squares.sum()) for squares in found.bands.values())
        assert set(found.bands) == set(GUARDED) - {band}
        assert every == pytest.approx(2.0 * found.drive**2 * (89_125 - 11_220) / 96_000, rel=0.1)


def test_a_full_scale_sine_is_a_phasor_of_one() -> None:
    analyser = Analyser(RATE_HZ, 3, 40_125.0, 3e-4)  # on a line of the frames
    turns = 2.0 * np.pi * 40_125.0 * np.arange(4 * 2048) / RATE_HZ
    phases, sizes = np.array((0.3, 1.7, -2.0)), np.array((1.0, 0.5, 0.25))
    samples = (sizes * np.cos(turns[:, np.newaxis] + phases)).astype(np.float32)
    for step in np.split(samples, 4):
        found = analyser.take(step)
    assert found.drive == pytest.approx(np.sqrt(np.sum(sizes**2) / 2.0), rel=1e-3)
    (vector,) = (v for hz, v in found.parts if hz == 40_125.0)
    assert np.abs(vector[:, 0]) == pytest.approx(sizes, rel=0.02)
    assert np.angle(vector[1:, 0] / vector[0, 0]) == pytest.approx(phases[1:] - phases[0], abs=0.01)
