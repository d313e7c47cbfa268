"""Barred cues of whole shows: what `inspect` lists, and forecasts against the very samples."""

from __future__ import annotations

import json
import re
import time
from collections.abc import Iterable
from functools import cache
from pathlib import Path

import numpy as np
import pytest
import soundfile
from support.directsum import Slab, absorption_np_m
from support.running import beamctl
from support.smallshow import CELL_DB, write_show, write_steady_show

from beamctl.files.reader import load_show
from beamctl.guard.travels import travels
from beamctl.host import offline
from beamctl.host.barring import barred, cue_levels
from beamctl.show.events import Confirm, Go, Ready
from beamctl.show.player import Player
from beamctl.show.records import Record
from beamctl.show.show import Show

MARGIN_DB = 10.0
NIGHT_TRAM = Path(__file__).parents[2] / "scenes" / "night-tram"


def quiet(what: str, done: int, of: int) -> None:
    """No progress."""


def changed(show: Path, old: str, new: str) -> Path:
    """The show with one thing in its sheet changed."""
    text = (show / "sheet.toml").read_text()
    assert text.count(old) == 1
    (show / "sheet.toml").write_text(text.replace(old, new))
    return show


def rendered(show: Show, records: Iterable[Record], samples: int) -> np.ndarray:
    """Feeds (n, F) of these records, with no guard."""
    blocks: list[np.ndarray] = []
    offline.render(show, records, samples, lambda block: blocks.append(block.copy()), quiet)
    return np.concatenate(blocks)


class Ears:
    """The middles of a show's seats, before the square of `side` by `side` cells of its rig."""

    def __init__(self, show: Show, side: int) -> None:
        air = show.house.air
        through_air = np.exp(0.3 * absorption_np_m(40e3, air.temperature_c, air.humidity_pct))
        pa_m = 20e-6 * 10.0 ** (CELL_DB / 20.0) * 0.3 * 0.5 * through_air
        square = Slab(
            *((0.0, 0.0, 3.0), 0.0, -17.0, side, side, 0.01, 40e3, 0.009, pa_m),
            *(air.temperature_c, air.humidity_pct),
        )
        self._rate_hz = show.rig.rate_hz
        self._from_below = np.arange(side**2).reshape(side, side)[::-1].ravel()  # a slab's order
        at_m = np.array(list(show.house.seats().values()))
        self._pressure_pa = cache(lambda hz: square.transfer_pa(at_m, hz))

    def loudest_db(self, feeds: np.ndarray) -> float:
        """Carrier-band level of feeds (n, F) at the loudest of them, margin included."""
        lines = np.fft.rfft(feeds[:, self._from_below], axis=0) / len(feeds) * 2.0
        hz = np.fft.rfftfreq(len(feeds), 1.0 / self._rate_hz)
        inside = (hz >= 35_481.34) & (hz < 44_668.36) & (np.abs(lines).max(axis=1) > 1e-6)
        power = sum(
            (
                np.abs(self._pressure_pa(float(hz[n])) @ lines[n]) ** 2
                for n in np.flatnonzero(inside)
            ),
            np.zeros(1),
        )
        return float(10.0 * np.log10(max(power.max(), 1e-30) / 4e-10)) + MARGIN_DB


@pytest.mark.parametrize(("law", "tone_hz"), [("dsb", 1_000), ("ssb", 3_000), ("mam", 2_000)])
def test_the_forecast_is_that_of_the_samples_sent(tmp_path: Path, law: str, tone_hz: int) -> None:
    folder = write_steady_show(tmp_path / "steady", tone_hz)
    show = load_show(changed(folder, 'law = "dsb"', f'law = "{law}"'))
    level = cue_levels(show, quiet)["1"]
    samples = round(1.2 * show.rig.rate_hz)
    records = list(offline.play_through(show, [(0, "1")], samples))
    steady = rendered(show, records, samples)[round(0.7 * show.rig.rate_hz) :]
    sent = Ears(show, 8).loudest_db(steady)
    assert sent - 0.1 <= level.level_db <= sent + 2.0


def any_sheet(rng: np.random.Generator) -> str:
    """Four cues of acts at random on three beams: laws, glides, dips, jumps, reaches, falls."""
    lines = ["format = 1", 'title = "any"']
    lines += [f'[beam.{beam}]\npanel = "square"' for beam in "abc"]
    for ref in range(1, 5):
        lines.append(f'[[cue]]\nref = "{ref}"\ntitle = "any"')
        for _ in range(rng.integers(1, 5)):
            lines.append(f'[[cue.act]]\nbeam = "{rng.choice(list("abc"))}"')
            lines.append(f"at_s = {rng.uniform(0, 0.5):.3f}")
            if rng.random() < 0.15:
                lines.append(f"fall_s = {rng.uniform(0, 0.4):.3f}")
                continue
            if rng.random() < 0.7:
                sound = rng.choice(["tone.wav", "burst.wav"])
                lines.append(f'sound = "{sound}"\nloop = {str(rng.random() < 0.5).lower()}')
                lines.append(f"trim_db = {rng.uniform(-30, -6):.1f}")
            if rng.random() < 0.5:
                lines.append(f'seat = "A{rng.integers(1, 5)}"')
            elif rng.random() < 0.6:
                lines.append(f"azimuth_deg = {rng.uniform(-20, 20):.1f}")
            if rng.random() < 0.4:
                lines.append(f'law = "{rng.choice(["dsb", "root", "ssb", "mam"])}"')
            if rng.random() < 0.3:
                lines.append(f"depth = {rng.uniform(0.2, 1.0):.2f}")
            if rng.random() < 0.3:
                lines.append(f"reach = {rng.choice(['0.5', '2.0'])}")
            lines.append(f"over_s = {rng.choice([0.0, 0.05, 0.3, 1.0])}")
    return "\n".join(lines)


@pytest.mark.parametrize("seed", range(8))
def test_nothing_that_a_sheet_sends_is_louder_than_its_forecast(tmp_path: Path, seed: int) -> None:
    """The sheet played through; every 50 ms of what left against the forecast of its cue."""
    folder = write_show(tmp_path / "small")
    (folder / "sheet.toml").write_text(any_sheet(np.random.default_rng(seed)))
    (folder / "guard.toml").write_text("format = 1\naveraging_s = 0.05\n")
    show = load_show(folder)
    forecast = cue_levels(show, quiet)
    gos = {travel.ref: travel.go for travel in travels(show)}
    apart = round(0.05 * show.rig.rate_hz)
    records: list[Record] = []
    player = Player(show)
    player.sink("sink-open", 0)
    for event in (Ready(), Confirm()):
        records += player.handle(event, 0)
    for ref, go in gos.items():
        records += player.advance(go) + player.handle(Go("", ref), go)
    until = max(gos.values()) + 2 * show.rig.rate_hz
    records += player.advance(until)
    feeds = rendered(show, records, until)[:, :16]
    ears = Ears(show, 4)
    compared = 0
    for (ref, go), end in zip(gos.items(), [*list(gos.values())[1:], until], strict=True):
        windows = range(go, end - apart, apart // 2)
        sent = max(ears.loudest_db(feeds[s : s + apart]) for s in windows)
        if sent > 40.0:
            assert forecast[ref].level_db >= sent - 0.1, ref
            compared += 1
    assert compared > 0


def test_inspect_lists_barred_cues_with_seat_band_second_and_the_trim_that_fits(
    tmp_path: Path,
) -> None:
    show = changed(write_show(tmp_path / "small"), "trim_db = -24.0", "trim_db = -8.0")
    rig = (show / "rig.toml").read_text()
    (show / "rig.toml").write_text(rig.replace(f"10v = {CELL_DB}", "10v = 115.0"))  # ordinary cells
    done = beamctl("inspect", show)
    assert done.returncode == 1
    (said,) = [line for line in done.stdout.splitlines() if "barred" in line]
    match = re.fullmatch(
        r"warning: sheet\.toml cue 2: barred, over its cap at row A\d by \d+\.\d dB "
        r"\(40 kHz band, 1\d\d\.\d against 100\) \d\.\d s after GO; "
        r"voice at trim (-\d+\.\d) dB fits",
        said,
    )
    assert match, said
    assert [line for line in done.stdout.splitlines() if line.endswith("BARRED")]
    problems = json.loads(beamctl("inspect", show, "--json").stdout)
    assert "cue 2" in {problem["key"] for problem in problems}
    changed(show, "trim_db = -8.0", f"trim_db = {match[1]}")
    assert "barred" not in beamctl("inspect", show).stdout


def test_inspect_warns_of_seats_that_no_panel_faces(tmp_path: Path) -> None:
    show = write_show(tmp_path / "small")
    house = (
        (show / "house.toml").read_text().replace("first_m = [-0.825, 4.5", "first_m = [0, -4.5")
    )
    (show / "house.toml").write_text(house)
    (show / "sheet.toml").write_text(
        re.sub(r'seat = "A\d"', "azimuth_deg = 1.0", (show / "sheet.toml").read_text())
    )
    done = beamctl("inspect", show)
    assert done.returncode == 1
    assert (
        "warning: house.toml seats: 4 behind every panel (row A1, row A2, row A3, …)" in done.stdout
    )
    assert done.stdout.count("nothing is heard") == 4


def test_inspect_tells_of_a_sound_that_cannot_be_prepared(tmp_path: Path) -> None:
    show = write_show(tmp_path / "small")
    soundfile.write(show / "sounds/tone.wav", np.full(9_600, np.nan), 48_000, "FLOAT")
    done = beamctl("inspect", show)
    assert done.returncode == 2
    errors = [line for line in done.stdout.splitlines() if line.startswith("error: sounds: ")]
    assert len(errors) == 1
    assert "tone.wav" in errors[0]


def test_the_shipped_show_has_no_barred_cue_and_is_looked_through_in_seconds() -> None:
    show = load_show(NIGHT_TRAM)
    cue_levels(show, quiet)  # sounds prepared
    began = time.process_time()
    found = cue_levels(show, quiet)
    assert time.process_time() - began < 5.0
    assert list(found) == [cue.ref for cue in show.sheet.cue]
    assert barred(found) == {}
