"""One act seen in the room: aims, peaks, bounces, second beams, levels at the ends."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from support.forecasting import HZ, panel_show, radiator
from support.stalls import STALLS

from beamctl.files.reader import load_show
from beamctl.forecast.acts import after, before
from beamctl.forecast.panel import in_air
from beamctl.forecast.sight import Sight, Sights
from beamctl.show.house import AirSpec
from beamctl.show.settled import Settled
from beamctl.show.targets import Target

SHOW = load_show(Path(__file__).parents[2] / "scenes" / "night-tram")
SIGHTS = Sights(SHOW)


def sight(ref: str, number: int = 0) -> Sight:
    act = SHOW.sheet.cue[SHOW.sheet.position(ref)].act[number]
    state = after(SHOW, before(SHOW, ref, number), act)
    return SIGHTS.look(act.beam, SHOW.panel_of(act.beam), state)


def test_a_beam_at_a_seat_is_aimed_there_peaks_there_and_lands_there() -> None:
    seen = sight("2")
    assert seen.target_m == pytest.approx(SHOW.house.seats()["B4"])
    assert seen.peak_deg == pytest.approx(seen.aim_deg, abs=0.1)
    assert seen.landing.at == "benches B4"
    assert seen.landing.way_m[-1] == pytest.approx(seen.target_m, abs=0.05)


def test_a_bounce_is_aimed_at_the_seat_and_comes_off_the_wall() -> None:
    seen = sight("4")
    assert seen.target_m == pytest.approx(SHOW.house.seats()["C3"])
    assert (seen.landing.off, seen.landing.at) == ("back_wall", "benches C3")
    assert seen.consequence.target is not None
    assert seen.consequence.target.name == "benches C3"


def test_plain_angles_count_where_they_land() -> None:
    seen = sight("1")
    assert seen.target_m is None
    assert seen.landing.at == "benches B4"
    assert seen.target_db == seen.peak_db


def test_a_wide_aim_is_pulled_toward_the_axis_and_its_second_beam_nearly_as_loud() -> None:
    seen = sight("3", 1)
    assert 0.1 < seen.aim_deg[0] - seen.peak_deg[0] < 0.5
    second = seen.seconds[0]
    assert second.lobe.azimuth_deg == pytest.approx(-28.8, abs=0.5)
    assert -2.0 < second.lobe.over_first_db < 0.0
    assert second.landing.at == "the floor"


def test_a_loom_of_columns_points_straight_where_it_cannot_steer() -> None:
    seen = sight("6", 1)
    assert seen.steers == (True, False)
    assert seen.aim_deg[1] == pytest.approx(0.9, abs=0.1)
    assert seen.peak_deg[1] == pytest.approx(0.0, abs=0.05)


def test_levels_at_the_ends_by_an_independent_sum() -> None:
    show = panel_show(8, 8, 10.0, house={"block": {"stalls": STALLS}}, tilt_deg=-12.0)
    state = Settled(trim_db=-20.0, target=Target("", direction=(0.3, np.sqrt(0.91), 0.0)))
    seen = Sights(show).look("a", "p", state)
    ends = np.array([seen.landing.way_m[-1], *(s.landing.way_m[-1] for s in seen.seconds)])
    panel = radiator(show)
    phase = 2.0 * np.pi * HZ * (panel.cells_m[:, 0] * 0.3) / panel.medium.speed_m_s
    pressure = panel.transfers_pa(ends, np.array([HZ]))[0] @ (0.05 * np.exp(-1j * phase))
    expected = 20.0 * np.log10(np.abs(pressure) / 20e-6)
    found = [seen.peak_db, *(second.level_db for second in seen.seconds)]
    assert found == pytest.approx(expected.tolist(), abs=0.05)


def test_a_focus_adds_level_near_and_nothing_far() -> None:
    show = panel_show(12, 12, 10.0)
    near, far = (
        Sights(show).look("a", "p", Settled(reach="aim", target=Target("", (0.0, away_m, 0.0))))
        for away_m in (1.0, 12.0)
    )
    plain = Sights(show).look("a", "p", Settled(target=Target("", (0.0, 1.0, 0.0))))
    print(f"focused at 1 m: {near.focus_db:+.2f} dB, at 12 m: {far.focus_db:+.2f} dB")
    assert plain.focus_db == 0.0
    assert near.focus_db != pytest.approx(0.0, abs=0.3)
    assert near.target_db - plain.target_db == pytest.approx(
        direct_db(show, 1.0) - direct_db(show, 0.0), abs=0.05
    )
    assert far.target_db < near.target_db


def direct_db(show, per_m: float) -> float:
    """At 1 m on the axis, focused or not, by the independent sum."""
    panel = radiator(show)
    focus = np.array((0.0, 1.0 / per_m if per_m else 1.0, 0.0))
    drive = panel.phasors(focus, per_m > 0.0, np.array([HZ]))[0]
    heard = panel.transfers_pa(np.array([(0.0, 1.0, 0.0)]), np.array([HZ]))[0] @ drive
    return float(20.0 * np.log10(abs(heard[0])))


def test_more_air_takes_more() -> None:
    """At 40 kHz and 20 °C, 30 % of humidity take 1.068 dB a metre and 60 % take 1.321 (ISO 9613-1);
    the panel is as strong as its data sheet says through 0.3 m of either."""
    levels = []
    for humidity_pct in (30.0, 60.0):
        show = in_air(SHOW, AirSpec(temperature_c=20.0, humidity_pct=humidity_pct))
        seen = Sights(show).look("whisper", "prow", Settled(target=Target("", (0.0, 6.0, 0.0))))
        levels.append(seen.target_db)
    assert levels[0] - levels[1] == pytest.approx((1.3214 - 1.0679) * 5.7, abs=0.1)
