"""A whole show written from nothing inside the desk, by keys only, beside one written by hand."""

from __future__ import annotations

import hashlib
import re
import shutil
import tomllib
from pathlib import Path

import numpy as np
import pytest
import soundfile
from support.designer import Designer, at_desk
from support.lastferry import BY_HAND
from support.running import STARTS_S, beamctl

pytestmark = pytest.mark.real

ANSWERS = (
    ("Title", "The last ferry"),
    ("Cells of the panel", "6x6 12"),
    ("Where it hangs", "0 0 3 -15"),
    ("Seats", "2x8 4.5"),
)

RIG_KEYS = """
    f6 -> > panel main
    right -> > at_m
    at_m = 0 -0.5 3.2
    tilt_deg = -18
    grid = 8 8 10
    New: aside -> > panel aside
    right -> > at_m
    at_m = 4 0.5 2.6
    pan_deg = -25
    grid = 4 4 10
    loom = columns
"""

HOUSE_KEYS = """
    f5 -> > air
    right -> > temperature_c
    temperature_c = 21.5
    left down -> > block seats
    right -> > class
    rows = A B C
    New: block / crew -> > block crew
    right -> > class
    class = crew
    first_m = -4 1.5 1.6
    rows = K
    New: spot / gangway -> > spot gangway
    right -> > at_m
    at_m = 2.5 3 1.6
    New: spot / lamp -> > spot lamp
    right -> > at_m
    at_m = -2.5 6.5 2.2
    New: surface / quay -> > surface quay
    right -> > corner_m
    corner_m = -6 9 0
"""

SHEET_KEYS = """
    f3 -> ] 1
    Beams: a new beam / hum / main
    Beams: a new beam / bell / aside
    Title: three knocks -> three knocks
    Note: a mallet -> a mallet
    right right -> > at_s
    trim_db = -32

    New cue: engine -> ] 2
    Note: lamp out -> lamp out
    New act: hum -> > target
    sound = hum.wav
    loop = true
    target = seat A2
    law = ssb
    trim_db = -34
    over_s = 2

    New cue: it crosses row B -> ] 3
    Note: she turns -> she turns
    New act: hum -> > target
    target = seat B1
    over_s = 1
    Copy -> s: Split
    right -> > at_s
    at_s = 2
    target = seat B8
    over_s = 4
    New act: hum -> > target
    target = spot gangway
    at_s = 7
    over_s = 4
    Split -> ] 4
    Title: it waits -> it waits

    New cue: off the quay -> ] 5
    Note: 'who is there' -> 'who is there'
    New act: voice -> > target
    target = seat C4
    sound = knock.flac
    via = quay
    reach = aim
    trim_db = -34
    left left
    f4 -> seat C4 via quay
    Depth: 0.8 -> Enter takes it
    Law
    Take it
    f3 -> via quay, root
    Copy -> ] 6
    Title: from the lamp -> from the lamp
    f4 -> cue 6
    Spot -> spot gangway via quay
    Spot -> spot lamp via quay
    Take it
    f3 -> spot lamp via quay

    New cue: bell -> ] 7
    Note: count to 4 -> count to 4
    New act: bell -> > target
    target = angles 10 0
    sound = knock.flac
    law = mam
    reach = 3
    trim_db = -36

    New cue: the hum dies -> ] 8
    Note: curtain -> curtain
    New act: hum -> > target
    fall_s = 1.5
    New act: bell -> > target
    at_s = 1
    fall_s = 0.5
    Lift -> ^
    left left
    Find: 7 -> ] 7
    Set down -> falls
    right -> > at_s
    at_s = 4

    New cue: gulls -> ] 7.5
    Note: in wind -> in wind
    New act: voice -> > target
    target = point 0 6 3
    sound = knock.flac
    trim_db = -40
    left left
    Later -> ] 9
    Find: 2 -> ] 2
    Copy -> ] 2.5
    Title: engine again -> engine again
    Lift -> >^
    Find: 9 -> ] 9
    Set down -> ] 10
    Find: 9 -> ] 9
    Renumber: 20 5 -> ] 20
    Find: 7 -> ] 7
    right home -> > ref
    then = 8 6
    left home -> ] 1
"""

GOS = ("--go", "2@0", "--go", "3@0.3", "--go", "5@0.5", "--go", "7@0.7", "--for", "1")


def test_a_show_written_by_keys_equals_one_written_by_hand(tmp_path: Path) -> None:
    show, by_hand = tmp_path / "last-ferry", tmp_path / "by-hand"
    with at_desk(show) as designer:
        answer(designer, show)
        begun = texts(show)
        designer.play(RIG_KEYS + HOUSE_KEYS + SHEET_KEYS)
        edits = designer.unsaved()
        designer.save()
        written = texts(show)
        for title, expected in (("Undo", begun), ("Redo", written)):
            designer.walk_history(title, edits)
            designer.save()
            assert texts(show) == expected, title
        shown = the_sheet(designer)
        assert designer.leave() == 0

    by_hand.mkdir()
    shutil.copytree(show / "sounds", by_hand / "sounds")
    for name, text in BY_HAND.items():
        (by_hand / name).write_text(text)
        assert tomllib.loads(written[name]) == tomllib.loads(text), name
    assert inspected(show) == inspected(by_hand)
    assert rendered(show) == rendered(by_hand)

    with at_desk(show) as designer:
        designer.sees("no GO yet", STARTS_S)
        assert the_sheet(designer) == shown
        assert designer.unsaved() == 0
        assert designer.leave() == 0


def answer(designer: Designer, show: Path) -> None:
    """Answer the four questions, bring a sound along, and read the caution."""
    for asked, text in ANSWERS:
        designer.sees(asked, STARTS_S)
        designer.press(f"{text}\r")
    designer.sees("I have read this", STARTS_S)
    time_s = np.arange(48_000) / 48_000
    soundfile.write(show / "sounds" / "hum.wav", 0.3 * np.sin(2 * np.pi * 110 * time_s), 48_000)
    designer.press("enter")
    designer.sees("three knocks at B4")


def texts(show: Path) -> dict[str, str]:
    """What is on disk."""
    return {name: (show / name).read_text() for name in BY_HAND}


def the_sheet(designer: Designer) -> list[str]:
    """The cues, the first of them in full, and what the guard found for it."""
    designer.play("f3 home -> ] 1")
    designer.sees("left at seats")
    designer.loses("[!]")  # barred while it is being looked at
    return designer.screen()[2:30]


def inspected(show: Path) -> str:
    """What is said of a show, but for the lines at which it is said."""
    done = beamctl("inspect", show)
    assert done.returncode == 1, done.stdout + done.stderr  # a warning: nobody has signed it
    return re.sub(r"(?m)^(warning: \S+?):\d+", r"\1", done.stdout)


def rendered(show: Path) -> str:
    """SHA-256 of the feeds under the GOs."""
    wave = show.with_suffix(".wav")
    done = beamctl("render", show, *GOS, "-o", wave)
    assert done.returncode == 0, done.stdout + done.stderr
    return hashlib.sha256(wave.read_bytes()).hexdigest()
