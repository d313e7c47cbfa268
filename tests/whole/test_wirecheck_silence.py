"""The wiring check falls silent: by every key that says so, and by whatever ends it."""

from __future__ import annotations

import os
import pty
import time
from collections.abc import Callable
from functools import partial
from pathlib import Path

import numpy as np
import pytest
import soundfile
from support.person import begin, files_in, mark, person
from support.smallshow import RATE_HZ, write_show

from beamctl.engine import layout as at
from beamctl.engine.outlet import Outlet
from beamctl.files.reader import load_show
from beamctl.host.places import memory_folder, show_key
from beamctl.host.stepping import Stepper
from beamctl.host.typed import Keys, Silenced

DRIVE = 0.01  # 40 dB under full scale
SILENCE_S = 0.030


@pytest.fixture
def show(tmp_path: Path) -> Path:
    return write_show(tmp_path / "small")


SILENCERS = {
    "0": "0",
    "q": "q",
    "Ctrl-C": "\x03",
    "Insert": "\x1b[2~",
    "keypad 0": "\x1bOp",
    "F12": "\x1b[24~",
}


def outlet_of(show: Path) -> Outlet:
    """The memory of the check that runs."""
    return Outlet.attach(memory_folder() / f"{show_key(show)}.wirecheck")


def until_zero_s(outlet: Outlet, act: Callable[[], object]) -> tuple[float, float]:
    """Seconds from an act to the first frame of silence: on the sink's clock, and to seeing it.

    A frame leaves when the sink's clock comes to it; what was asked for last is the clock's mark.
    """
    outlet.events()
    seen, marked = outlet.count(at.LAST_READ), outlet.count(at.LAST_NS)
    acted = time.monotonic_ns()
    act()
    while outlet.gate_gain > 0.0:
        assert time.monotonic_ns() - acted < 1e9, "it did not fall silent"
        time.sleep(0.0002)
    saw_s = (time.monotonic_ns() - acted) * 1e-9
    (hushed,) = [event for event in outlet.events() if event.name in ("hushed", "lease-over")]
    acted_at = seen + (acted - marked) * 1e-9 * RATE_HZ
    return (hushed.sample + hushed.value - acted_at) / RATE_HZ, saw_s


def test_a_key_silences_within_30_ms_20_of_20(show: Path, tmp_path: Path) -> None:
    """A real terminal, the thread that reads it, and a recording: 20 presses, every key in turn."""
    found = load_show(show)
    phasors = np.full(found.channels, DRIVE, np.complex128)
    times = []
    for press in range(20):
        take = tmp_path / f"take{press}.wav"
        ours, theirs = pty.openpty()
        stepper = Stepper(found, f"file:{take}", phasors, np.full(found.channels, 40e3))
        try:
            with Keys(theirs, stepper.hush) as keys:
                stepper.open()
                stepper.sound([16, 17])
                time.sleep(0.25 + 0.0037 * press)  # at every place in a block
                key = list(SILENCERS.values())[press % len(SILENCERS)].encode()
                times.append(until_zero_s(stepper.outlet, partial(os.write, ours, key)))
                with pytest.raises(Silenced):
                    keys.next(1.0)
                silent_from = stepper.outlet.events()
                assert silent_from == []
                time.sleep(0.03)
        finally:
            stepper.close()
            os.close(ours)
            os.close(theirs)
        samples, _ = soundfile.read(take, dtype="float32")
        sounded = np.flatnonzero(np.any(samples != 0.0, axis=1))
        assert np.max(np.abs(samples)) > 0.99 * DRIVE
        assert len(samples) - sounded[-1] > RATE_HZ * 0.02, "silence was not the end"
    clock_ms, seen_ms = 1000.0 * np.array(times).T
    told = f"clock {np.sort(clock_ms).round(1)}, seen {np.sort(seen_ms).round(1)} ms"
    print(told)
    assert np.all(seen_ms <= 1000.0 * SILENCE_S), told
    assert np.all(clock_ms <= 1000.0 * SILENCE_S), told


@pytest.mark.parametrize("name", [*SILENCERS, "SIGTERM", "a closed terminal"])
def test_silence_ends_the_check_and_writes_nothing(show: Path, tmp_path: Path, name: str) -> None:
    before = files_in(show)
    with person(show, "--panel", "strip", "--sink", f"file:{tmp_path}/take.wav") as who:
        begin(who)
        mark(who, "p")
        who.wait_for("  feed ")
        time.sleep(0.3)
        outlet = outlet_of(show)
        assert outlet.gate_gain == 1.0
        if name in SILENCERS:
            _, seen_s = until_zero_s(outlet, lambda: who.type(SILENCERS[name]))
        elif name == "SIGTERM":
            _, seen_s = until_zero_s(outlet, who.process.terminate)
        else:
            _, seen_s = until_zero_s(outlet, who.hang_up)
        print(f"{name}: {1000 * seen_s:.1f} ms")
        assert seen_s <= SILENCE_S
        assert who.ends() == 1
        assert name not in SILENCERS or "silenced: nothing is written" in who.seen
    assert files_in(show) == before
    samples, _ = soundfile.read(tmp_path / "take.wav", dtype="float32")
    assert np.max(np.abs(samples)) > 0.99 * DRIVE
    assert not samples[-RATE_HZ // 1000 :].any()


def test_a_check_that_is_killed_falls_silent_by_its_lease(show: Path) -> None:
    """Nobody renews the lease: the final stage, which a device would still call, shuts the gate."""
    with person(show, "--panel", "strip") as who:
        begin(who)
        mark(who, "p")
        outlet = outlet_of(show)
        who.process.kill()
        who.process.wait()
        start = outlet.count(at.READ)
        block = np.zeros((256, outlet.channels), np.float32)
        assert outlet.gate_gain == 1.0
        while outlet.gate_gain > 0.0:
            outlet.pull(block)
            outlet.push(np.full_like(block, DRIVE))
            assert outlet.count(at.READ) - start < 0.2 * RATE_HZ
        outlet.pull(block)
        assert not block.any()
