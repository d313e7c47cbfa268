"""The desk in a real terminal, judged by the journal and by the terminal it leaves behind."""

from __future__ import annotations

import fcntl
import os
import pty
import re
import signal
import subprocess
import sys
import termios
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest
from support.running import (
    COMMAND,
    SOON_S,
    STARTS_S,
    answers,
    beamctl,
    fired,
    last_hash,
    outputs,
    records_of,
    replayed,
    stop_host,
    told,
    wait_for,
)
from support.smallshow import FOLLOW_S, RATE_HZ, write_show
from support.terminal import Terminal, terminal

from beamctl.host.link import Link

pytestmark = pytest.mark.real

NIGHT_TRAM = Path(__file__).parents[2] / "scenes/night-tram"


@contextmanager
def no_host_left(show: Path) -> Iterator[None]:
    """Ends a host that a test could not end."""
    try:
        yield
    finally:
        stop_host(show)


def press_star_enter(desk: Terminal, journal: Path, times: int) -> None:
    """The two keys that open the output, for the `times`th time."""
    desk.type("*")
    wait_for(lambda: "READY: Enter" in desk.screen(), "the desk to ask for Enter")
    desk.enter()
    wait_for(lambda: outputs(journal).count("OPEN") == times, "OPEN in the journal")
    wait_for(lambda: desk.reads("OPEN"), "the desk to show OPEN")


def press_go(desk: Terminal, journal: Path, ref: str) -> None:
    """Enter, once the desk shows that `ref` stands by."""
    stands_by = re.compile(rf"stand by {re.escape(ref)}\s")
    wait_for(lambda: stands_by.search(desk.screen()) is not None, f"cue {ref} standing by")
    desk.enter()
    wait_for(lambda: ref in fired(journal), f"cue {ref} in the journal")


def leave(desk: Terminal, code: Path, presses: int) -> None:
    """Ctrl-Q as often as the desk asks for; it must end with 0."""
    desk.key("C-q")
    if presses == 2:
        wait_for(lambda: "again within" in desk.screen(), "the desk to ask once more")
        assert not code.exists()
        desk.key("C-q")
    wait_for(lambda: code.exists() and code.read_text() != "", "the desk to end")
    assert code.read_text() == "0\n", desk.screen()


def test_night_tram_from_the_keyboard(tmp_path: Path) -> None:
    journal = tmp_path / "tram.jsonl"
    with terminal(tmp_path) as desk, no_host_left(NIGHT_TRAM):
        before = desk.modes()
        code = desk.desk(NIGHT_TRAM, journal)
        press_star_enter(desk, journal, 1)
        for ref in ("1", "2", "3", "4", "4.5", "5"):
            press_go(desk, journal, ref)
        wait_for(lambda: "6" in fired(journal), "cue 6, which follows by itself")
        for ref in ("6A", "7"):
            press_go(desk, journal, ref)
        desk.type("0")
        wait_for(lambda: outputs(journal)[-1] == "HUSHED", "HUSHED in the journal")
        wait_for(lambda: desk.reads("HUSHED"), "the desk to show HUSHED")
        press_star_enter(desk, journal, 2)
        leave(desk, code, presses=2)
        wait_for(lambda: "runs on" in desk.screen(), "the shell to say that the host runs on")
        assert desk.modes() == before

        assert answers(NIGHT_TRAM), "the host went with its desk"
        assert beamctl("host", NIGHT_TRAM, "--stop").returncode == 0
        wait_for(lambda: bool(told(journal, "left")), "the host to end")

    assert fired(journal) == ["1", "2", "3", "4", "4.5", "5", "6", "6A", "7"]
    assert outputs(journal) == ["SHUT", "OPEN", "HUSHED", "OPEN", "COLD"]
    assert not told(journal, "refused")
    assert {r.who for r in told(journal, "go")} == {"desk", "follow-on of 5"}
    assert [r.cue for r in told(journal, "go") if r.who != "desk"] == ["6"]
    assert replayed(journal) == last_hash(journal)


def test_leaving_while_shut_ends_the_host(tmp_path: Path) -> None:
    show, journal = write_show(tmp_path / "small"), tmp_path / "shut.jsonl"
    with terminal(tmp_path) as desk, no_host_left(show):
        before = desk.modes()
        code = desk.desk(show, journal)
        leave(desk, code, presses=1)
        assert not answers(show)
        assert desk.modes() == before
    assert outputs(journal) == ["SHUT", "COLD"]
    assert records_of(journal)[-1].what == "left"


@pytest.mark.parametrize("env", [{"TERM": "linux"}, {"NO_COLOR": "1"}], ids=["linux", "no colour"])
def test_a_plain_terminal_does(tmp_path: Path, env: dict[str, str]) -> None:
    show, journal = write_show(tmp_path / "small"), tmp_path / "plain.jsonl"
    with terminal(tmp_path) as desk, no_host_left(show):
        before = desk.modes()
        code = desk.desk(show, journal, **env)
        press_star_enter(desk, journal, 1)
        press_go(desk, journal, "1")
        desk.type("0")
        wait_for(lambda: outputs(journal)[-1] == "HUSHED", "HUSHED in the journal")
        wait_for(lambda: desk.reads("HUSHED"), "the desk to show HUSHED")
        leave(desk, code, presses=1)
        assert desk.modes() == before
        stop_host(show)
    assert fired(journal) == ["1"]
    assert outputs(journal) == ["SHUT", "OPEN", "HUSHED", "COLD"]


def test_a_terminal_that_freezes_stops_nothing(tmp_path: Path) -> None:
    show, journal = write_show(tmp_path / "small"), tmp_path / "frozen.jsonl"
    ours, theirs = pty.openpty()
    desk = subprocess.Popen(
        [*COMMAND, "desk", str(show), "--journal", str(journal)],
        stdin=theirs,
        stdout=theirs,
        stderr=theirs,
        start_new_session=True,
    )
    os.close(theirs)
    with no_host_left(show):
        try:
            # Nobody ever reads `ours`: the desk blocks as soon as the terminal's buffer is full.
            wait_for(lambda: outputs_if_any(journal) == ["SHUT"], "the host to open", STARTS_S)
            wait_for(lambda: full(ours), "the desk to be blocked in writing")
            play_a_little(show, journal)
            assert desk.poll() is None
            assert full(ours), "the terminal was not frozen, so nothing was shown"
        finally:
            desk.send_signal(signal.SIGKILL)
            desk.wait(SOON_S)
            os.close(ours)
        assert answers(show), "the host went with its desk"
        stop_host(show)

    at = {record.cue: record.sample for record in told(journal, "go")}
    assert list(at) == ["1", "2", "3", "4"]
    assert at["4"] - at["3"] == round(FOLLOW_S * RATE_HZ)
    assert at["2"] - at["1"] >= RATE_HZ // 5
    assert replayed(journal) == last_hash(journal)


def outputs_if_any(journal: Path) -> list[str]:
    return outputs(journal) if journal.exists() and journal.stat().st_size else []


def full(ours: int) -> bool:
    """True when the terminal's buffer of 4096 bytes takes no more: whoever writes is blocked."""
    waiting = fcntl.ioctl(ours, termios.FIONREAD, bytes(4))
    return int.from_bytes(waiting, sys.byteorder) >= 4000


def play_a_little(show: Path, journal: Path) -> None:
    """Open the output and fire the cues, by a line of our own."""
    link = Link(show)
    wait_for(lambda: link.act("ready").done, "a guard that sees")
    assert link.act("confirm").done
    for ref in ("1", "2", "3"):
        assert link.act("go", ref=ref).done
        now = link.snapshot().engine.rendered
        wait_for(
            lambda now=now: link.snapshot().engine.rendered > now + RATE_HZ // 4, "samples to pass"
        )
    wait_for(lambda: "4" in fired(journal), "the follow-on")
    link.close()
