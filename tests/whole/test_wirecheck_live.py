"""The wiring check with keys on a terminal, judged by the samples that left and the files."""

from __future__ import annotations

import time
from pathlib import Path

import numpy as np
import pytest
import soundfile
from support.person import begin, files_in, mark, measured, person
from support.running import host
from support.smallshow import CELL_DB, RATE_HZ, write_show

from beamctl.files.measurement import read_measurement

DRIVE = 0.01  # 40 dB under full scale
BUDGET_S = 90.0 / 64.0  # for a feed


@pytest.fixture
def show(tmp_path: Path) -> Path:
    return write_show(tmp_path / "small")


def test_nothing_sounds_before_the_word(show: Path, tmp_path: Path) -> None:
    take = tmp_path / "take.wav"
    before = files_in(show)
    with person(show, "--sink", f"file:{take}") as who:
        who.wait_for("Keep heads out of the beam near a panel")
        who.wait_for("at row A2, the nearest seat")
        who.wait_for('Type "sound" to let it sound')
        who.type("go\n")
        assert who.ends() == 4
    assert "nothing sounded and nothing is written" in who.seen
    assert not take.exists()
    assert not take.with_name("take.wav.part").exists()
    assert files_in(show) == before


def test_feeds_are_stepped_through_and_marked(show: Path, tmp_path: Path) -> None:
    take = tmp_path / "take.wav"
    with person(show, "--sink", f"file:{take}", "--panel", "strip", "--by", "Ann") as who:
        begin(who)
        began_s = time.monotonic()
        mark(who, "p")
        mark(who, "b", "p")  # back to the first, which is the reference
        mark(who, "s", "e")
        who.wait_for("loudest at the place of feed: ")
        who.type("20\n")  # 0 is text here
        mark(who, "d")
        who.wait_for("alone, dB: ")
        who.type("50.5\n")
        who.wait_for("with the reference, dB: ")
        who.type("44\n")
        who.wait_for("WIRING CHECK")
        spent_s = time.monotonic() - began_s
        assert who.ends() == 1
    assert spent_s / 6 < BUDGET_S, f"{spent_s:.1f} s for six looks"
    _, found = measured(show)
    assert found.reference == 18
    assert [(f.feed, f.found, f.heard_at) for f in found.feed] == [
        (17, ("dead",), None),
        (18, (), 18),
        (19, ("moved",), 20),
        (20, ("reversed",), 20),
    ]
    assert "a rehearsal: nothing sounds from file:" in who.seen
    assert not found.passes
    _check_take(take)


def _check_take(take: Path) -> None:
    """One feed or two at a time, the reference being one of two, at the drive, and none else."""
    samples, rate_hz = soundfile.read(take, dtype="float32")
    assert rate_hz == RATE_HZ
    assert not samples[:, :16].any(), "another panel sounded"
    assert np.max(np.abs(samples)) < DRIVE * 1.001
    step = RATE_HZ // 50
    whole = len(samples) // step * step
    blocks = np.sqrt(np.mean(samples[:whole].reshape(-1, step, 20) ** 2, axis=1))
    steady = blocks > 0.99 * DRIVE / np.sqrt(2.0)
    sets = {tuple((1 + np.flatnonzero(row)).tolist()) for row in steady}
    assert sets == {(), (17,), (18,), (19,), (20,), (17, 18), (18, 19), (18, 20)}
    alone = samples[np.flatnonzero(steady[:, 17] & (steady.sum(axis=1) == 1))[1] * step :][:step]
    spectrum = np.abs(np.fft.rfft(alone[:, 17].astype(np.float64)))
    assert np.argmax(spectrum) * RATE_HZ / step == 40_000.0
    ends = np.flatnonzero(np.any(samples != 0.0, axis=1))[-1]
    assert ends < len(samples) - 1, "it did not end in silence"


def test_a_seat_that_would_get_too_much_keeps_the_check_away(show: Path) -> None:
    house = show / "house.toml"
    house.write_text(house.read_text().replace("[-0.825, 4.5, 1.2]", "[0.0, 0.5, 2.9]"))
    rig = show / "rig.toml"
    rig.write_text(
        rig.read_text()
        .replace("volts_at_full_scale = 5.0", "volts_at_full_scale = 50.0")
        .replace("max_volts = 7.0", "max_volts = 70.0")
        .replace(f"10v = {CELL_DB}", "10v = 115.0")
    )
    with person(show) as who:
        assert who.ends() == 2
    assert "at row A1, over its cap of 100 dB" in who.seen
    assert "Type" not in who.seen


def test_a_house_without_seats_needs_a_name(show: Path) -> None:
    (show / "house.toml").write_text("format = 1\n")
    sheet = show / "sheet.toml"
    sheet.write_text(
        sheet.read_text().replace('seat = "A', 'azimuth_deg = 0.0 # "').replace("\nthen", "\n#")
    )
    with person(show) as who:
        assert who.ends() == 2
    assert "the house has no seat to judge the level by" in who.seen
    with person(show, "--by", "Ann") as who:
        who.wait_for("There is no seat to judge the level by: Ann answers for it.")
        who.wait_for("A rehearsal: nothing sounds from null")
        who.wait_for('Type "sound"')


def test_every_panel_is_stepped_through_and_may_be_swapped_with_another(show: Path) -> None:
    rig = show / "rig.toml"
    rig.write_text(rig.read_text().replace("columns = 4, rows = 4", "columns = 2, rows = 1"))
    with person(show, "--by", "Ann") as who:
        begin(who)
        for place in ("", "18", "2", "", "", ""):  # feeds 1, 2, then 18, the strip's first
            who.wait_for("  feed ")
            time.sleep(0.8)
            who.type("e" if place else "p")
            if place:
                who.wait_for("loudest at the place of feed: ")
                who.type(f"{place}\n")
        assert who.ends() == 1
    found = {path.name.split("-")[0]: path for path in (show / "measured").glob("*.toml")}
    square, strip = (read_measurement(found[name]) for name in ("square", "strip"))
    assert [(f.feed, f.found) for f in square.feed] == [(1, ()), (2, ("swapped",))]
    assert [(f.feed, f.found) for f in strip.feed] == [
        (17, ()),
        (18, ("swapped",)),
        (19, ()),
        (20, ()),
    ]
    assert (square.reference, strip.reference) == (1, 19)
    for path in found.values():
        assert "Re-plug feeds " in path.with_suffix(".txt").read_text()


def test_a_held_key_marks_one_feed(show: Path) -> None:
    with person(show, "--panel", "strip") as who:
        begin(who)
        mark(who, "p")
        for _ in range(40):  # as a terminal repeats a key, after its first pause
            time.sleep(0.035)
            who.type("p")
        who.wait_for("  feed ")
        who.read(0.5)
        assert who.seen.count("pass\r\n") == 1


def test_a_host_that_runs_the_show_keeps_the_check_away(show: Path, tmp_path: Path) -> None:
    with host(show, "null", tmp_path / "log.jsonl"), person(show) as who:
        assert who.ends() == 4
    assert "a host runs this show" in who.seen
    assert "Type" not in who.seen
