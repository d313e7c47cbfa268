"""What one loaded show leaves to the next: doses by seat, a trip, a vouch for the same house."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from support.guardlive import without_seats
from support.smallshow import write_show

from beamctl.errors import BeamctlError
from beamctl.files.reader import load_show
from beamctl.host.document import Document, Loaded
from beamctl.host.playing import Handover, Lines, Playing
from beamctl.show.once import Once


def fail(error: BeamctlError) -> None:
    raise error


LINES = Lines(lambda _: None, lambda _: None, lambda _: None, fail)
Play = Callable[[Path, Handover], Playing]


@pytest.fixture
def play(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Play]:
    """A loaded show that is never started."""
    monkeypatch.setenv("BEAMCTL_STATE", str(tmp_path / "state"))
    made: list[Playing] = []

    def one(folder: Path, before: Handover) -> Playing:
        document = Document.of(folder)
        path = tmp_path / "a.show"
        document.store(path)
        made.append(Playing(path, Loaded(document.load(), {}), "null", LINES, before))
        return made[-1]

    yield one
    for playing in made:
        playing.keeper.end(0.0)


def test_seats_that_stay_keep_their_dose(play: Play, tmp_path: Path) -> None:
    folder = write_show(tmp_path / "small")
    house = folder / "house.toml"
    house.write_text(house.read_text().replace('rows = ["A"]', 'rows = ["B", "A"]'))
    dose = {"row A1": (1.0, 2.0), "row A4": (3.0, 4.0), "row Z9": (5.0, 6.0)}
    playing = play(folder, Handover(Once(), dose=dose))
    percent, doors = playing._dose_before()
    assert percent == [0.0, 0.0, 0.0, 0.0, 1.0, 0.0, 0.0, 3.0]
    assert doors == [0.0, 0.0, 0.0, 0.0, 2.0, 0.0, 0.0, 4.0]
    assert playing.finish().dose == dose, "a seat that comes back has its dose again"


def test_a_trip_and_what_was_used_up_outlast_an_engine(play: Play, tmp_path: Path) -> None:
    once = Once()
    once.take(7)
    before = Handover(once, mode="WALK", tripped="the guard died", sample=1_000, looks=3)
    playing = play(write_show(tmp_path / "small"), before)
    after = playing.finish()
    assert after == before._replace(house=after.house)
    assert playing.player.locks.refusal() == (
        "tripped",
        "tripped: the guard died; type clear first",
    )


def test_whoever_answered_for_a_house_answers_for_no_other(play: Play, tmp_path: Path) -> None:
    folder = without_seats(tmp_path / "small")
    same = load_show(folder).digests["house.toml"]
    vouched = Handover(Once(), vouched="Ada", house=same)
    assert play(folder, vouched).player.locks.vouched == "Ada"
    assert play(folder, vouched._replace(house="another")).player.locks.vouched == ""
