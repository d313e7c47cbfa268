"""What the Bench is made of: trials, neighbours of seats, boxes, and the painter's thread."""

from __future__ import annotations

import threading
import time

import pytest
from desk.conftest import NIGHT_TRAM

from beamctl.desk.bench import painter as painting
from beamctl.desk.bench.boxes import angles_box, height_box, try_box
from beamctl.desk.bench.painter import Painter
from beamctl.desk.bench.seating import across, along, ear_height_m, nearest
from beamctl.desk.bench.trial import Trial
from beamctl.show.house import House
from beamctl.show.sheet import Act

HOUSE = NIGHT_TRAM.house
EMPTY = House(format=1)


@pytest.mark.parametrize(
    ("seat", "by", "found"), [("B4", 1, "B5"), ("B4", -1, "B3"), ("B8", 1, "B8"), ("A1", -1, "A1")]
)
def test_along_a_row(seat: str, by: int, found: str) -> None:
    assert along(HOUSE, seat, by) == found


@pytest.mark.parametrize(
    ("seat", "by", "found"),
    [
        ("B4", 1, "C4"),
        ("B4", -1, "A4"),
        ("A8", -1, "A8"),
        ("C8", 1, "driver1"),
        ("C1", 9, "driver1"),
    ],
)
def test_from_row_to_row_and_from_block_to_block(seat: str, by: int, found: str) -> None:
    assert across(HOUSE, seat, by) == found


def test_what_is_nearest() -> None:
    near = nearest(HOUSE, (1.2, 3.3, 1.6))
    assert near is not None
    assert (near.kind, near.name) == ("spot", "conductor")
    assert near.apart_m == pytest.approx(0.1)
    seat = nearest(HOUSE, (1.2, 3.3, 1.6), spots=False)
    assert seat is not None and seat.kind == "seat"
    assert nearest(EMPTY, (0.0, 0.0, 0.0)) is None


def test_how_high_ears_are() -> None:
    assert 1.2 < ear_height_m(HOUSE) < 1.6
    assert ear_height_m(EMPTY) == 1.2


ACT = Act(beam="whisper", sound="whisper.flac", seat="B4", reach="aim", depth=0.7, trim_db=-27.0)


def test_a_trial_changes_what_it_names_and_nothing_else() -> None:
    tried = Trial({"seat": "C1"}).tried({"depth": 0.4}).of(ACT)
    assert tried == ACT.model_copy(update={"seat": "C1", "depth": 0.4})


def test_a_trial_takes_a_field_away() -> None:
    assert Trial({"depth": None}).of(ACT).depth is None


def test_a_trial_that_no_act_can_be_says_why() -> None:
    with pytest.raises(ValueError, match="needs a seat, a spot or a point_m"):
        Trial({"seat": None, "azimuth_deg": 1.0, "elevation_deg": 0.0}).of(ACT)


def test_nothing_tried_is_nothing() -> None:
    assert not Trial()
    assert Trial().of(ACT) == ACT


# -- boxes ----------------------------------------------------------------------------------------


def test_angles_are_two_numbers_that_a_panel_can_do() -> None:
    taken: list[tuple[float, float]] = []
    box = angles_box(lambda *angles: taken.append(angles) or "")
    assert box.use is not None
    assert box.use("12") == "It wants two numbers."
    assert "90" in box.use("90 0")
    assert box.use("12.5, -3") == ""
    assert taken == [(12.5, -3)]


def test_a_height_or_none() -> None:
    taken: list[float | None] = []
    box = height_box(taken.append)
    assert box.use is not None
    assert "number" in box.use("high")
    assert "number" in box.use("nan")
    assert (box.use("1.7"), box.use("")) == ("", "")
    assert taken == [1.7, None]


def test_a_try_is_no_louder_than_the_act_and_6_db_under_it_when_nothing_is_typed() -> None:
    taken: list[float] = []
    box = try_box("whisper", -27.0, taken.append)
    assert box.use is not None
    assert "-27" in box.use("-20")
    assert "number" in box.use("loud")
    assert (box.use(""), box.use("-40")) == ("", "")
    assert taken == [-33.0, -40.0]


# -- the painter ----------------------------------------------------------------------------------


def until(ready) -> None:
    end_s = time.monotonic() + 5.0
    while not ready():
        assert time.monotonic() < end_s
        time.sleep(0.001)


def test_of_questions_that_wait_only_the_newest_is_worked_out() -> None:
    begun, go = threading.Event(), threading.Event()
    worked: list[int] = []

    def work(question: int) -> int:
        worked.append(question)
        begun.set()
        go.wait(5.0)
        return question * question

    painter = Painter(work)
    painter.ask(1)
    assert begun.wait(5.0)
    for question in (2, 3, 4):
        painter.ask(question)
    assert painter.answer is None
    go.set()
    until(lambda: painter.answer == (4, 16))
    assert worked == [1, 4]


def test_what_cannot_be_worked_out_is_said_and_the_next_question_is_taken() -> None:
    def work(question: int) -> float:
        return 1 / question

    painter = Painter(work)
    painter.ask(0)
    until(lambda: painter.failure)
    assert painter.failure == "ZeroDivisionError: division by zero"
    painter.ask(2)
    until(lambda: painter.answer == (2, 0.5))
    assert painter.failure == ""


def test_what_takes_long_is_late_until_it_is_there(monkeypatch) -> None:
    monkeypatch.setattr(painting, "LATE_S", 0.0)
    go = threading.Event()
    painter = Painter(lambda question: go.wait(5.0))
    assert not painter.late
    painter.ask(1)
    until(lambda: painter.late)
    go.set()
    until(lambda: not painter.late)


def test_its_thread_ends_by_itself_and_another_one_starts(monkeypatch) -> None:
    monkeypatch.setattr(painting, "IDLE_S", 0.02)
    painter = Painter(lambda question: threading.current_thread())
    painter.ask(1)
    until(lambda: painter.answer)
    assert painter.answer is not None
    _, first = painter.answer
    first.join(5.0)
    assert not first.is_alive()
    painter.ask(2)
    until(lambda: painter.answer is not None and painter.answer[0] == 2)
    assert painter.answer[1] is not first
