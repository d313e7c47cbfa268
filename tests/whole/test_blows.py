"""Desk, host and engine are killed and stopped while a cue sounds; what leaves is judged by sample.

Three blows of each kind on each sink; BEAMCTL_BLOWS=20 in the environment makes it twenty. Every
blow falls right after the final stage was seen to let a block of the open output out. All that was
recorded, and on JACK what the ports carried for two seconds around a blow, must be the replay of
the journal: nothing repeated, skipped or louder. Ports are heard around every blow to desk and
host, and around one of each kind to an engine. The last lines of a run tell the times.
"""

from __future__ import annotations

import os
import shutil
import signal
import statistics
import time
from collections import defaultdict
from collections.abc import Iterable, Iterator
from functools import partial
from pathlib import Path
from typing import NamedTuple

import pytest
from jackserver import jack_server
from support.blows import (
    Blow,
    Desk,
    Judge,
    Stage,
    desk,
    engine_of,
    engines_of,
    going_on,
    strike,
    watched,
    write_loop_show,
)
from support.ears import FEEDS, Caught, DeafEar, Heard, PortEar, RecordingEar, recorded
from support.running import SOON_S, STARTS_S, fired, host, outputs, told, wait_for
from support.smallshow import RATE_HZ, write_show

from beamctl.engine import layout as at
from beamctl.host import offline
from beamctl.host.places import memory_folder
from beamctl.show.records import SOUNDING, Record

BLOWS = int(os.environ.get("BEAMCTL_BLOWS", "3"))
HARMLESS = 5  # blows that one host goes through when they cost it nothing
ENGINES = 2  # that a host may lose within a minute and still start the next
ZERO_MS, KILLED_MS, SHUT_MS = 250.0, 200.0, 3000.0
PERIOD = 1024
KINDS = {signal.SIGKILL: "killed", signal.SIGSTOP: "stopped"}

SINKS = ["recording", pytest.param("jack", marks=pytest.mark.real)]
Ear = RecordingEar | PortEar

pytestmark = pytest.mark.timeout(300 + 20 * BLOWS)


class Figures:
    """Milliseconds by what they tell."""

    def __init__(self) -> None:
        self.found: dict[str, list[float]] = defaultdict(list)

    def note(self, name: str, ms: float, bar_ms: float) -> None:
        """Keep a figure, which must lie within its bar."""
        self.found[f"{name} (at most {bar_ms:g})"].append(ms)
        assert 0.0 < ms <= bar_ms, f"{name}: {ms:.1f} ms"

    def lines(self) -> Iterator[str]:
        """One line for each name."""
        for name, ms in self.found.items():
            spread = f"{min(ms):.1f} / {statistics.median(ms):.1f} / {max(ms):.1f} ms"
            yield f"{name}: {spread}, min / median / max of {len(ms)}"


@pytest.fixture(scope="module")
def figures(request: pytest.FixtureRequest) -> Iterator[Figures]:
    """What the tests of this module measured, said when they are over."""
    found = Figures()
    yield found
    manager = request.config.pluginmanager
    with manager.get_plugin("capturemanager").global_and_fixture_disabled():
        for line in ("", *found.lines()):
            manager.get_plugin("terminalreporter").write_line(line)


@pytest.fixture(params=SINKS)
def ear(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Ear]:
    """What hears all of it."""
    if request.param == "recording":
        yield RecordingEar(tmp_path)
    else:
        with jack_server(RATE_HZ, PERIOD, 2, FEEDS) as server:
            yield PortEar(server)


@pytest.fixture(params=SINKS)
def ear_at_ease(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Ear]:
    """The same, but JACK as venues run it, which waits for no client, nor for a recorder."""
    if request.param == "recording":
        yield RecordingEar(tmp_path)
    else:
        with jack_server(RATE_HZ, PERIOD, 2, FEEDS, synchronous=False) as server:
            yield DeafEar(server)


@pytest.fixture
def folder(tmp_path: Path) -> Iterator[Path]:
    """The show; what killed hosts left in memory is removed at the end."""
    yield write_loop_show(tmp_path / "show")
    shutil.rmtree(memory_folder())


def journals(folder: Path, most: int) -> Iterator[tuple[Path, int]]:
    """A journal for every host, and how many of the blows it is to take."""
    for done in range(0, BLOWS, most):
        yield folder.parent / f"from-{done}.jsonl", min(most, BLOWS - done)


def whole(judge: Judge, caught: Caught, ear: Ear) -> Heard:
    """What was heard of an engine that came to its end; a recording has all of it."""
    heard = judge.same_and_no_louder(caught, ear.tolerance)
    assert isinstance(ear, PortEar) or heard.end == judge.until
    return heard


# -- the host ---------------------------------------------------------------------------------


def test_a_killed_host_leaves_by_the_ramp(folder: Path, ear: Ear, figures: Figures) -> None:
    for journal, _ in journals(folder, 1):
        with host(folder, ear.new_sink(), journal, ear.env) as running:
            stage = Stage(running, folder)
            stage.play()
            blow, caught = ear.listen(partial(kill_host, stage))
        (stream,) = offline.recall(journal)
        stream.records += stage.final_records()  # nobody was there to write them
        judge = Judge(stream.show, stream, stage.outlet.count(at.READ))
        heard = whole(judge, caught, ear)
        heard.sounds_before(blow.frame)
        opened, (why, fall) = judge.gates()
        assert opened[0] == "opened"
        assert why in ("hushed", "lease-over")  # engine and guard both end what sounds, and race
        judge.falls_by_the_ramp(heard, fall)
        zero_ms = heard.ms_to_zero(blow.frame)
        figures.note(f"{ear.name}: host killed, zero after", zero_ms, ZERO_MS)


def kill_host(stage: Stage) -> Blow:
    with watched(engine_of(stage.running)) as engine:
        blow = strike(stage.outlet, stage.running.process.pid, signal.SIGKILL)
        stage.running.wait()
        assert engine.ended(), "an engine stays without its host"
    return blow


def test_a_stopped_host_leaves_by_the_ramp_and_stays_shut(
    folder: Path, ear: Ear, figures: Figures
) -> None:
    for journal, share in journals(folder, HARMLESS):
        with host(folder, ear.new_sink(), journal, ear.env) as running:
            stage = Stage(running, folder)
            stage.play()
            landed = [ear.listen(partial(stop_host, stage)) for _ in range(share)]
            assert running.stop() == 0
        (stream,) = offline.recall(journal)
        judge = Judge(stream.show, stream)
        falls, rises = judge.gates()[1:-1:2], judge.gates()[2:-1:2]
        assert [why for why, _ in falls] == ["host-over"] * share
        assert [why for why, _ in rises] == ["opened"] * share
        assert outputs(journal) == ["SHUT", "OPEN", *["HUSHED", "OPEN"] * share, "COLD"]
        for (blow, caught), (_, fall), (_, rise) in zip(landed, falls, rises, strict=True):
            heard = whole(judge, caught, ear)
            heard.sounds_before(blow.frame)
            judge.falls_by_the_ramp(heard, fall)
            zero_ms = heard.ms_to_zero(blow.frame, rise)
            figures.note(f"{ear.name}: host stopped, zero after", zero_ms, ZERO_MS)
            assert heard.between(rise, rise + RATE_HZ // 2).any(), "it was not restored"


def stop_host(stage: Stage) -> Blow:
    """Stop the host until the output is shut; it stays so until it is restored on purpose."""
    running, outlet = stage.running, stage.outlet
    with going_on(running.process.pid):
        blow = strike(outlet, running.process.pid, signal.SIGSTOP)
        wait_for(lambda: outlet.gate_gain == 0.0, "the gate to shut")
    wait_for(lambda: running.snapshot().output == "HUSHED", "HUSHED")
    (notice,) = running.snapshot().notices
    assert "the host stalled" in notice
    running.act("acknowledge")
    running.pass_by(0.3)
    assert running.snapshot().output == "HUSHED"
    assert outlet.gate_gain == 0.0
    running.open()
    wait_for(lambda: outlet.gate_gain == 1.0, "the gate to rise")
    return blow


# -- the engine -------------------------------------------------------------------------------


class Loss(NamedTuple):
    """An engine lost: the frame it came to, and when it was killed and replaced after the blow."""

    came_to: int
    killed_ms: float
    shut_ms: float


@pytest.mark.parametrize("how", KINDS, ids=KINDS.get)
def test_a_lost_engine_is_replaced_and_the_next_offers_what_looped(
    folder: Path, ear_at_ease: Ear, how: signal.Signals, figures: Figures
) -> None:
    what = f"{ear_at_ease.name}: engine {KINDS[how]}"
    for journal, share in journals(folder, ENGINES):
        for loss in lose_engines(folder, ear_at_ease, how, journal, share):
            if how == signal.SIGSTOP:
                figures.note(f"{what}, killed after", loss.killed_ms, KILLED_MS)
            figures.note(f"{what}, next one SHUT after", loss.shut_ms, SHUT_MS)


@pytest.mark.real
@pytest.mark.parametrize("how", KINDS, ids=KINDS.get)
def test_ports_repeat_nothing_of_a_lost_engine(folder: Path, how: signal.Signals) -> None:
    """A server that waits for its clients lets a recorder miss nothing, but keeps the next engine
    out for ten seconds: so here is one blow, and what the ports carried.
    """
    with jack_server(RATE_HZ, PERIOD, 2, FEEDS) as server:
        lose_engines(folder, PortEar(server), how, folder.parent / "one.jsonl", 1)


def lose_engines(
    folder: Path, ear: Ear, how: signal.Signals, journal: Path, share: int
) -> list[Loss]:
    """Lose `share` engines; each sent the replay up to its cut, and the last one loops again."""
    with host(folder, ear.new_sink(), journal, ear.env) as running:
        stage, landed = Stage(running, folder), []
        stage.play()
        for number in range(share):
            landed.append(ear.listen(partial(lose_engine, stage, how), number))
            assert running.snapshot().panels[0].peak_db is None, "it sounds, and nobody armed"
            stage.join()
            running.open()
            running.pass_by(0.4)
            assert running.snapshot().panels[0].peak_db is not None, "no loop came back"
        _, last = ear.listen(lambda: running.pass_by(0.3), share)
        assert running.stop() == 0
    streams = offline.recall(journal)
    begins = [stream.start for stream in streams[1:]]
    for (loss, caught), stream, next_begins in zip(landed, streams[:-1], begins, strict=True):
        assert loss.came_to <= next_begins
        if ear.hears:
            heard = Judge(stream.show, stream, loss.came_to).same_and_no_louder(
                caught, ear.tolerance, cut=True
            )
            heard.sounds_before(heard.silent_from())
    judge = Judge(streams[-1].show, streams[-1])
    assert [why for why, _ in judge.gates()] == ["opened", "hushed"]
    if ear.hears:
        assert whole(judge, last, ear).samples.any()
    return [loss for loss, _ in landed]


def lose_engine(stage: Stage, how: signal.Signals) -> Loss:
    running = stage.running
    with watched(engine_of(running)) as engine:
        blow = strike(stage.outlet, engine.pid, how)
        while not engine.renders_no_more():
            assert blow.since_ms() < SOON_S * 1000.0, "the host leaves an engine that is stopped"
            time.sleep(0.001)
        killed_ms = blow.since_ms()
        assert engine.ended()
    wait_for(lambda: running.snapshot().output == "LOST", "LOST")
    wait_for(lambda: running.snapshot().output == "SHUT", "the next engine")
    shut_ms = blow.since_ms()
    assert running.snapshot().states["1"] == "running"
    assert "engine gone; what looped comes back with * then Enter" in running.snapshot().notices
    return Loss(stage.outlet.count(at.READ), killed_ms, shut_ms)


def test_three_deaths_in_a_minute_stop_the_restarts(folder: Path) -> None:
    journal = folder.parent / "deaths.jsonl"
    with host(folder, "null", journal) as running:
        for death in (1, 2, 3):
            os.kill(engine_of(running), signal.SIGKILL)
            wait_for(lambda: running.snapshot().output == "LOST", "LOST")
            if death < 3:
                wait_for(lambda: running.snapshot().output == "SHUT", "the next engine")
        wait_for(lambda: bool(running.snapshot().engine.busy), "the host to tell")
        time.sleep(SHUT_MS / 1000.0)  # by when a fourth would have opened
        found = running.snapshot()
        assert found.output == "LOST"
        assert found.engine.busy == "engine gone three times in a minute"
        assert "three engines died in a minute" in found.notices[-1]
        assert not engines_of(running)
        assert running.stop() == 0
    assert outputs(journal) == ["SHUT", "LOST", "SHUT", "LOST", "SHUT", "LOST", "COLD"]


# -- the desk ---------------------------------------------------------------------------------


@pytest.mark.parametrize("how", KINDS, ids=KINDS.get)
def test_a_lost_desk_changes_no_sample(folder: Path, ear: Ear, how: signal.Signals) -> None:
    for journal, share in journals(folder, HARMLESS):
        with host(folder, ear.new_sink(), journal, ear.env) as running:
            stage, landed = Stage(running, folder), []
            stage.play()
            for _ in range(share):
                with desk(folder) as shown:
                    landed.append(ear.listen(partial(lose_desk, stage, shown, how)))
            assert running.stop() == 0
        (stream,) = offline.recall(journal)
        judge = Judge(stream.show, stream)
        assert [why for why, _ in judge.gates()] == ["opened", "hushed"]
        for blow, caught in landed:
            heard = whole(judge, caught, ear)
            heard.sounds_before(blow.frame)
            heard.sounds_before(blow.frame + RATE_HZ // 4)
        assert offline.replay([stream], lambda _: None, lambda *_: None)[0].same


def lose_desk(stage: Stage, shown: Desk, how: signal.Signals) -> Blow:
    """The show goes on for a while without its desk, which goes on itself if it can."""
    with going_on(shown.process.pid):
        blow = strike(stage.outlet, shown.process.pid, how)
        stage.running.pass_by(0.3)
    if how == signal.SIGKILL:
        assert shown.process.wait() == -signal.SIGKILL
    else:
        so_far = len(shown.shown)
        wait_for(lambda: len(shown.shown) > so_far, "the desk to draw again")
    return blow


def test_a_frozen_terminal_changes_no_sample_and_no_cue_time(tmp_path: Path) -> None:
    folder, journal, take = write_show(tmp_path / "small"), tmp_path / "f.jsonl", tmp_path / "f.wav"
    with host(folder, f"file:{take}", journal) as running, desk(folder, frozen=True) as shown:
        running.open()
        running.act("go", ref="1")
        wait_for(shown.is_blocked, "the desk to be blocked in writing", STARTS_S)
        for ref in ("2", "3"):
            running.act("go", ref=ref)
            running.pass_by(0.3)
        wait_for(lambda: "4" in fired(journal), "the follow-on")
        running.pass_by(0.1)
        assert shown.is_blocked(), "the terminal was not frozen"
        assert running.stop() == 0

    (stream,) = offline.recall(journal)
    judge = Judge(stream.show, stream)
    judge.same_and_no_louder(lambda _: Heard(stream.start, recorded(take)), 0.0)
    gos = [(r.sample, r.cue) for r in told(journal, "go") if r.who == "desk"]
    planned = offline.play_through(stream.show, gos, judge.until)
    assert moves(planned) == moves(stream.records)


def moves(records: Iterable[Record]) -> list[tuple[int, str, str, str]]:
    """What was done to which beam on whose account, and when."""
    return sorted((r.sample, r.what, r.beam, r.cue) for r in records if r.what in SOUNDING)
