"""Which cues are barred, on whose account, in which band, and the trims that fit."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from support.rigs import analytic_tone
from support.stalls import DEPTH, STALLS, TONE_HZ, cue, levels_of, one_panel, start

from beamctl.acoustics.bands import band_at
from beamctl.guard.bars import Bar, bars
from beamctl.guard.field import Field
from beamctl.guard.travels import Programme
from beamctl.host.barring import barred, sheet_powers
from beamctl.show.events import Confirm, Go, Ready
from beamctl.show.player import Player
from beamctl.show.show import Show
from beamctl.show.standing import GUARDED


def bars_of(show: Show) -> dict[str, Bar]:
    """Bars of a show whose only sound is a tone."""
    sounds = {panel: {"tone": analytic_tone(TONE_HZ, 0.5)} for panel in show.rig.panel}
    return bars(show, Field(show), sheet_powers(show, sounds))


def trimmed(acts: list[dict[str, Any]], beam: str, trim_db: float) -> list[dict[str, Any]]:
    """The acts with every trim of one beam held to a figure."""
    return [
        act | {"trim_db": min(act["trim_db"], trim_db)}
        if act["beam"] == beam and "trim_db" in act
        else act
        for act in acts
    ]


@pytest.mark.parametrize("seed", range(12))
def test_the_trim_fits_and_a_fifth_of_a_decibel_more_does_not(seed: int) -> None:
    rng = np.random.default_rng(seed)
    a, b, c = (str(s) for s in rng.choice([f"{r}{n}" for r in "ABC" for n in range(1, 7)], 3))
    acts = [
        start("a", seat=a, trim_db=float(rng.uniform(-22, -12))),
        start("b", seat=b, trim_db=float(rng.uniform(-45, -35)), at_s=0.4, law="ssb"),
        {"beam": "a", "seat": c, "at_s": 0.5, "over_s": 2.0},
        {"beam": "a", "trim_db": float(rng.uniform(-22, -10)), "at_s": 1.0, "over_s": 1.0},
    ]
    bar = bars_of(one_panel(cue("1", *acts)))["1"]
    assert bar.beam == "a"
    assert bar.level_db > bar.cap_db
    assert bar.trim_fits_db is not None
    assert bars_of(one_panel(cue("1", *trimmed(acts, "a", bar.trim_fits_db)))) == {}
    more = trimmed(acts, "a", bar.trim_fits_db + 0.2)
    assert list(bars_of(one_panel(cue("1", *more)))) == ["1"]


def test_where_no_trim_of_the_loudest_beam_fits_none_is_offered() -> None:
    acts = [start("a", seat="B3", trim_db=-10.0), start("b", seat="B3", trim_db=-11.0)]
    bar = bars_of(one_panel(cue("1", *acts)))["1"]
    assert (bar.beam, bar.trim_fits_db) == ("a", None)
    assert bar.text.endswith("no trim of a alone fits")


def test_the_words_of_a_bar() -> None:
    bar = Bar("7", "stalls B4", 31_500.0, 103.2, 100.0, 2.44, "whisper", -25.3)
    assert bar.text == (
        "over its cap at stalls B4 by 3.2 dB (31.5 kHz band, 103.2 against 100) "
        "2.4 s after GO; whisper at trim -25.3 dB fits"
    )


def test_a_seat_found_over_its_cap_is_on_the_account_of_the_cue_that_made_it_so() -> None:
    loud, quiet = start("a", seat="B3", trim_db=-15.0), start("b", seat="B3", trim_db=-60.0)
    falls = cue("3", {"beam": "a", "fall_s": 1.0})
    louder = cue("4", start("a", seat="B3", trim_db=-10.0))
    show = one_panel(cue("1", loud), cue("2", quiet), falls, louder)
    assert list(bars_of(show)) == ["1", "4"]
    assert levels_of(show)["2"].margin_db < 0.0
    more = one_panel(cue("1", loud), cue("2", start("b", seat="B3", trim_db=-20.0)))
    assert bars_of(more)["2"].trim_fits_db is None  # that of cue 1 comes first


def test_a_follow_on_over_its_cap_does_not_bar_the_cue_that_calls_it() -> None:
    first = cue("1", start("a", seat="B3", loop=False), then="2", then_at_s=0.2)
    assert list(bars_of(one_panel(first, cue("2", start("b", seat="C2", trim_db=-5.0))))) == ["2"]


def test_crew_points_have_the_crew_s_cap() -> None:
    def house(kind: str) -> dict[str, Any]:
        return {"block": {"stalls": STALLS | {"class": kind}}}

    between = cue("1", start("a", seat="B3", trim_db=-16.0))
    assert list(bars_of(one_panel(between, house=house("seats")))) == ["1"]
    assert bars_of(one_panel(between, house=house("crew"))) == {}


def test_what_falls_into_the_band_below_is_held_to_that_band_s_stricter_cap() -> None:
    """A 25 kHz carrier with audio above 2.61 kHz; its lower sideband enters the 20 kHz band."""

    def powers(audio_hz: float) -> Any:
        def of(panel: str, programme: Programme) -> NDArray[np.float64]:
            lines = {0.0: 1.0, audio_hz: DEPTH**2 / 4.0, -audio_hz: DEPTH**2 / 4.0}
            found = np.zeros(len(GUARDED))
            for offset_hz, power in lines.items():
                band = band_at(25_000.0 + offset_hz)
                assert band is not None
                found[GUARDED.index(band)] += power
            return found

        return of

    show = one_panel(
        cue("1", start("a", seat="B3", trim_db=-30.0)), carrier_hz=25e3, resonance_hz=25e3
    )
    field = Field(show)
    assert bars(show, field, powers(2_600.0)) == {}
    bar = bars(show, field, powers(2_650.0))["1"]
    assert (bar.band_hz, bar.cap_db) == (20_000.0, 70.0)
    assert bar.trim_fits_db == pytest.approx(-30.0 - (bar.level_db - 70.0), abs=0.11)


def test_the_player_refuses_a_barred_cue_and_says_what_fits() -> None:
    fine, loud = start("b", seat="A1", trim_db=-40.0), start("a", seat="B3", trim_db=-10.0)
    show = one_panel(cue("1", fine), cue("2", loud))
    player = Player(show, barred=barred(levels_of(show)))
    player.sink("sink-open", 0)
    for event in (Ready(), Confirm()):
        player.handle(event, 0)
    (refused,) = player.handle(Go(ref="2"), 10)
    assert refused.args["reason"] == "barred"
    assert "a at trim -" in refused.args["text"]
    assert refused.args["text"].endswith("dB fits")
    assert player.handle(Go(ref="1"), 20)[0].what == "go"
