"""Edits of a running host: heard at once where only cues differ, by another engine where more does.

Real hosts: what is refused changes nothing, what was edited, undone, started anew and saved replays
to the very samples, and a show that was locked is locked when its host comes back.
"""

from __future__ import annotations

import os
import signal
from pathlib import Path

import numpy as np
import pytest
import soundfile
from click.testing import CliRunner
from support.blows import guard_of
from support.editing import LOWER_DB, TRIM_DB, another_panel, ask, edit, looked, started_anew, trim
from support.guardlive import changed
from support.hearing import MARGIN_S, heard_below, spectra_of
from support.running import Running, host, told, wait_for
from support.smallshow import FEEDS, RATE_HZ, write_show

from beamctl.cli import main
from beamctl.commands.joining import start_host
from beamctl.files.reader import load_show
from beamctl.host import offline
from beamctl.host.link import Link
from beamctl.show.edits import Rename, Set

HEARD_S = 0.5
CLICK_DB = -80.0  # what a feed carries below 18 kHz, re its peak
MARGIN = round(MARGIN_S * RATE_HZ)
TILT = Set("rig.toml", ("panel", "square"), "tilt_deg", -16.0)
AIR = {"temperature_c": 25.0, "humidity_pct": 40.0, "pressure_kpa": 100.0}


@pytest.fixture
def show(tmp_path: Path) -> Path:
    return write_show(tmp_path / "small")


def same_again(journal: Path, streams: int) -> None:
    """Every stream of a journal must replay to the samples that left."""
    outcomes = offline.replay(offline.recall(journal), lambda _: None, lambda *_: None)
    assert [outcome.same for outcome in outcomes] == [True] * streams


# -- while it sounds ------------------------------------------------------------------------------


def test_an_edit_is_heard_and_undone_and_locked_out(show: Path, tmp_path: Path) -> None:
    take, journal = tmp_path / "take.wav", tmp_path / "take.jsonl"
    with host(show, f"file:{take}", journal) as running:
        before = running.link.draft()
        running.open()
        running.act("go", ref="1")
        running.pass_by(0.3)
        asked = running.snapshot().engine.rendered
        edit(running, trim("1", LOWER_DB))
        answer = running.link.act("go", ref="2")
        assert (answer.reason, "being looked at" in answer.text) == ("barred", True)
        running.pass_by(0.4)
        refused_edits_change_nothing(running)
        undone_and_done_again(running)
        looked(running)
        running.act("go", ref="2")
        cannot_be_edited_in_show(running)
        answer = running.link.history("save")
        assert answer.done, answer.text
        after = running.link.draft()
        assert running.snapshot().edit.unsaved == 0
        assert running.stop() == 0

    _, down, up, again = (r for r in told(journal, "level") if r.cue == "1")
    assert down.sample + down.args["n"] - asked < HEARD_S * RATE_HZ
    gain = loudness(take, down.sample + down.args["n"]) / loudness(take, down.sample - 30_000)
    assert 20.0 * np.log10(gain) == pytest.approx(LOWER_DB - TRIM_DB, abs=0.2)
    for record in (down, up, again):
        assert clicks_db(take, record.sample, record.args["n"]) < CLICK_DB

    assert (before.version, before.remarks, before.files) == (1, (), ("burst.wav", "tone.wav"))
    assert before.saved == before.texts
    assert after.saved == after.texts != before.texts
    assert load_show(show).sheet == after.show.sheet
    assert after.show.sheet.cue[0].act[0].trim_db == LOWER_DB
    assert (show / "sheet.toml~").read_text() == before.texts["sheet.toml"]
    same_again(journal, 1)


def refused_edits_change_nothing(running: Running) -> None:
    draft = running.link.draft()
    for reason, step in (
        ("bad-type", trim("1", 5.0)),
        ("bad-type", trim("77", -30.0)),
        ("bad-type", Set("../sheet.toml", (), "title", "outside")),
        ("busy", TILT),
    ):
        answer = ask(running, step)
        assert (answer.done, answer.reason) == (False, reason), answer.text
    assert running.link.draft().texts == draft.texts
    assert running.link.draft().version == running.snapshot().sheet_version == draft.version


def undone_and_done_again(running: Running) -> None:
    for what, trim_db in (("undo", TRIM_DB), ("redo", LOWER_DB)):
        answer = running.link.history(what)
        assert answer.done, answer.text
        running.pass_by(0.3)
        assert running.snapshot().beams[0].level_db == pytest.approx(trim_db)
    assert not running.link.history("redo").done
    found = running.snapshot().edit
    assert (found.undo, found.unsaved, found.edited) == ("1 steps", 1, ("1",))


def cannot_be_edited_in_show(running: Running) -> None:
    running.act("mode", to="SHOW", word="show")
    for answer in (ask(running, trim("1", -30.0)), running.link.history("undo")):
        assert (answer.done, answer.reason) == (False, "locked")
    assert running.link.act("mode", to="WRITE", word="open", name="Ada").reason == "locked"
    assert running.snapshot().mode == "SHOW"
    running.act("mode", to="WRITE", word="unlock", name="Ada")


def clicks_db(take: Path, at: int, n: int) -> float:
    """The most that any feed carries below 18 kHz around a glide, re the largest sample there."""
    first, last = at - RATE_HZ // 50 - MARGIN, at + n + RATE_HZ // 50 + MARGIN
    samples, _ = soundfile.read(take, dtype="float64", start=first, stop=last)
    low = heard_below(spectra_of(samples.T), RATE_HZ, 18_000.0, 22_400.0)
    most = np.abs(low[:, MARGIN // 2 : -(MARGIN // 2)]).max()
    return float(20.0 * np.log10(most / np.abs(samples).max() + 1e-12))


def loudness(take: Path, at: int) -> float:
    """Root mean square of the tenth of a second from a sample on, all feeds."""
    samples, _ = soundfile.read(take, dtype="float64", start=at, frames=RATE_HZ // 10)
    return float(np.sqrt(np.mean(samples**2)))


# -- another engine -------------------------------------------------------------------------------


def test_a_locked_show_outlives_its_host_and_a_new_panel_its_engine(
    show: Path, tmp_path: Path
) -> None:
    changed(show, "rig.toml", "level_db_30cm_10v = 95.0", "level_db_30cm_10v = 115.0")
    journal = tmp_path / "take.jsonl"
    lock_and_kill(show, tmp_path / "killed.jsonl")
    with host(show, "null", journal) as running:
        is_still_locked(running)
        dose_pct = a_tripped_show_is_edited(running)
        has_lost_nothing(running, dose_pct)
        running.act("clear", word="clear")
        running.open()
        running.act("go", ref="9")
        running.pass_by(0.2)
        edit(running, Rename("sheet.toml", ("cue", "9"), "10"))
        assert running.snapshot().states["10"] == "running"
        assert running.link.act("air", **AIR).reason == "busy"
        assert running.stop() == 0

    same_again(journal, 2)
    assert [r.args["temperature_c"] for r in told(journal, "air")] == [20.0, 25.0]
    assert [record.args["mode"] for record in told(journal, "edit")] == ["WALK", "WALK"]
    modes = [(record.args["to"], record.args["name"]) for record in told(journal, "mode")]
    assert modes == [("SHOW", ""), ("WALK", "Ada")]
    done = CliRunner().invoke(main, ["replay", str(journal), "-o", str(tmp_path / "again.wav")])
    assert done.exit_code == 2
    assert f"{FEEDS} feeds at 192000 Hz, then {FEEDS + 4} feeds" in done.output


def lock_and_kill(show: Path, journal: Path) -> None:
    """A host that dies in SHOW, before its engine has even opened a sink."""
    link = Link(show)
    process = start_host(show, "null", journal, link)
    answer = link.act("mode", to="SHOW", word="show")
    assert answer.done, answer.text
    process.kill()
    process.wait()
    link.close()


def is_still_locked(running: Running) -> None:
    assert running.snapshot().mode == "SHOW"
    assert ask(running, trim("1", LOWER_DB)).reason == "locked"
    running.act("mode", to="WALK", word="unlock", name="Ada")


def a_tripped_show_is_edited(running: Running) -> float:
    """A panel is refused while it sounds, and taken up with the air after a trip; the dose."""
    running.act("standby", ref="3")
    running.open()
    running.act("go", ref="1")
    wait_for(lambda: running.snapshot().guard.dose_pct > 0.0, "a dose")
    answer = ask(running, *another_panel("extra", FEEDS + 1))
    assert (answer.reason, answer.text[:10]) == ("busy", "hush first")
    dose_pct = running.snapshot().guard.dose_pct
    os.kill(guard_of(running), signal.SIGKILL)
    wait_for(lambda: running.snapshot().output == "TRIPPED", "TRIPPED")
    edit(running, *another_panel("extra", FEEDS + 1))
    assert running.snapshot().edit.waits
    running.act("air", **AIR)
    started_anew(running, 2)
    return dose_pct


def has_lost_nothing(running: Running, dose_pct: float) -> None:
    found = running.snapshot()
    assert (found.output, found.standby, found.mode) == ("SHUT", "3", "WALK")
    assert (found.engine.feeds, found.panels[2].name) == (FEEDS + 4, "extra")
    assert found.guard.dose_pct >= dose_pct > 0.0
    assert (found.air.temperature_c, found.air.humidity_pct, found.air.source) == (25, 40, "desk")
    assert running.link.act("ready").reason == "tripped"
