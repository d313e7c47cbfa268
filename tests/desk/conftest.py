"""A small host in memory, and pictures to look at."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from beamctl.actions import ACTIONS
from beamctl.desk.format import View
from beamctl.desk.link import Draft
from beamctl.files.reader import load_show
from beamctl.show.edits import Edit
from beamctl.snapshot import (
    Answer,
    BeamView,
    CueLevel,
    CueText,
    EngineView,
    GuardView,
    PanelView,
    SeatLevel,
    SheetView,
    Snapshot,
)

NIGHT_TRAM = load_show(Path(__file__).parents[2] / "scenes" / "night-tram")

CUES = (
    CueText("11", "tram bell, stage left", "as the lamp swings"),
    CueText("12", "the bell answers from the back wall"),
    CueText("12.5", "whisper crosses row B", "on the word 'terminus'", "13"),
    CueText("13", "the conductor's breath"),
    CueText("14", "coins fall along the aisle", "after the laugh"),
    CueText("15A", "last call"),
    CueText("16", "the doors"),
    CueText("17", "night air"),
)
SHEET = SheetView(1, "Night Tram", CUES)

WHISPER = BeamView(
    "whisper", "prow", "12", "whisper.flac", "seat B4", -22.0, 0.7, "ssb", (-12.3, 2.0),
    (-12.1, 2.0), None, True,
)  # fmt: skip
BELL = BeamView(
    "bell", "stern", "11", "bell.flac", "spot pit via back_wall", -31.5, 0.5, "dsb", (4.0, -8.0),
    (4.0, -8.0), 6.0, False,
)  # fmt: skip

GUARD = GuardView(
    "NEAR", "", 2.4, "stalls B4", 40_000.0, 97.6, 100.0, {}, 12.4, "stalls B4",
    "signed by the depot on 2026-12-01", 10.0,
)  # fmt: skip


def seats_of(block: str = "stalls", rows: str = "ABC", seats: int = 8) -> tuple[SeatLevel, ...]:
    """A block whose seat B4 is the loudest; the last row is silent."""
    return tuple(
        SeatLevel(
            f"{block} {name}{n + 1}",
            block,
            False,
            (0.55 * (n - seats / 2), 4.5 + 0.9 * r, 1.2),
            None if r == len(rows) - 1 else 97.6 - 2.5 * abs(n - 3) - 4.0 * abs(r - 1),
            40_000.0,
            100.0,
            12.4,
        )
        for r, name in enumerate(rows)
        for n in range(seats)
    )


SNAPSHOT = Snapshot(
    sheet_version=1,
    output="OPEN",
    standby="12.5",
    newest="12",
    since_go_s=83.44,
    holding=False,
    arming=False,
    states={"11": "tailing", "12": "running", "13": "barred", "10": "done", "12.5": "standing by"},
    left_s={"11": 2.1, "12": 74.0},
    follow={"13": 3.25},
    beams=(WHISPER, BELL),
    panels=(PanelView("prow", 64, -12.34, -1.2), PanelView("stern", 16, -40.0, 0.0)),
    engine=EngineView("null", 192_000, 80, 256, 32.0, 1_000_000, 0, 12.4, 3.1),
    notices=(),
    guard=GUARD,
    barred={"13": "stalls B4, 40 kHz: 3.2 dB over the cap at 4.2 s; a trim of -25.2 dB fits"},
)


class FakeHost:
    """Answers by simple rules and remembers what it was asked."""

    def __init__(self) -> None:
        self.now = SNAPSHOT
        self.text = SHEET
        self.seats = seats_of()
        self.gone = False
        self.closed = False
        self.acts: list[tuple[str, dict[str, object]]] = []
        self.edits: list[Edit] = []
        self.histories: list[str] = []
        self.refuses = ""  # what every edit is refused with, while it is not ""
        self.show = NIGHT_TRAM
        self.version = 1

    def _reach(self) -> None:
        if self.gone:
            raise ConnectionError("gone")

    def sheet(self) -> SheetView:
        self._reach()
        return self.text

    def snapshot(self) -> Snapshot:
        self._reach()
        return self.now

    def levels(self) -> tuple[SeatLevel, ...]:
        self._reach()
        return self.seats

    def act(self, name: str, /, **arguments: object) -> Answer:
        self._reach()
        kind = ACTIONS[name].event
        assert kind is not None
        kind(**arguments)  # only what the event has room for
        self.acts.append((name, arguments))
        if name == "go" and self.now.output != "OPEN":
            return Answer(False, "not-armed", "press * and then Enter")
        if name == "hush":
            self.now = replace(self.now, output="HUSHED")
        if name == "ready":
            self.now = replace(self.now, arming=True)
        if name == "confirm":
            self.now = replace(self.now, arming=False, output="OPEN")
        if name == "clear":
            self.now = replace(self.now, output="HUSHED", guard=GUARD)
        if name == "vouch":
            self.now = replace(self.now, unvouched=False, arming=False)
        if name in ("hold", "carry-on"):
            self.now = replace(self.now, holding=name == "hold")
        if name == "acknowledge":
            self.now = replace(self.now, notices=self.now.notices[1:])
        if name in ("next", "back"):
            self._step(int(str(arguments["by"])))
        return Answer(True)

    def _step(self, by: int) -> None:
        refs = [cue.ref for cue in self.text.cues]
        place = refs.index(self.now.standby) + by
        self.now = replace(self.now, standby=refs[max(0, min(place, len(refs) - 1))])

    def draft(self) -> Draft:
        self._reach()
        texts = dict.fromkeys(("sheet.toml", "rig.toml", "house.toml"), "")
        return Draft(self.version, self.show, texts, texts, tuple(self.show.sounds))

    def cue_levels(self) -> tuple[CueLevel, ...]:
        self._reach()
        return (CueLevel("12", "stalls B4", 40_000.0, 96.2, 100.0, 2.1),)

    def log(self, most: int) -> tuple[str, ...]:
        self._reach()
        return ("20:04:11  GO 11  desk", "20:04:20  refused busy  cue 11 is running")[-most:]

    def edit(self, edit: Edit) -> Answer:
        self._reach()
        self.edits.append(edit)
        return Answer(False, "bad-type", self.refuses) if self.refuses else Answer(True)

    def history(self, what: str) -> Answer:
        self._reach()
        self.histories.append(what)
        return Answer(True)

    def twin(self) -> FakeHost:
        return self

    def close(self) -> None:
        self.closed = True


@pytest.fixture
def host() -> FakeHost:
    return FakeHost()


@pytest.fixture
def view() -> Callable[..., View]:
    """Makes a view of SNAPSHOT with fields changed; `about` goes to the view itself."""

    def make(about: dict[str, object] | None = None, **changes: object) -> View:
        return replace(View(SHEET, replace(SNAPSHOT, **changes)), **(about or {}))

    return make
