"""A hold becomes one line of the journal when it begins and one when it is over, with its cue."""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any, cast

import pytest
from support.faults import RATE_HZ, at_seats

from beamctl.host.guarding import Guarding
from beamctl.host.warden import Warden
from beamctl.show.events import Confirm, Go, Ready
from beamctl.show.player import Player
from beamctl.show.records import Record


class Evening:
    """A player that is open, a warden that says what it is told to, and a clock that is set."""

    def __init__(self, monkeypatch: pytest.MonkeyPatch) -> None:
        show = at_seats("dsb", "far", "aside")
        self.now_s = 100.0
        monkeypatch.setattr("beamctl.host.guarding.time.monotonic", lambda: self.now_s)
        self.warden: Any = SimpleNamespace(reading={}, levels=[], blind="", watch=lambda: None)
        self.player = Player(show)
        self.player.sink("sink-open", 0)
        for event in (Ready("test"), Confirm("test")):
            self.player.handle(event, 0)
        self.guarding = Guarding(show, cast(Warden, self.warden), self.player)

    def holds(self, seconds: float, **held_db: float) -> list[Record]:
        """What is told of holds while these panels are held, looked at 20 times a second."""
        self.warden.reading = {"state": "CAPPING" if held_db else "CLEAR", "held_db": held_db}
        told = []
        for _ in range(round(20 * seconds)):
            self.now_s += 0.05
            told += self.guarding.tick(round((self.now_s - 100.0) * RATE_HZ))
        return [record for record in told if record.what == "cap"]


@pytest.fixture
def evening(monkeypatch: pytest.MonkeyPatch) -> Evening:
    return Evening(monkeypatch)


def test_a_hold_is_told_once_with_panel_and_cue(evening: Evening) -> None:
    evening.player.handle(Go("test", "1"), RATE_HZ // 100)
    assert evening.holds(0.5) == []
    (began,) = evening.holds(3.0, p0=12.5)
    assert began.cue == "1"
    assert began.args["panel"] == "p0"
    assert began.args["began"] == 1
    assert began.args["held_db"] == 12.5
    (ended,) = evening.holds(2.0)
    assert (ended.args["panel"], ended.args["began"]) == ("p0", 0)


def test_a_gap_of_less_than_a_second_is_the_same_hold(evening: Evening) -> None:
    evening.player.handle(Go("test", "1"), RATE_HZ // 100)
    told = evening.holds(0.5, p0=3.0) + evening.holds(0.8) + evening.holds(0.5, p0=2.0)
    assert len(told) == 1


def test_each_panel_has_its_own(evening: Evening) -> None:
    evening.player.handle(Go("test", "1"), RATE_HZ // 100)
    told = evening.holds(0.3, p0=3.0) + evening.holds(0.3, p0=3.0, p1=1.0)
    assert [record.args["panel"] for record in told] == ["p0", "p1"]


def test_what_is_shut_holds_nothing(evening: Evening) -> None:
    evening.player.handle(Go("test", "1"), RATE_HZ // 100)
    assert len(evening.holds(0.3, p0=3.0)) == 1
    evening.player.trip("a fault", RATE_HZ)
    (ended,) = evening.holds(0.3, p0=3.0)
    assert ended.args["began"] == 0
