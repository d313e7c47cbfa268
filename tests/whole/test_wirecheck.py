"""The wiring check from a file of measured levels: what is found, told and written."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from support.fakerig import FakeRig
from support.person import files_in, measured
from support.running import beamctl
from support.smallshow import CELL_DB, write_show

from beamctl.files.levels import COLUMNS
from beamctl.files.reader import load_show
from beamctl.guard.lowdrive import at_microphone, from_centre

FIRST = {"square": 1, "strip": 17}


@pytest.fixture
def show(tmp_path: Path) -> Path:
    return write_show(tmp_path / "small")


def write_levels(show: Path, panel: str, rig: FakeRig, reference: int, seed: int) -> Path:
    """What a microphone 1 m in front of a fake rig measures, as the file that is read."""
    phasors = at_microphone(load_show(show), panel, 1.0).phasors
    path = show.parent / "levels.csv"
    first = FIRST[panel]
    with path.open("w", newline="") as file:
        lines = csv.writer(file)
        lines.writerow(COLUMNS)
        for feed, at, alone, both in rig.measure(
            phasors, 1.0, reference, np.random.default_rng(seed)
        ):
            levels = [f"{alone:.1f}", "" if both is None else f"{both:.1f}"]
            lines.writerow([first + feed, "" if at is None else first + at, *levels])
    return path


def test_faults_are_found_in_a_file_of_levels(show: Path) -> None:
    cells = load_show(show).cells["square"]
    rig = FakeRig(cells, dead={4}, reversed={9}, cell_db=CELL_DB)
    rig.swap(2, 6)
    levels = write_levels(show, "square", rig, from_centre(cells)[0], 1)
    before = files_in(show)
    done = beamctl("wirecheck", show, "--panel", "square", "--levels", levels, "--by", "Ann")
    assert done.returncode == 1, done.stderr
    path, found = measured(show)
    assert {f.feed: f.found for f in found.feed if f.found} == {
        3: ("swapped",),
        5: ("dead",),
        7: ("swapped",),
        10: ("reversed",),
    }
    assert (found.panel, found.by, found.reference, found.passes) == ("square", "Ann", 6, False)
    report = path.with_suffix(".txt").read_text()
    assert report in done.stdout
    head, rest = report.split("FEEDS\n")
    assert "FINDINGS: 4 of 16 feeds\n  feeds 3 and 7 swapped. Re-plug feeds 3 and 7\n" in head
    assert "  feed 5 dead. Check plug, amplifier and cells; if it stays, write dead 1" in head
    assert "  feed 10 reversed. Turn its two wires over, or write polarity -1" in head
    assert "DOES NOT PASS" in head
    lines = rest.splitlines()[:16]
    failed = [line.split()[0] for line in lines if "FAIL" in line]
    assert failed == ["3", "5", "7", "10"]
    assert sum(line.endswith("pass") for line in lines) == 12
    after = files_in(show)
    assert {name: after[name] for name in before} == before
    assert len(after) == len(before) + 2


def test_a_good_panel_becomes_measured_by_the_line_that_is_told(show: Path) -> None:
    cells = load_show(show).cells["strip"]  # two cells a feed, one of them known dead
    levels = write_levels(show, "strip", FakeRig(cells, cell_db=CELL_DB), from_centre(cells)[0], 1)
    done = beamctl("wirecheck", show, "--panel", "strip", "--levels", levels)
    assert done.returncode == 0, done.stdout + done.stderr
    path, found = measured(show)
    assert found.passes
    assert [feed.feed for feed in found.feed] == [17, 18, 19, 20]
    assert "FINDINGS: none" in done.stdout
    told = done.stdout.splitlines()[-1]
    assert told == f'measured = "measured/{path.name}"'
    rig = show / "rig.toml"
    head, strip = rig.read_text().split("[panel.strip]\n")
    rig.write_text(f"{head}[panel.strip]\n{told}\n{strip}")
    assert load_show(show).rig.panel["strip"].measured == f"measured/{path.name}"


HEAD = ",".join(COLUMNS)
GOOD = [f"{n},{n},57,{63 if n > 17 else ''}" for n in range(17, 21)]


@pytest.mark.parametrize(
    ("lines", "said"),
    [
        ([HEAD, *GOOD, "3,3,57,63"], 'levels.csv:6 feed: "3" is no live feed of the panel'),
        ([HEAD, *GOOD[:3], "20,20,nan,63"], 'levels.csv:5 level_db: "nan", expected a level'),
        ([HEAD, *GOOD[:2]], "levels.csv: no line for feed 19, 20"),
        (["feed;level", *GOOD], 'levels.csv:1 columns: "feed;level", expected a first line'),
        ([HEAD, *GOOD[1:], "17,17,57,63"], "with_reference_db is empty for 0 feeds"),
        # one of its two cells is known dead: 37 dB under the others' level, 31 under its own
        ([HEAD, "17,,,", *GOOD[1:3], "20,20,20,"], "feed 20, the reference, is 31 dB under"),
    ],
)
def test_levels_that_cannot_be_write_nothing(show: Path, lines: list[str], said: str) -> None:
    path = show.parent / "levels.csv"
    path.write_text("\n".join(lines) + "\n")
    before = files_in(show)
    done = beamctl("wirecheck", show, "--panel", "strip", "--levels", path)
    assert done.returncode == 2
    first, *rest = done.stderr.splitlines()
    assert said in first
    assert len(rest) <= 1
    assert files_in(show) == before


@pytest.mark.parametrize(
    ("arguments", "code", "said"),
    [
        ([], 4, "the feeds are marked with keys on a Unix terminal, and this is none"),
        (["--by", " "], 2, "nobody is named who checks"),
        (["--panel", "stern"], 2, "no panel is called 'stern'"),
        (["--levels", "none.csv"], 2, "the rig has 2 panels"),
        (["--panel", "strip", "--levels", "none.csv"], 2, "none.csv: missing"),
    ],
)
def test_what_cannot_begin_is_said_in_one_line(
    show: Path, arguments: list[str], code: int, said: str
) -> None:
    before = files_in(show)
    done = beamctl("wirecheck", show, *arguments)
    assert done.returncode == code
    first, *rest = done.stderr.splitlines()
    assert first == f"beamctl: {said}"
    assert len(rest) <= 1
    assert files_in(show) == before
