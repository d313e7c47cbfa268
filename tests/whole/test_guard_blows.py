"""The guard is stopped, killed, starved, spoiled and misled while a cue sounds.

Three blows of each kind; BEAMCTL_BLOWS=20 in the environment makes it twenty. Each falls right
after the final stage was seen to let a block of the open output out. Silence is timed in the
samples that left; all of them must be the replay of the journal. The last lines of a run tell the
times.
"""

from __future__ import annotations

import os
import shutil
import statistics
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from support.blows import Judge, Stage
from support.ears import RecordingEar
from support.guardblows import (
    HOUR_S,
    Struck,
    Undo,
    fill_memory,
    kill,
    make_it_throw,
    set_clock,
    stop,
    stop_for_good,
    strike_guard,
    write_loud_show,
)
from support.running import host, outputs, told
from support.smallshow import RATE_HZ
from support.wallclock import WallClock

from beamctl.host import offline
from beamctl.host.places import memory_folder

BLOWS = int(os.environ.get("BEAMCTL_BLOWS", "3"))
DEATHS = 2  # of its guard that a host sees through within a minute
HARMLESS = 5  # blows that one host goes through when its guard survives them
ZERO_MS = 250.0
LOST_DOSE_PCT = 0.06  # between two tellings of the dose, and until the gate is shut; of 0.2

Deal = Callable[[Stage], Undo]

pytestmark = pytest.mark.timeout(300 + 20 * BLOWS)


@pytest.fixture(scope="module")
def figures(request: pytest.FixtureRequest) -> Iterator[dict[str, list[float]]]:
    """Milliseconds to silence by kind, said when the module is over."""
    found: dict[str, list[float]] = {}
    yield found
    manager = request.config.pluginmanager
    with manager.get_plugin("capturemanager").global_and_fixture_disabled():
        write = manager.get_plugin("terminalreporter").write_line
        write("")
        for kind, ms in ((kind, ms) for kind, ms in found.items() if ms):
            spread = f"{min(ms):.1f} / {statistics.median(ms):.1f} / {max(ms):.1f} ms"
            write(f"guard {kind}, zero after: {spread}, min / median / max of {len(ms)}")


@pytest.fixture
def folder(tmp_path: Path) -> Iterator[Path]:
    """The show; nothing of its hosts stays in memory."""
    yield write_loud_show(tmp_path / "show")
    shutil.rmtree(memory_folder(), ignore_errors=True)


KINDS: dict[str, tuple[Deal, int, tuple[str, ...]]] = {
    "stopped": (stop, HARMLESS, ("the guard's lease ran out: ", "blind: it stalls")),
    "stopped for good": (stop_for_good, DEATHS, ("the guard's lease ran out: ", "blind: it stall")),
    "killed": (kill, DEATHS, ("the guard died",)),
    "out of memory": (fill_memory, DEATHS, ("MemoryError",)),
    "throwing": (make_it_throw, DEATHS, ("OverflowError",)),
}


@pytest.mark.parametrize("kind", KINDS)
def test_a_lost_guard_is_silence_until_somebody_comes_back(
    folder: Path, tmp_path: Path, kind: str, figures: dict[str, list[float]]
) -> None:
    deal, most, reasons = KINDS[kind]
    env = dict(os.environ)
    if kind == "out of memory":  # each array comes fresh from the system, which then refuses it
        env["MALLOC_MMAP_THRESHOLD_"] = "4096"
    ear = RecordingEar(tmp_path)
    for done in range(0, BLOWS, most):
        deals = [deal] * min(most, BLOWS - done)
        figures.setdefault(kind, []).extend(
            go_through(folder, ear, tmp_path / f"from-{done}.jsonl", deals, reasons, env)
        )


@pytest.mark.real
def test_a_clock_that_jumps_is_silence_until_somebody_comes_back(
    folder: Path, tmp_path: Path, figures: dict[str, list[float]]
) -> None:
    ear, clock = RecordingEar(tmp_path), WallClock(tmp_path)
    jumps = [(-1) ** k * HOUR_S for k in range(BLOWS)]
    for done in range(0, BLOWS, HARMLESS):
        deals = [set_clock(clock, jump) for jump in jumps[done : done + HARMLESS]]
        figures.setdefault("misled by an hour", []).extend(
            go_through(
                folder,
                ear,
                tmp_path / f"from-{done}.jsonl",
                deals,
                ("the clock jumped by +3600 s", "the clock jumped by -3600 s"),
                clock.env,
            )
        )


def go_through(
    folder: Path,
    ear: RecordingEar,
    journal: Path,
    deals: list[Deal],
    reasons: tuple[str, ...],
    env: dict[str, str],
) -> list[float]:
    """One host whose guard takes all these blows; milliseconds from each to the first zero."""
    landed: list[Struck] = []
    with host(folder, ear.new_sink(), journal, env) as running:
        stage = Stage(running, folder)
        stage.play()
        for deal in deals:
            running.pass_by(1.2)  # so that dose has been told
            struck, caught = ear.listen(lambda deal=deal: strike_guard(stage, deal))
            landed.append(struck)
        assert running.stop() == 0
    (stream,) = offline.recall(journal)
    judge = Judge(stream.show, stream)
    heard = judge.same_and_no_louder(caught, 0.0)
    count = len(deals)
    falls, rises = judge.gates()[1:-1:2], judge.gates()[2:-1:2]
    assert [why for why, _ in rises] == ["opened"] * count
    assert outputs(journal) == ["SHUT", "OPEN", *["TRIPPED", "HUSHED", "OPEN"] * count, "COLD"]
    trips = [str(record.args["reason"]) for record in told(journal, "trip")]
    assert trips == [struck.reason for struck in landed]
    assert all(reason.startswith(reasons) for reason in trips), trips
    assert len(told(journal, "clear")) == count
    assert offline.replay([stream], lambda _: None, lambda *_: None)[0].same
    zeros_ms = []
    for struck, (_, fall), (_, rise) in zip(landed, falls, rises, strict=True):
        heard.sounds_before(struck.blow.frame)
        judge.falls_by_the_ramp(heard, fall)
        zero_ms = heard.ms_to_zero(struck.blow.frame, rise)
        assert 0.0 < zero_ms <= ZERO_MS
        assert heard.between(rise, rise + RATE_HZ // 2).any(), "it was not restored"
        assert struck.before_pct > 3 * LOST_DOSE_PCT
        assert struck.after_pct > struck.before_pct - LOST_DOSE_PCT, "dose was forgotten"
        zeros_ms.append(zero_ms)
    return zeros_ms
