"""Files of `beamctl report`: what it writes, what it never writes over, and the picture."""

from __future__ import annotations

import re
import subprocess
import sys
from collections.abc import Sequence
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest
from matplotlib.image import imread
from support.journals import HEADER, block, evening, guard, left, run, write

from beamctl.show.records import Record


@pytest.fixture
def log(tmp_path: Path) -> Path:
    return write(tmp_path / "evening.jsonl", evening())


@pytest.fixture
def made(log: Path) -> Path:
    """The stem of a text, a table and a picture of that evening."""
    done = run(log, "-o", log.parent / "filed")
    assert done.exit_code == 0, done.output
    return log.parent / "filed"


# -- files -----------------------------------------------------------------------------------------


def test_a_name_makes_three_files_and_a_text_one(log: Path, made: Path) -> None:
    names = {path.name for path in log.parent.iterdir() if path.name.startswith("filed")}
    assert names == {"filed.txt", "filed.csv", "filed.svg"}
    assert run(log, "-o", log.parent / "alone.txt").exit_code == 0
    assert not (log.parent / "alone.csv").exists()
    assert run(log, "-o", log.parent / "2026.12").exit_code == 0
    assert (log.parent / "2026.12.csv").exists()


def test_nothing_is_written_over_unless_told(log: Path) -> None:
    (log.parent / "b.csv").write_text("mine")
    done = run(log, "-o", log.parent / "b")
    assert (done.exit_code, done.output.splitlines()[0]) == (
        4,
        f"beamctl: {log.parent / 'b.csv'} exists",
    )
    assert not (log.parent / "b.txt").exists()
    assert (log.parent / "b.csv").read_text() == "mine"
    assert run(log, "-o", log.parent / "b", "--force").exit_code == 0
    assert (log.parent / "b.csv").read_text() != "mine"


@pytest.mark.parametrize(
    "names",
    [
        ("-o", "a.csv"),
        ("-o", "a.png"),
        ("-o", "a.txt", "--chart", "a.pdf"),
        ("-o", "a.txt", "--csv", "a.txt"),
        ("-o", "a.txt", "--csv", "evening.jsonl", "--force"),
        ("-o", "no/such/place.txt"),
    ],
    ids=" ".join,
)
def test_names_that_cannot_be_meant_are_refused(
    log: Path, monkeypatch: pytest.MonkeyPatch, names: Sequence[str]
) -> None:
    monkeypatch.chdir(log.parent)
    before = log.read_bytes()
    assert run(log.name, *names).exit_code in (2, 4)
    assert [path.name for path in log.parent.iterdir()] == [log.name]
    assert log.read_bytes() == before


# -- the picture -----------------------------------------------------------------------------------


def test_the_picture_names_all_that_it_shows(log: Path, made: Path) -> None:
    words = " ".join(made.with_suffix(".svg").read_text().splitlines())
    ElementTree.fromstring(made.with_suffix(".svg").read_bytes())
    for said in ("Night Tram", "stalls", "balcony", "pit", "TRIPPED", "held, 3 times", "12.5"):
        assert f"<!-- {said}" in words or f"<!--  {said}" in words, said


def test_a_picture_without_a_trip_shows_none(tmp_path: Path) -> None:
    calm = [r for r in evening() if r.what not in ("trip", "cap")]
    run(write(tmp_path / "log.jsonl", calm), "-o", tmp_path / "calm")
    assert "TRIPPED" not in (tmp_path / "calm.svg").read_text()
    assert "<!-- held" not in (tmp_path / "calm.svg").read_text()


def test_a_picture_is_in_black_and_white(log: Path) -> None:
    done = run(log, "-o", log.parent / "p.txt", "--chart", log.parent / "p.PNG")
    assert done.exit_code == 0, done.output
    picture = imread(log.parent / "p.PNG", format="png")
    assert np.ptp(picture[..., :3], axis=2).max() == 0.0
    assert picture[..., :3].min() == 0.0


@pytest.mark.parametrize("title", ["夜の電車", "cost $5 and $6^", "_under_", "a\x1b[31mb"])
def test_any_title_can_be_drawn(tmp_path: Path, title: str) -> None:
    log = write(tmp_path / "log.jsonl", evening()[:200], {**HEADER, "title": title})
    assert run(log, "-o", tmp_path / "t").exit_code == 1  # not closed
    ElementTree.fromstring((tmp_path / "t.svg").read_bytes())


@pytest.mark.parametrize("last_s", [0, 1, 90, 7200, 3 * 86_400])
def test_an_evening_of_any_length_is_drawn_without_complaint(
    tmp_path: Path, caplog: pytest.LogCaptureFixture, last_s: int
) -> None:
    stream = Record(0, "stream", args={"sink": "null"})
    row = {"stalls": block("B4", 99.0, 100.0, 0.0)}
    records = [stream, *(guard(second, row) for second in sorted({0, last_s})), left(last_s)]
    done = run(write(tmp_path / "log.jsonl", records), "-o", tmp_path / "a")
    assert done.exit_code == 0, done.output
    assert caplog.records == []
    svg = (tmp_path / "a.svg").read_text()
    ticks = len(re.findall(r'<g id="xtick_[0-9]+">', svg))
    assert 2 <= ticks <= 30  # of two axes


def test_an_evening_without_a_reading_has_a_picture_that_says_so(tmp_path: Path) -> None:
    run(write(tmp_path / "log.jsonl", [left(3)]), "-o", tmp_path / "none")
    assert "no reading of the guard" in (tmp_path / "none.svg").read_text()


LOADED = """
import sys
from beamctl.cli import main
try:
    main(sys.argv[1:])
finally:
    print("matplotlib" in sys.modules, "matplotlib.pyplot" in sys.modules)
"""


@pytest.mark.parametrize(("more", "loaded"), [((), "False"), (("--chart", "a.svg"), "True")])
def test_drawing_is_loaded_only_for_a_picture(log: Path, more: Sequence[str], loaded: str) -> None:
    command = [sys.executable, "-c", LOADED, "report", log.name, "-o", "a.txt", *more]
    done = subprocess.run(command, cwd=log.parent, capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1] == f"{loaded} False"
