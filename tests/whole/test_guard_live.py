"""What the guard makes of bad files, of edits under a running host, and of cues that are too much.

Real hosts on the null sink, and every command that opens a show.
"""

from __future__ import annotations

import math
import os
import re
import signal
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pytest
from support.blows import engine_of, guard_of
from support.guardlive import changed, too_much_together, without_seats
from support.running import Running, beamctl, host, outputs, replayed, told, wait_for
from support.smallshow import write_show

HELD_WITHIN_DB = 0.5  # of what is over the cap: ceilings go by steps of 0.25 dB, a little under it
LEFT_DB = 1.0  # to the cap, of each of two cues that pass it together
LOOSER = """format = 1
seats_table = "health-canada-1991"
seats_db = 115.0
crew_db = 115.0
averaging_s = 60.0
uncalibrated_margin_db = 0.0
"""


@pytest.fixture
def show(tmp_path: Path) -> Path:
    return write_show(tmp_path / "small")


# -- files ------------------------------------------------------------------------------------

# name: file, what is in it, and the one line that every command says of it
BAD = {
    "a negative cap": (
        "guard.toml",
        ("format = 1", "format = 1\nseats_db = -3.0"),
        "guard.toml:2 seats_db: -3.0, expected a number from 0 to 115",
    ),
    "a cap that is no number": (
        "guard.toml",
        ("format = 1", "format = 1\ncrew_db = nan"),
        "guard.toml:2 crew_db: nan, expected a number from 0 to 115",
    ),
    "a cap over the hard ceiling": (
        "guard.toml",
        ("format = 1", "format = 1\nseats_db = 115.1"),
        "guard.toml:2 seats_db: 115.1, expected a number from 0 to 115",
    ),
    "an unknown table": (
        "guard.toml",
        ("format = 1", 'format = 1\nseats_table = "irpa-1984-publik"'),
        'guard.toml:2 seats_table: "irpa-1984-publik", expected "irpa-1984-public"',
    ),
    "a level that is no number": (
        "rig.toml",
        ("level_db_30cm_10v = 95.0\ncell_mm = 9.0\nresonance_hz = 40000.0\nq = 20.0\n\n",
         "level_db_30cm_10v = nan\ncell_mm = 9.0\nresonance_hz = 40000.0\nq = 20.0\n\n"),
        "rig.toml:9 panel square level_db_30cm_10v: nan, expected a number",
    ),
}  # fmt: skip


@pytest.mark.parametrize("case", BAD)
def test_every_command_refuses_it_in_one_line(show: Path, case: str) -> None:
    file, (old, new), said = BAD[case]
    changed(show, file, old, new)
    commands = {
        "inspect": ["inspect", show],
        "render": ["render", show, "--for", "1", "-o", show.parent / "out.wav"],
        "host": ["host", show],
        "desk": ["desk", show],
        "sign": ["sign", show, "--by", "M. Rail", "--word", "sign"],
    }
    with ThreadPoolExecutor(2) as pool:
        ran = dict(zip(commands, pool.map(lambda c: beamctl(*c), commands.values()), strict=True))
    for command, done in ran.items():
        assert done.returncode == 2, command
        lines = [line.strip() for line in (done.stdout + done.stderr).splitlines()]
        errors = [line.removeprefix("error: ") for line in lines if not line.startswith("warning")]
        found = [line for line in errors if file in line]
        assert len(found) == 1, (command, lines)
        assert found[0].startswith(said), command
        assert "Traceback" not in done.stdout + done.stderr


def test_looser_figures_that_nobody_signed_change_no_cap(show: Path, tmp_path: Path) -> None:
    (show / "guard.toml").write_text(LOOSER)
    journal = tmp_path / "evening.jsonl"
    with host(show, "null", journal) as running:
        guard = running.snapshot().guard
        assert guard.signed.startswith("UNSIGNED: never signed; ")
        assert guard.margin_db == 10.0
        running.open()
        running.act("go", ref="1")
        wait_for(lambda: running.snapshot().guard.level_db is not None, "a level")
        assert running.snapshot().guard.band_hz == 40_000.0
        assert running.snapshot().guard.cap_db == 100.0
        assert running.stop() == 0
    (caps,) = told(journal, "caps")
    assert caps.args["unsigned"] == "never signed"
    assert (caps.args["signed_by"], caps.args["averaging_s"]) == ("", 1.0)
    assert (caps.args["seats_db"]["40000"], caps.args["crew_db"]["40000"]) == (100.0, 110.0)
    assert caps.args["seats_db"]["20000"] == 70.0
    assert set(caps.args["margin_db"].values()) == {10.0}
    assert replayed(journal)


# -- no seats ---------------------------------------------------------------------------------


def test_a_house_without_seats_opens_only_for_somebody_who_answers(tmp_path: Path) -> None:
    show, journal = without_seats(tmp_path / "bare"), tmp_path / "evening.jsonl"
    with host(show, "null", journal) as running:
        assert running.snapshot().unvouched
        running.act("ready")
        answer = running.link.act("confirm")
        assert (answer.done, answer.reason) == (False, "not-armed")
        assert "no seat is declared" in answer.text
        answer = running.link.act("vouch", name="  ")
        assert (answer.done, answer.reason) == (False, "bad-type")
        assert (running.snapshot().output, running.snapshot().unvouched) == ("SHUT", True)
        running.act("vouch", name="M. Rail")
        assert not running.snapshot().unvouched
        running.open()
        running.act("go", ref="1")
        running.pass_by(0.2)
        assert running.snapshot().panels[0].peak_db is not None
        assert running.stop() == 0
    assert [record.args["name"] for record in told(journal, "vouch")] == ["M. Rail"]
    assert outputs(journal) == ["SHUT", "OPEN", "COLD"]
    assert replayed(journal)


def test_a_house_without_seats_is_rendered_only_for_somebody_who_answers(tmp_path: Path) -> None:
    show, journal = without_seats(tmp_path / "bare"), tmp_path / "render.jsonl"
    command = ["render", show, "--go", "1@0.1", "--for", "0.3", "-o", tmp_path / "out.wav"]
    done = beamctl(*command)
    assert done.returncode == 2
    first, second = done.stderr.splitlines()
    assert first.startswith("beamctl: no seat is declared")
    assert "--vouch NAME" in second
    assert not (tmp_path / "out.wav").exists()
    done = beamctl(*command, "--vouch", "M. Rail", "--journal", journal)
    assert done.returncode == 0, done.stderr
    assert [record.args["name"] for record in told(journal, "vouch")] == ["M. Rail"]


# -- edits under a running host ---------------------------------------------------------------


@pytest.fixture
def playing(show: Path, tmp_path: Path) -> Iterator[Running]:
    """A host that plays its first cue."""
    with host(show, "null", tmp_path / "evening.jsonl") as running:
        running.open()
        running.act("go", ref="1")
        running.pass_by(0.2)
        yield running
        if running.process.poll() is None:
            assert running.stop() == 0


def test_an_edited_guard_file_is_told_and_never_taken(playing: Running, show: Path) -> None:
    before = playing.snapshot().guard
    changed(show, "guard.toml", "format = 1", "format = 1\nseats_db = 60.0")
    wait_for(lambda: bool(playing.snapshot().notices), "a notice")
    said = "guard.toml changed on disk: this host keeps the caps it began with"
    assert playing.snapshot().notices == (said,)
    after = playing.snapshot().guard
    assert (after.state, after.cap_db, after.signed) == (before.state, 100.0, before.signed)

    os.kill(guard_of(playing), signal.SIGKILL)
    wait_for(lambda: playing.snapshot().output == "TRIPPED", "TRIPPED")
    wait_for(lambda: playing.link.act("clear", word="clear").done, "another guard")
    playing.act("restore")
    wait_for(lambda: playing.snapshot().guard.level_db is not None, "the guard to hear")
    again = playing.snapshot().guard
    assert (again.cap_db, again.signed) == (100.0, before.signed)
    assert playing.stop() == 0
    assert replayed(playing.journal)


def test_another_engine_plays_the_rig_that_its_host_read(playing: Running, show: Path) -> None:
    changed(show, "rig.toml", "level_db_30cm_10v = 95.0", "level_db_30cm_10v = 85.0")
    os.kill(engine_of(playing), signal.SIGKILL)
    wait_for(lambda: outputs(playing.journal)[-2:] == ["LOST", "SHUT"], "another engine")
    wait_for(lambda: playing.snapshot().guard.state != "BLIND", "the guard to see it")
    playing.open()
    playing.act("go", ref="2")
    playing.pass_by(0.2)
    assert playing.stop() == 0
    done = beamctl("replay", playing.journal)
    assert done.returncode == 0, done.stdout + done.stderr
    assert done.stdout.count("the same samples") == 1


# -- cues that are too much -------------------------------------------------------------------


def test_a_barred_cue_is_refused_with_the_trim_that_fits(show: Path, tmp_path: Path) -> None:
    changed(show, "rig.toml", "level_db_30cm_10v = 95.0", "level_db_30cm_10v = 115.0")
    changed(show, "sheet.toml", "trim_db = -24.0", "trim_db = -6.0")
    journal = tmp_path / "evening.jsonl"
    with host(show, "null", journal) as running:
        running.open()
        found = running.snapshot()
        assert list(found.barred) == ["2"]
        assert found.states["2"] == "barred"
        fits = re.search(r"voice at trim (-\d+\.\d) dB fits", found.barred["2"])
        assert fits
        answer = running.link.act("go", ref="2")
        assert (answer.done, answer.reason) == (False, "barred")
        assert answer.text == f"cue 2: {found.barred['2']}"
        assert running.link.act("standby", ref="2").reason == "barred"
        running.act("go", ref="1")
        assert running.stop() == 0
    assert [r.args["reason"] for r in told(journal, "refused")] == ["barred", "barred"]
    changed(show, "sheet.toml", "trim_db = -6.0", f"trim_db = {fits[1]}")
    with host(show, "null", tmp_path / "again.jsonl") as running:
        assert not running.snapshot().barred
        running.open()
        running.act("go", ref="2")
        assert running.stop() == 0


def test_cues_that_pass_the_cap_together_are_held_and_told(tmp_path: Path) -> None:
    show, journal = too_much_together(tmp_path / "small", LEFT_DB), tmp_path / "evening.jsonl"
    with host(show, "null", journal) as running:
        assert not running.snapshot().barred
        running.open()
        running.act("go", ref="1")
        running.pass_by(2.5)
        one = running.snapshot().guard
        assert (one.state, one.held_db) == ("NEAR", {})
        assert one.headroom_db is not None
        running.act("go", ref="3")
        running.pass_by(2.5)
        both = running.snapshot().guard
        assert both.state == "CAPPING"
        assert list(both.held_db) == ["square"]
        assert both.headroom_db is not None
        assert both.headroom_db >= 0.0
        running.act("tail", ref="3")
        wait_for(lambda: len(told(journal, "cap")) == 2, "the hold to end")
        running.pass_by(1.2)
        assert running.snapshot().guard.state == "NEAR"
        os.kill(guard_of(running), signal.SIGKILL)
        wait_for(lambda: running.snapshot().output == "TRIPPED", "TRIPPED")
        wait_for(lambda: running.link.act("clear", word="clear").done, "the next guard")
        assert running.stop() == 0

    begins, ends = told(journal, "cap")
    assert [r.args["began"] for r in (begins, ends)] == [1, 0]
    assert (begins.cue, begins.args["panel"], begins.args["band_hz"]) == ("3", "square", 40e3)
    assert begins.args["held_db"] > 0.25
    together = [r for r in told(journal, "guard") if r.args["held_db"]]
    assert together, "no line was written while it was held"
    asked_db = 20.0 * math.log10(2.0) - one.headroom_db  # two equal carriers, over the cap
    assert abs(together[-1].args["held_db"]["square"] - asked_db) < HELD_WITHIN_DB
    told_by_report(journal, begins.args["seat"])
    assert replayed(journal)


def told_by_report(journal: Path, seat: str) -> None:
    """What a venue files of it has the journal's own figures."""
    (caps,), (air,), (trip,) = (told(journal, what) for what in ("caps", "air", "trip"))
    assert caps.args["signed_by"] == "a test"
    assert air.args == {"temperature_c": 20.0, "humidity_pct": 50.0, "pressure_kpa": 101.325}
    lines = told(journal, "guard")
    opened, shut = (r.sample for r in told(journal, "output")[1:3])
    assert abs(len(lines) - (shut - opened) / 192_000) <= 1.5, "a line for every second"
    assert all(set(line.args["blocks"]) == {"row"} for line in lines)
    loudest = max(line.args["blocks"]["row"]["level_db"] or 0.0 for line in lines)

    done = beamctl("report", journal, "-o", journal.with_name("filed"))
    assert done.returncode == 0, done.stdout + done.stderr
    text = journal.with_name("filed.txt").read_text()
    for said in ("a test", "irpa-1984-public", f"{loudest:.1f}", seat, trip.args["reason"]):
        assert str(said) in text, said
    rows = journal.with_name("filed.csv").read_text().splitlines()
    assert len(rows) >= len(lines)
    assert journal.with_name("filed.svg").read_text().startswith("<?xml")
