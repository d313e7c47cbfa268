"""What hands do by mistake, on a real desk: a held Enter, a paste, and both beside a box."""

from __future__ import annotations

import time
from pathlib import Path

import pytest
from support.ptydesk import PtyDesk, pty_desk
from support.running import fired, host, told, wait_for
from support.smallshow import write_show

pytestmark = pytest.mark.real

FIRST_S, GAP_S, HELD_S = 0.5, 1.0 / 30.0, 3.0  # of a keyboard's own repeats


def hold_enter(desk: PtyDesk) -> None:
    """Press Enter and keep it down."""
    began_s = desk.press("enter")
    time.sleep(FIRST_S)
    while time.monotonic() < began_s + HELD_S:
        desk.press("enter")
        time.sleep(GAP_S)


def test_one_hand_one_cue(tmp_path: Path) -> None:
    show, journal = write_show(tmp_path / "small"), tmp_path / "hands.jsonl"
    with host(show, "null", journal) as running, pty_desk(show) as desk:
        desk.read_caution()
        running.open()
        running.act("mode", to="SHOW", word="show")
        wait_for(lambda: running.snapshot().standby != "", "a cue to stand by")
        before = running.link.draft().texts

        for paste in ("\r+*-." * 40, "\x1b[200~" + "\r+*-." * 40 + "\x1b[201~"):
            desk.press(paste)
            time.sleep(0.1)  # else the next key would be of the paste
            desk.press("f1")  # the desk is past the paste once it shows help
            desk.shows("Ultrasound")
            desk.press("f2")
            desk.shows("since GO" if fired(journal) else "no GO yet")
        assert fired(journal) == []
        assert told(journal, "standby") == []

        hold_enter(desk)
        wait_for(lambda: len(fired(journal)) > 0, "the GO in the journal")
        assert len(fired(journal)) == 1

        time.sleep(0.75)
        desk.press("/")
        desk.shows("FIND A CUE")
        time.sleep(0.05)
        desk.press("3")
        time.sleep(0.05)
        hold_enter(desk)
        wait_for(lambda: len(told(journal, "standby")) > 0, "the cue on stand-by")
        time.sleep(0.2)
        assert len(fired(journal)) == 1
        assert running.snapshot().standby == "3"
        assert running.link.draft().texts == before
        running.stop()
