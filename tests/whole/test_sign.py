"""`beamctl sign` and what `inspect` says of signatures, by the command line itself."""

from __future__ import annotations

import ctypes
import os
import subprocess
import sys
from collections.abc import Iterator
from datetime import date
from pathlib import Path

import pytest
from support.running import COMMAND, STARTS_S, beamctl, host
from support.smallshow import GUARD, write_show

from beamctl.acoustics.exposure import TABLES
from beamctl.caution import CAUTION_TEXT
from beamctl.files.reader import load_show
from beamctl.files.signing import seal_of

LOOSER = """\
format = 1
seats_table = "acgih-8h"  # by day
crew_table = "acgih-ceiling"
seats_db = 110
crew_db = 115
averaging_s = 60.0
"""


@pytest.fixture
def show(tmp_path: Path) -> Path:
    """A show that nobody has signed."""
    folder = write_show(tmp_path / "small")
    (folder / "guard.toml").write_text("format = 1\n")
    return folder


@pytest.fixture
def read_only(show: Path) -> Iterator[Path]:
    """The folder of a show that lets nobody write."""
    show.chmod(0o555)
    yield show
    show.chmod(0o755)


def typed(show: Path, text: str) -> subprocess.CompletedProcess[str]:
    """`beamctl sign` with what somebody types at its questions."""
    return subprocess.run(
        [*COMMAND, "sign", str(show)], input=text, capture_output=True, text=True, timeout=STARTS_S
    )


def test_a_name_and_a_word_sign_and_an_edit_shows(show: Path) -> None:
    assert "guard.toml:1: unsigned: the tables hold as they are" in beamctl("inspect", show).stdout
    done = typed(show, "M. Rail\nsign\n")
    assert (done.returncode, done.stderr) == (0, "")
    assert "Now: unsigned, never signed." in done.stdout
    assert CAUTION_TEXT in done.stdout
    today = date.today().isoformat()
    caps = load_show(show).caps
    assert (caps.unsigned, caps.signed_by, caps.signed_on) == ("", "M. Rail", today)
    inspected = beamctl("inspect", show)
    assert (inspected.returncode, "unsigned" in inspected.stdout) == (0, False)

    (show / "house.toml").write_text((show / "house.toml").read_text() + "# a comment\n")
    inspected = beamctl("inspect", show)
    assert inspected.returncode == 1
    edited = f"guard, rig or house edited since M. Rail signed it on {today}"
    said = f"warning: guard.toml:3 signed: {edited}: unsigned, the tables hold as they are"
    assert inspected.stdout.splitlines()[0] == said
    assert f"Now: unsigned, {edited}." in beamctl("sign", show, "--by", "M. Rail").stdout


def test_what_is_signed_is_said_first(show: Path) -> None:
    (show / "guard.toml").write_text(LOOSER)
    unsigned = load_show(show).caps
    assert (unsigned.seats_db[40e3], unsigned.crew_db[40e3]) == (100.0, 110.0)
    done = beamctl("sign", show, "--by", "M. Rail", "--word", "sign")
    assert (done.returncode, done.stderr) == (0, "")
    lines = done.stdout.splitlines()
    assert "averaged over 60 s" in done.stdout
    row = ["seats", "89", "92", "94", *["100"] * 6]
    assert row in [line.split() for line in lines]
    row = ["crew", "105", "105", "105", "110", *["115"] * 5]
    assert row in [line.split() for line in lines]
    one_line = " ".join(done.stdout.split())
    for name in ("acgih-8h", "irpa-1984-public", "acgih-ceiling"):
        assert f"{name}: {TABLES[name].source}; {TABLES[name].standing}" in one_line
    assert "irpa-1984-workers" not in done.stdout
    assert "seats: 4 places in row, held to the first that speaks in a band of" in lines
    assert "crew: no places, held to the table" in lines
    assert "  square: not measured: counts 10 dB louder than the model says" in lines
    looser = lines[
        lines.index("Looser than unsigned") + 1 : lines.index("Looser than unsigned") + 10
    ]
    assert looser[:3] == [
        "  seats, 20 kHz: 94 dB, unsigned 70 dB",
        "  crew, 20 kHz: 105 dB, unsigned 75 dB",
        "  crew, 31.5 kHz: 115 dB, unsigned 110 dB",
    ]
    assert "  averaged over 60 s, unsigned 1 s" in looser
    assert load_show(show).caps.crew_db[40e3] == 115.0
    assert (show / "guard.toml").read_text().startswith(LOOSER)


def test_nothing_looser_is_said_too(show: Path) -> None:
    lines = beamctl("sign", show, "--by", "M. Rail").stdout.splitlines()
    assert lines[lines.index("Looser than unsigned") + 1] == "  nothing"


@pytest.mark.parametrize("typing", ["", "M. Rail\n", "M. Rail\nyes\n", "M. Rail\nSIGN\n"])
def test_without_the_word_nothing_is_signed(show: Path, typing: str) -> None:
    done = typed(show, typing)
    assert done.returncode == 1
    assert done.stderr == "beamctl: the word sign was not given: nothing was signed\n"
    assert (show / "guard.toml").read_text() == "format = 1\n"


def test_a_show_with_an_error_is_not_signed(show: Path) -> None:
    (show / "rig.toml").write_text((show / "rig.toml").read_text().replace("q = 20.0", "q = -1", 1))
    done = beamctl("sign", show, "--by", "M. Rail", "--word", "sign")
    assert (done.returncode, done.stdout) == (2, "")
    first, second = done.stderr.splitlines()
    assert first == f"beamctl: {show} cannot be played: 1 error"
    assert second.strip().startswith("rig.toml:")
    assert (show / "guard.toml").read_text() == "format = 1\n"


def test_a_signature_of_another_state_counts_for_nothing(show: Path) -> None:
    """A [signed] table that somebody typed, or brought along from another folder."""
    (show / "guard.toml").write_text(GUARD)
    assert "edited since a test signed it on 2026-01-01" in beamctl("inspect", show).stdout
    done = beamctl("sign", show, "--by", "M. Rail", "--word", "sign")
    assert done.returncode == 0
    assert (show / "guard.toml").read_text() == (
        f'format = 1\n\n[signed]\nby = "M. Rail"\non = "{date.today().isoformat()}"\n'
        f'digest = "{seal_of(show)}"\n'
    )


def _bound_by_permissions() -> None:
    """Root may write everywhere: the program that is run next may not (PR_CAPBSET_DROP)."""
    if os.geteuid() == 0:
        for capability in (1, 2):  # CAP_DAC_OVERRIDE, CAP_DAC_READ_SEARCH
            ctypes.CDLL(None).prctl(24, capability, 0, 0, 0)


@pytest.mark.skipif(sys.platform != "linux", reason="takes the rights of root away as Linux does")
def test_a_folder_that_may_not_be_written_is_said_in_one_line(read_only: Path) -> None:
    done = subprocess.run(
        [*COMMAND, "sign", str(read_only), "--by", "M. Rail", "--word", "sign"],
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        timeout=STARTS_S,
        preexec_fn=_bound_by_permissions,
    )
    assert done.returncode == 4
    first, second = done.stderr.splitlines()
    assert first == f"beamctl: {read_only}/guard.toml cannot be written: permission denied"
    assert second == "  nothing was signed"
    assert (read_only / "guard.toml").read_text() == "format = 1\n"


def test_a_show_that_sounds_is_not_signed(show: Path, tmp_path: Path) -> None:
    with host(show, "null", tmp_path / "log.jsonl") as running:
        running.open()
        done = beamctl("sign", show, "--by", "M. Rail", "--word", "sign")
        assert (done.returncode, done.stdout) == (4, "")
        assert done.stderr == f"beamctl: the output of {show} is OPEN\n  shut it, then sign\n"
        assert (show / "guard.toml").read_text() == "format = 1\n"
        assert running.snapshot().output == "OPEN"
        running.stop()
    assert beamctl("sign", show, "--by", "M. Rail", "--word", "sign").returncode == 0
