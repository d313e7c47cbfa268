"""The thread between the screen and the host."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from dataclasses import replace
from threading import Event

import pytest

from beamctl.desk.courier import TOO_LATE_S, Courier, Levels
from beamctl.desk.line import RETRY_S
from beamctl.show.edits import Edit
from beamctl.snapshot import Answer


class Clock:
    """A clock that a test moves."""

    now_s = 100.0

    def __call__(self) -> float:
        return self.now_s


def until(ready: Callable[[], object]) -> None:
    """Wait for `ready`, at most five seconds."""
    end_s = time.monotonic() + 5.0
    while not ready():
        assert time.monotonic() < end_s, "it never came"
        time.sleep(0.002)


@pytest.fixture
def clock() -> Clock:
    return Clock()


@pytest.fixture
def courier(host, clock) -> Iterator[Courier]:
    courier = Courier(host, clock)
    courier.start()
    yield courier
    courier.stop()
    assert host.closed


def answer_of(courier: Courier):
    found: list = []
    until(lambda: found.append(courier.take_answer()) or found[-1])
    return found[-1]


def test_brings_pictures_and_the_sheet_once(host, courier: Courier) -> None:
    texts = []
    host.sheet = lambda: texts.append(1) or host.text
    for _ in range(3):
        before = courier.picture
        courier.ask_picture()
        until(lambda before=before: courier.picture is not before)
    assert courier.picture.snapshot == host.now
    assert len(texts) == 1
    host.text = replace(host.text, version=2)
    host.now = replace(host.now, sheet_version=2)
    courier.ask_picture()
    until(lambda: courier.picture.sheet.version == 2)


def test_brings_actions_and_their_answers(host, courier: Courier) -> None:
    courier.post("go", ref="12.5")
    name, answer = answer_of(courier)
    assert (name, answer.done) == ("go", True)
    assert host.acts == [("go", {"ref": "12.5"})]


def test_hush_overtakes_whatever_waits(host, courier: Courier) -> None:
    under_way, go_on = Event(), Event()
    plain = host.snapshot

    def slow():
        under_way.set()
        assert go_on.wait(5.0)
        return plain()

    host.snapshot = slow
    courier.ask_picture()
    assert under_way.wait(5.0)
    courier.post("next", by=1)
    courier.ask_picture()
    courier.post("hush")
    go_on.set()
    until(lambda: len(host.acts) == 2)
    assert [name for name, _ in host.acts] == ["hush", "next"]


def test_an_action_that_waited_too_long_is_dropped_but_never_hush(host, clock, courier) -> None:
    under_way, go_on = Event(), Event()

    def stuck():
        under_way.set()
        assert go_on.wait(5.0)
        raise ConnectionError

    host.snapshot = stuck
    courier.ask_picture()
    assert under_way.wait(5.0)
    courier.post("go", ref="12.5")
    courier.post("hush")
    clock.now_s += TOO_LATE_S + 0.1
    go_on.set()
    assert answer_of(courier)[0] == "hush"
    name, answer = answer_of(courier)
    assert (name, answer.done, answer.reason) == ("go", False, "too-late")
    assert [name for name, _ in host.acts] == ["hush"]


def test_a_lost_host_is_tried_every_second_and_comes_back(host, clock, courier) -> None:
    courier.ask_picture()
    until(lambda: courier.picture.snapshot)
    tries = []
    plain = host.snapshot
    host.snapshot = lambda: tries.append(1) or plain()
    host.gone = True
    courier.ask_picture()
    until(lambda: courier.picture.gone)
    assert courier.picture.snapshot == host.now  # the last one is kept
    courier.ask_picture()
    courier.post("hush")  # sent nonetheless
    assert "NOT SENT" in answer_of(courier)[1].text
    assert len(tries) == 1
    host.gone = False
    clock.now_s += RETRY_S
    courier.ask_picture()
    until(lambda: not courier.picture.gone)
    assert len(tries) == 2


def test_a_faulty_link_does_not_take_hush_away(host, courier, capfd) -> None:
    def faulty():
        raise ValueError("a fault in the link")

    host.snapshot = faulty
    courier.ask_picture()
    until(lambda: courier.picture.gone)
    courier.post("hush")
    assert answer_of(courier)[1].done
    assert "a fault in the link" in capfd.readouterr().err


def test_stopping_sends_what_was_posted(host) -> None:
    courier = Courier(host)
    courier.post("hush")
    courier.start()
    courier.stop()
    assert host.acts == [("hush", {})]
    assert host.closed


def test_brings_levels_when_asked_and_keeps_the_last(host, clock: Clock, courier: Courier) -> None:
    courier.ask_picture()
    until(lambda: courier.picture.snapshot)
    assert courier.levels is None
    clock.now_s = 104.0
    courier.want("desk")
    courier.want("guard")
    until(lambda: courier.levels)
    assert courier.levels == Levels(host.seats, 104.0)
    host.gone = True
    clock.now_s += 1.0
    courier.want("guard")
    until(lambda: courier.picture.gone)
    assert courier.levels == Levels(host.seats, 104.0)


def test_an_argument_may_be_called_name(host, courier: Courier) -> None:
    courier.post("vouch", name="Ann")
    answer_of(courier)
    assert host.acts == [("vouch", {"name": "Ann"})]


def test_the_draft_comes_when_its_version_changes(host, courier: Courier) -> None:
    drafts = []
    plain = host.draft
    host.draft = lambda: drafts.append(1) or plain()
    courier.ask_picture()
    until(lambda: courier.picture.snapshot)
    courier.want("sheet")
    until(lambda: courier.draft)
    courier.want("sheet")
    host.version = 2
    host.now = replace(host.now, sheet_version=2)
    courier.ask_picture()
    until(lambda: courier.picture.snapshot.sheet_version == 2)
    courier.want("sheet")
    until(lambda: courier.draft.version == 2)
    assert len(drafts) == 2


def test_edits_are_heard_of_on_the_screen_s_own_thread(host, courier: Courier) -> None:
    answers: list = []
    courier.edit(Edit("nothing", ()), answers.append)
    courier.history("undo", answers.append)
    until(lambda: len(host.histories) == 1)
    assert answers == []
    until(lambda: [heard() for heard in courier.news()] or len(answers) == 2)
    assert all(answer.done for answer in answers)
    assert host.edits == [Edit("nothing", ())]


def test_hush_does_not_wait_for_a_slow_edit(host, courier: Courier) -> None:
    under_way, go_on = Event(), Event()

    def slow(edit):
        under_way.set()
        assert go_on.wait(5.0)
        return Answer(True)

    host.edit = slow
    courier.edit(Edit("slow", ()), lambda answer: None)
    assert under_way.wait(5.0)
    courier.post("hush")
    try:
        assert answer_of(courier)[0] == "hush"
    finally:
        go_on.set()
