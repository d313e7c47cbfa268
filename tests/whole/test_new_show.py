"""A show that is begun by `beamctl desk`: the questions, and that what they write can be played."""

from __future__ import annotations

import os
import pty
import subprocess
from pathlib import Path

import pytest
from support.running import COMMAND, STARTS_S, beamctl, stop_host, wait_for
from support.terminal import terminal

from beamctl.files.reader import load_show
from beamctl.host.barring import cue_levels

LEFT_DB = 6.0
READ = "I have read this"


def typed(show: Path, keys: bytes) -> subprocess.CompletedProcess[str]:
    """`beamctl desk` with keys that were typed before it asked; its screen is no terminal."""
    ours, theirs = pty.openpty()
    try:
        os.write(ours, keys)
        return subprocess.run(
            [*COMMAND, "desk", str(show)],
            stdin=theirs,
            capture_output=True,
            text=True,
            timeout=STARTS_S,
            start_new_session=True,
        )
    finally:
        os.close(ours)
        os.close(theirs)


@pytest.mark.parametrize("there", [False, True], ids=["missing", "empty"])
def test_without_a_terminal_it_says_where_to_ask(tmp_path: Path, there: bool) -> None:
    show = tmp_path / "new"
    if there:
        show.mkdir()
    done = beamctl("desk", show)
    assert (done.returncode, done.stdout) == (2, "")
    what, do = done.stderr.splitlines()
    assert what == f"beamctl: {show}: " + (
        "an empty folder" if there else "there is no such folder"
    )
    assert (
        do == f"  in a terminal, `beamctl desk {show}` asks four questions and writes a show there"
    )
    assert (list(tmp_path.rglob("*")) == [show]) == there


def test_breaking_off_leaves_nothing_behind(tmp_path: Path) -> None:
    done = typed(tmp_path / "new", b"A title\r8x8 10\r\x04")
    assert done.returncode == 1
    assert done.stderr.splitlines()[-1] == "beamctl: nothing was written"
    assert not list(tmp_path.iterdir())


@pytest.mark.real
def test_four_answers_make_a_show_and_open_the_desk_on_it(tmp_path: Path) -> None:
    show = tmp_path / "shows" / "night-owl"
    answers = (  # what is asked, the answer, what is wrong with it
        ("Title [Night owl]:", 'The Owl\'s "Night"', ""),
        ("Cells of the panel", "8 by 8", "expected columns, rows, pitch, such as 8x8 10"),
        ("Cells of the panel", "8x0 10", "rows: 0, expected a whole number from 1 to 32"),
        ("Cells of the panel", "6x4 12", ""),
        ("Where it hangs", "0.5 -1 3 90", ""),
        ("Seats", "", "Error: the panel cannot point at the seats: azimuth"),
        ("Where it hangs", "0.5 -1 3 -20", ""),
        ("Seats", "3x5 3.5", ""),
    )
    with terminal(tmp_path) as desk:
        code = desk.run(*COMMAND, "desk", show)
        try:
            for asked, answer, wrong in answers:
                wait_for(lambda asked=asked: _last_line(desk.screen()).startswith(asked), asked)
                assert not show.parent.exists()
                desk.type(answer)
                desk.key("Enter")
                wait_for(lambda wrong=wrong: wrong in desk.screen(), wrong)
            wait_for(lambda: READ in desk.screen() or code.exists(), "the caution", STARTS_S)
            assert not code.exists(), desk.screen()
            desk.enter()
            wait_for(lambda: "three knocks at B3" in desk.screen(), "the cue on the desk", STARTS_S)
            desk.key("C-q")
            wait_for(lambda: code.exists() and code.read_text() == "0\n", "the desk to end")
        finally:
            stop_host(show)
    found = load_show(show)
    assert found.sheet.title == 'The Owl\'s "Night"'
    assert found.rig.panel["main"].at_m == (0.5, -1.0, 3.0)
    assert found.house.block["seats"].seat_points()["A3"] == pytest.approx((0.5, 2.5, 1.2))
    (level,) = cue_levels(found, lambda *_: None).values()
    assert LEFT_DB <= level.margin_db < LEFT_DB + 2.0 or found.sheet.cue[0].act[0].trim_db == -24.0
    done = beamctl("inspect", show)
    assert done.returncode == 1
    assert [line for line in done.stdout.splitlines() if line.startswith(("error", "warn"))] == [
        "warning: guard.toml:1: unsigned: the tables hold as they are"
    ]


def _last_line(screen: str) -> str:
    return screen.rstrip().splitlines()[-1] if screen.strip() else ""
