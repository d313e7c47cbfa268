"""Levels of cues before the show: against direct sums along whole travels."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from support.directsum import Slab, absorption_np_m
from support.rigs import grid
from support.stalls import DEPTH, STALLS, TONE_HZ, cue, levels_of, one_panel, start

from beamctl.guard.bars import unheard
from beamctl.guard.travels import travels
from beamctl.show.limits import Signed
from beamctl.show.rig import Rig
from beamctl.show.sheet import Sheet
from beamctl.show.show import Show

LINES = {0.0: 1.0, TONE_HZ: DEPTH**2 / 4.0, -TONE_HZ: DEPTH**2 / 4.0}  # of dsb
MARGIN_DB = 10.0


def with_slabs(rng: np.random.Generator, count: int, cues: list[Any]) -> tuple[Show, list[Slab]]:
    """A show on random panels "p0", "p1" with a beam each, "b0", "b1"; the panels as slabs too."""
    specs: dict[str, Any] = {}
    cells, slabs = {}, []
    for n in range(count):
        columns, rows = (int(v) for v in rng.integers(6, 12, 2))
        pitch_mm, cell_mm = float(rng.uniform(7.0, 10.0)), float(rng.uniform(5.0, 7.0))
        level_db, carrier_hz = float(rng.uniform(105, 118)), float(rng.uniform(38e3, 42e3))
        at_m = (float(rng.uniform(-2, 2)), float(rng.uniform(-0.5, 0.5)), float(rng.uniform(0, 1)))
        pan_deg, tilt_deg = float(rng.uniform(-10, 10)), float(rng.uniform(-20, -5))
        specs[f"p{n}"] = {
            "at_m": at_m,
            "pan_deg": pan_deg,
            "tilt_deg": tilt_deg,
            "carrier_hz": carrier_hz,
            "grid": {"columns": columns, "rows": rows, "pitch_mm": pitch_mm},
            "volts_at_full_scale": 5.0,
            "max_volts": 7.0,
            "level_db_30cm_10v": level_db,
            "cell_mm": cell_mm,
            "resonance_hz": carrier_hz,
            "q": 1e-3,  # as good as flat: the equaliser leaves the lines as they are
        }
        cells[f"p{n}"] = grid(columns, rows, pitch_mm / 1e3)
        through_air = np.exp(0.3 * absorption_np_m(carrier_hz, 20.0, 50.0))
        pa_m = 20e-6 * 10.0 ** (level_db / 20.0) * 0.3 * 5.0 / 10.0 * through_air
        shape = columns, rows, pitch_mm / 1e3
        slabs.append(Slab(at_m, pan_deg, tilt_deg, *shape, carrier_hz, cell_mm / 1e3, pa_m))
    beams = {f"b{n}": {"panel": f"p{n}"} for n in range(count)}
    sheet = {"format": 1, "title": "test", "beam": beams, "cue": cues}
    show = replace(
        one_panel(),
        rig=Rig.model_validate({"format": 1, "panel": specs}),
        sheet=Sheet.model_validate(sheet),
        cells=cells,
    )
    return show, slabs


def in_head(rng: np.random.Generator, ear_m: np.ndarray) -> np.ndarray:
    """Places (P, 3) spread over the volume within 0.25 m of a point."""
    way = rng.normal(size=(3000, 3))
    way *= 0.25 * rng.random((3000, 1)) ** (1 / 3) / np.linalg.norm(way, axis=1, keepdims=True)
    return np.concatenate((ear_m[None], ear_m + way))


@pytest.mark.parametrize("seed", range(16))
def test_a_travel_is_never_below_the_direct_sum_nor_far_above_the_head(seed: int) -> None:
    rng = np.random.default_rng(seed)
    seats = [str(s) for s in rng.choice([f"{r}{n}" for r in "ABC" for n in range(1, 7)], 2, False)]
    trim_db = float(rng.uniform(-40, -10))
    acts = (
        start("b0", seat=seats[0], trim_db=trim_db),
        {
            "beam": "b0",
            "seat": seats[1],
            "at_s": 0.2,
            "over_s": 3.0,
        },
    )
    show, (slab,) = with_slabs(rng, 1, [cue("1", *acts)])
    level = levels_of(show)["1"]
    places = show.house.seats()
    ears = np.array(list(places.values()))
    a, b = (np.array(places[seat]) for seat in seats)
    aims = a + np.linspace(0.0, 1.0, 400)[:, None] * (b - a)
    gain = 0.5 * 10.0 ** (trim_db / 20.0)
    power = slab.power_pa2(ears, aims, gain, LINES)
    forecast_db = level.level_db - MARGIN_DB
    assert forecast_db >= decibels(power.max()) - 0.5
    heads = np.concatenate([in_head(rng, ear) for ear in ears[np.argsort(-power.max(axis=0))[:3]]])
    hardest = aims[np.argsort(-power.max(axis=1))[:1]]
    ends = np.concatenate((hardest, aims[::40], aims[-1:]))
    assert forecast_db <= decibels(slab.power_pa2(heads, ends, gain, LINES).max()) + 3.0


@pytest.mark.parametrize("seed", range(6))
def test_two_panels_add_at_the_worst_phase(seed: int) -> None:
    rng = np.random.default_rng(100 + seed)
    cues = [
        cue("1", start("b0", seat="B2")),
        cue("2", start("b1", seat="A1"), {"beam": "b1", "seat": "C6", "at_s": 0.2, "over_s": 2.0}),
    ]
    show, slabs = with_slabs(rng, 2, cues)
    level = levels_of(show)["2"]
    places = {name: np.array(at) for name, at in show.house.seats().items()}
    ears = np.array(list(places.values()))
    share = np.linspace(0.0, 1.0, 400)[:, None]
    aims = places["A1"] + share * (places["C6"] - places["A1"])
    gain = 0.5 * 10.0 ** (-25.0 / 20.0)
    still = slabs[0].power_pa2(ears, places["B2"][None], gain, LINES)
    swept = slabs[1].power_pa2(ears, aims, gain, LINES)
    worst = (np.sqrt(still) + np.sqrt(swept)).max() ** 2
    assert level.level_db - MARGIN_DB >= decibels(worst) - 0.5


def decibels(power_pa2: float) -> float:
    return float(10.0 * np.log10(power_pa2 / 4e-10))


def test_what_passes_over_a_near_seat_is_found_at_that_second() -> None:
    house = {
        "block": {
            "stalls": STALLS,
            "near": STALLS | {"first_m": (0.0, 1.6, -0.5), "rows": ("N",), "seats": 1},
        }
    }
    passing = (
        start("a", point_m=(-2.5, 5.0, -1.5)),
        {
            "beam": "a",
            "point_m": (2.5, 5.0, -1.6),
            "at_s": 1.0,
            "over_s": 8.0,
        },
    )
    level = levels_of(one_panel(cue("1", *passing), house=house))["1"]
    assert level.seat == "near N1"
    assert level.at_s == pytest.approx(5.0, abs=0.25)
    ends = [start("a", point_m=point) for point in ((-2.5, 5.0, -1.5), (2.5, 5.0, -1.6))]
    still = [levels_of(one_panel(cue("1", act), house=house))["1"].level_db for act in ends]
    assert level.level_db > max(still) + 6.0


def test_a_measured_rig_never_counts_louder() -> None:
    rng = np.random.default_rng(7)
    for _ in range(8):
        q, resonance_hz = float(rng.uniform(2, 60)), float(rng.uniform(37e3, 43e3))
        acts = start("a", seat="B2"), {"beam": "a", "seat": "C5", "at_s": 0.5, "over_s": 2.0}
        bare = one_panel(cue("1", *acts), q=q, resonance_hz=resonance_hz)
        guard = bare.guard.model_copy(update={"signed": Signed(by="v", on="d", digest="seal")})
        signed = replace(bare, guard=guard, seal="seal")
        panel = signed.rig.panel["p"].model_copy(update={"measured": "p.csv"})
        rig = signed.rig.model_copy(update={"panel": {"p": panel}})
        measured = replace(signed, rig=rig)
        tone_hz = float(rng.integers(1, 4)) * 1000.0
        with_file = levels_of(measured, tone_hz)["1"]
        without = levels_of(signed, tone_hz)["1"]
        assert with_file.level_db <= without.level_db - MARGIN_DB + 1e-6


def test_beams_with_one_sound_add_as_pressures_and_share_the_drive() -> None:
    def level(*acts: dict[str, Any]) -> float:
        return levels_of(one_panel(cue("1", *acts), beams=("a", "b", "c")))["1"].level_db

    quiet = [start(beam, seat="B3") for beam in "abc"]
    assert level(*quiet[:2]) - level(quiet[0]) == pytest.approx(6.02, abs=0.01)
    loud = [act | {"trim_db": 0.0} for act in quiet]  # two rests of a half fill the drive
    assert level(*loud) == pytest.approx(level(*loud[:2]), abs=0.01)


def test_a_cue_is_looked_at_with_what_sounds_on_from_the_cues_before() -> None:
    hum, whisper = cue("1", start("a", seat="B3")), cue("2", start("b", seat="B4"))
    after = levels_of(one_panel(hum, whisper))["2"]
    alone = levels_of(one_panel(whisper))["2"]
    assert after.level_db > alone.level_db + 0.3
    fallen = levels_of(one_panel(hum, cue("1.5", {"beam": "a", "fall_s": 0.5}), whisper))["2"]
    assert fallen.level_db == pytest.approx(alone.level_db, abs=1e-6)


def test_a_follow_on_is_looked_at_at_its_own_second() -> None:
    first = cue("1", start("a", seat="B3"), {"beam": "a", "seat": "B4", "at_s": 1.0, "over_s": 4.0})
    followed = first | {"then": "2", "then_at_s": 3.0}
    second = cue("2", start("b", seat="C2", trim_db=-20.0))
    show = one_panel(followed, second)
    whole = {travel.ref: travel for travel in travels(show)}
    assert whole["2"].go - whole["1"].go == 3 * show.rig.rate_hz
    assert {source.beam for step in whole["1"].steps for source in step.sources} == {"a"}
    assert {source.beam for step in whole["2"].steps for source in step.sources} == {"a", "b"}
    (moving,) = whole["2"].before.sources
    assert moving.place[:3] != whole["1"].steps[-1].sources[0].place[:3]
    assert levels_of(show)["1"] == levels_of(one_panel(first))["1"]


def test_no_step_turns_a_lobe_by_more_than_a_quarter() -> None:
    acts = start("a", seat="A1"), {"beam": "a", "seat": "A6", "at_s": 0.1, "over_s": 1.5}
    (travel,) = travels(one_panel(cue("1", *acts)))
    places = [step.sources[0].place for step in travel.steps if step.sources]
    turns = [np.linalg.norm(np.subtract(a[:3], b[:3])) for a, b in pairwise(places)]
    lobe = 343.0 / 40e3 / (2.0 * np.hypot(0.035, 0.035))
    assert max(turns) <= 0.26 * lobe
    assert sum(turns) > 2.0 * lobe  # it did travel


def test_without_listeners_nothing_is_found() -> None:
    assert levels_of(one_panel(cue("1", start("a", azimuth_deg=0.0)), house={"block": {}})) == {}


def test_a_cue_that_sounds_nothing_has_no_level() -> None:
    assert levels_of(one_panel(cue("1", {"beam": "a", "depth": 0.5}))) == {}


def test_seats_behind_every_panel_are_told() -> None:
    behind = STALLS | {"first_m": (0.0, -3.0, 0.0), "rows": ("X",), "seats": 2}
    house = {"block": {"stalls": STALLS, "choir": behind}}
    assert unheard(one_panel(house=house)) == ("choir X1", "choir X2")
    assert unheard(one_panel()) == ()
    assert unheard(one_panel(house={"block": {}})) == ()
