"""Blows to the guard of a running show, and the deliberate way back from each."""

from __future__ import annotations

import os
import resource
import signal
import time
from collections.abc import Callable
from pathlib import Path
from typing import NamedTuple

from support.blows import Blow, Stage, guard_of, write_loop_show
from support.running import SOON_S, wait_for
from support.wallclock import WallClock

from beamctl.engine import layout as at
from beamctl.files.signing import seal_of, sign

SHUT_S = 0.3  # how long it is watched to stay shut
LAST = 2**63 - 1  # the greatest number that a word of shared memory holds
FULL_BYTES = 1 << 20  # of address space: less than any process has already
HOUR_S = 3600

Undo = Callable[[], None]


def write_loud_show(folder: Path) -> Path:
    """The show of the other blows, signed, 20 dB louder, with a dose that is soon seen."""
    write_loop_show(folder)
    rig = folder / "rig.toml"
    rig.write_text(rig.read_text().replace("level_db_30cm_10v = 95.0", "level_db_30cm_10v = 115.0"))
    (folder / "guard.toml").write_text("format = 1\ndose_window_s = 60.0\n")
    sign(folder, "a test", "2026-01-01", seal_of(folder))
    return folder


# -- what is dealt; each returns how the machine is put right again ---------------------------


def stop(stage: Stage) -> Undo:
    """The guard's process is stopped, and goes on later."""
    guard = guard_of(stage.running)
    os.kill(guard, signal.SIGSTOP)
    return lambda: os.kill(guard, signal.SIGCONT)


def stop_for_good(stage: Stage) -> Undo:
    """It is stopped until the host makes an end of it."""
    os.kill(guard_of(stage.running), signal.SIGSTOP)
    return lambda: None


def kill(stage: Stage) -> Undo:
    """It is killed."""
    os.kill(guard_of(stage.running), signal.SIGKILL)
    return lambda: None


def fill_memory(stage: Stage) -> Undo:
    """There is no more memory for it: what its estimator asks for next is refused."""
    resource.prlimit(guard_of(stage.running), resource.RLIMIT_AS, (FULL_BYTES, FULL_BYTES))
    return lambda: None


def make_it_throw(stage: Stage) -> Undo:
    """The count that it alone keeps in shared memory is spoiled: its arithmetic overflows.

    The ceilings that the final stage then finds are a little lower than those that held.
    """
    outlet = stage.outlet
    count = outlet.count(at.GRANTS)
    row = at.CEILINGS + (LAST % at.GRANTS_KEPT) * at.MAX_PANELS
    lower = [0.999 * ceiling for ceiling in outlet.granted(count)]
    outlet.memory[row : row + len(lower)].view("f8")[:] = lower
    outlet.memory[at.GRANTS] = LAST

    def undo() -> None:
        outlet.memory[at.GRANTS] = count

    return undo


def set_clock(clock: WallClock, seconds: int) -> Callable[[Stage], Undo]:
    """The system's clock is set on or back."""

    def jump(_: Stage) -> Undo:
        clock.jump(seconds)
        return lambda: None

    return jump


# -- around a blow ----------------------------------------------------------------------------


class Struck(NamedTuple):
    """A blow, and how much dose the worst seat had before and after the way back, in percent."""

    blow: Blow
    before_pct: float
    after_pct: float
    reason: str


def strike_guard(stage: Stage, deal: Callable[[Stage], Undo]) -> Struck:
    """Strike, see it trip and stay shut, put the machine right, see it stay shut; come back."""
    running, outlet = stage.running, stage.outlet
    before_pct = running.snapshot().guard.dose_pct
    before, until_s = outlet.count(at.SOUNDED), time.monotonic() + SOON_S
    while outlet.count(at.SOUNDED) == before or outlet.gate_gain < 1.0:
        assert time.monotonic() < until_s, "nothing sounds, so a blow would show nothing"
        time.sleep(0.0002)
    blow = Blow(outlet.count(at.READ), time.monotonic())
    undo = deal(stage)
    try:
        wait_for(lambda: outlet.gate_gain == 0.0, "the gate to shut")
        wait_for(lambda: running.snapshot().output == "TRIPPED", "TRIPPED")
        reason = running.snapshot().guard.reason
        stays_shut(stage)
    finally:
        undo()
    stays_shut(stage)
    comes_back(stage)
    return Struck(blow, before_pct, running.snapshot().guard.dose_pct, reason)


def stays_shut(stage: Stage) -> None:
    """Tripped, silent and refusing, for a while."""
    running, outlet = stage.running, stage.outlet
    for _ in range(3):
        found = running.snapshot()
        assert (found.output, found.guard.state) == ("TRIPPED", "TRIPPED")
        assert (outlet.gate_gain, outlet.count(at.GATE)) == (0.0, 0)
        for name in ("restore", "ready", "go"):
            answer = running.link.act(name)
            assert (answer.done, answer.reason) == (False, "tripped"), name
        running.pass_by(SHUT_S / 3)


def comes_back(stage: Stage) -> None:
    """The word clears the trip and opens nothing; restore does, and the loop sounds again."""
    running, outlet = stage.running, stage.outlet
    answer = running.link.act("clear", word="restore")
    assert (answer.done, answer.reason) == (False, "tripped")
    wait_for(lambda: running.link.act("clear", word="Clear").done, "the guard to see again")
    assert running.snapshot().output == "HUSHED"
    running.pass_by(SHUT_S / 3)
    assert (outlet.gate_gain, outlet.count(at.GATE)) == (0.0, 0)
    while running.snapshot().notices:
        running.act("acknowledge")
    running.act("restore")
    wait_for(lambda: outlet.gate_gain == 1.0, "the gate to rise")
    running.pass_by(0.1)
    found = running.snapshot()
    assert (found.output, found.guard.reason, found.notices) == ("OPEN", "", ())
    assert found.panels[0].peak_db is not None, "no loop came back"
