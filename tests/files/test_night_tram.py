"""The show that ships: it reads clean, shows every tool once, and its sounds can be made again."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
import soundfile as sf

from beamctl.files.reader import load_show, read_show
from beamctl.show.sheet import Act

SCENE = Path(__file__).parents[2] / "scenes" / "night-tram"
SOUNDS = SCENE / "sounds"
LSB = 2.0**-15


def test_it_reads_with_no_warning_but_the_signature() -> None:
    show, problems = read_show(SCENE)
    assert show is not None
    assert [(p.file, p.severity) for p in problems] == [("guard.toml", "warning")]
    assert "unsigned" in problems[0].what


def test_it_shows_every_law_reach_and_way_to_aim() -> None:
    show = load_show(SCENE)
    acts = [act for cue in show.sheet.cue for act in cue.act]
    assert {act.law for act in acts} >= {"dsb", "root", "ssb", "mam"}
    assert {type(act.reach) for act in acts} >= {str, float}
    assert {act.reach for act in acts} >= {"far", "aim"}
    ways: list[str] = ["seat", "spot", "point_m", "azimuth_deg", "via", "fall_s"]
    assert all(any(getattr(act, way) is not None for act in acts) for way in ways)
    assert any(act.loop for act in acts)
    assert any(cue.then for cue in show.sheet.cue)
    assert {show.panel_of(act.beam) for act in acts} == {"prow", "lantern"}
    assert {"4.5", "6A"} <= {cue.ref for cue in show.sheet.cue}


def test_a_beam_gets_its_sound_with_an_aim_and_a_trim_first() -> None:
    first: dict[str, Act] = {}
    for cue in load_show(SCENE).sheet.cue:
        for act in cue.act:
            first.setdefault(act.beam, act)
    for act in first.values():
        assert act.sound is not None
        assert act.aims
        assert act.trim_db is not None


def test_its_sounds_are_short_and_small() -> None:
    show = load_show(SCENE)
    assert sum(facts.seconds for facts in show.sounds.values()) < 25.0
    assert {(facts.rate_hz, facts.channels) for facts in show.sounds.values()} == {(48_000, 1)}
    assert sum(path.stat().st_size for path in SOUNDS.glob("*.flac")) < 1_500_000
    assert {path.name for path in SOUNDS.glob("*.flac")} == set(show.sounds)


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder of sounds freshly made by the script."""
    folder = tmp_path_factory.mktemp("sounds")
    subprocess.run([sys.executable, SOUNDS / "make.py", folder], check=True, capture_output=True)
    return folder


@pytest.mark.parametrize("path", sorted(SOUNDS.glob("*.flac")), ids=lambda path: path.stem)
def test_the_script_makes_the_sounds_that_ship(made: Path, path: Path) -> None:
    ships, rate_hz = sf.read(path)
    again, _ = sf.read(made / path.name)
    assert len(again) == len(ships)
    assert np.max(np.abs(again - ships)) <= 2.0 * LSB
    assert np.max(np.abs(ships)) == pytest.approx(0.5, abs=2.0 * LSB)
    spectrum = np.abs(np.fft.rfft(ships)) ** 2
    hz = np.fft.rfftfreq(len(ships), 1.0 / rate_hz)
    assert np.sum(spectrum[hz < 400.0]) < 0.02 * np.sum(spectrum)


@pytest.mark.parametrize("name", ["hum", "tick"])
def test_loops_join_end_to_start(name: str) -> None:
    sound, _ = sf.read(SOUNDS / f"{name}.flac")
    steps = np.abs(np.diff(sound))
    assert abs(sound[0] - sound[-1]) <= np.max(steps)
    assert name == "hum" or max(abs(sound[0]), abs(sound[-1])) <= 2.0 * LSB
