"""The compiled callback, called as a device calls it; and one outlet shared by two processes."""

from __future__ import annotations

import contextlib
import ctypes
import inspect
import re
import subprocess
import sys
import time
from pathlib import Path

import numba
import numpy as np
import pytest
from numba import cfunc
from numba.core.dispatcher import Dispatcher
from numpy.typing import NDArray

from beamctl.engine import final
from beamctl.engine import layout as at
from beamctl.engine.callback import ADDRESS, SIGNATURE, callback
from beamctl.engine.outlet import Outlet, Wire

CHANNELS = 4
WIRES = (Wire(1, 3, 0.5),)
FOREVER = 10**15
F32 = NDArray[np.float32]
# PaStreamCallback, portaudio.h
PROTOTYPE = ctypes.CFUNCTYPE(
    ctypes.c_int,
    ctypes.c_void_p,
    ctypes.c_void_p,
    ctypes.c_ulong,
    ctypes.c_void_p,
    ctypes.c_ulong,
    ctypes.c_void_p,
)
call = PROTOTYPE(ADDRESS)


def ask(outlet: Outlet, frames: int, now_s: float = 0.0) -> F32:
    """What the device gets; its buffer comes full of rubbish, and one frame too long."""
    output = np.full((frames + 1, CHANNELS), np.nan, np.float32)
    clock = np.array([0.0, now_s, 0.0])  # PaStreamCallbackTimeInfo: currentTime stands second
    status = call(None, output.ctypes.data, frames, clock.ctypes.data, 0, outlet.memory.ctypes.data)
    assert status == 0  # paContinue
    assert np.isnan(output[frames]).all()
    return output[:frames]


def twins() -> tuple[Outlet, Outlet]:
    """Two outlets that are told the same."""
    first, second = (Outlet.create(None, 3_001, CHANNELS, WIRES, 500) for _ in range(2))
    for outlet in (first, second):
        outlet.grant(20_000, [0.3])
        outlet.host_lives(1 << 62)
        outlet.ask_open(700)
    return first, second


@pytest.mark.parametrize("block", [1, 64, 256, 333, 1000, 1024, 2048])
def test_by_its_address_it_does_what_pull_does(block: int) -> None:
    """Over wraps, above the ceiling, a broken sample, a hush, a drought and the lease's end."""
    rng = np.random.default_rng(4)
    tape = rng.uniform(-0.6, 0.6, (24_000, CHANNELS)).astype(np.float32)
    tape[5_000, 2] = np.nan
    called, pulled = twins()
    hushed = False
    for n, _ in enumerate(range(0, 24_000 + 2 * block, block), start=1):
        for outlet in (called, pulled):
            written = outlet.count(at.WRITTEN)
            while written < len(tape) and outlet.room >= 256:
                outlet.push(tape[written : written + 256])
                written = outlet.count(at.WRITTEN)
            if not hushed and outlet.count(at.READ) >= 8_000:
                outlet.hush()
                outlet.ask_open(500)  # in vain
        hushed = hushed or called.count(at.READ) >= 8_000
        if called.count(at.READ) in range(12_000, 12_000 + block):
            called.ask_open(900)
            pulled.ask_open(900)
        out = np.full((block, CHANNELS), np.nan, np.float32)
        pulled.pull(out, round(n * 5e6))
        np.testing.assert_array_equal(
            ask(called, block, n * 5e-3).view(np.uint32), out.view(np.uint32)
        )
    words = np.delete(np.arange(at.HEADER), [at.LAST_NS, at.LONGEST_NS])
    np.testing.assert_array_equal(called.memory[words], pulled.memory[words])
    assert called.count(at.CALLBACKS) == n
    assert called.count(at.BLOCK) == block
    events = [event.name for event in called.events() if event.name != "short"]
    wanted = ["granted", "opened", "fault", "hushed", "opened", "lease-over"]
    assert events[:6] == wanted
    assert set(events[6:]) == {"dry"}


def test_the_longest_gap_is_by_the_device_clock() -> None:
    outlet, _ = twins()
    for now_s in (7.0, 7.005, 7.105, 7.110):
        ask(outlet, 10, now_s)
    assert outlet.count(at.LONGEST_NS) == pytest.approx(0.1e9, abs=1e3)
    assert outlet.count(at.LAST_NS) == pytest.approx(7.110e9, abs=1e3)


# -- what it is made of ----------------------------------------------------------------------------


def compiled_afresh() -> str:
    """The callback's LLVM text with all that it calls; code from the cache has none."""
    return cfunc(SIGNATURE, error_model="numpy")(callback.__wrapped__).inspect_llvm()


def test_the_compiled_code_calls_nothing_but_itself() -> None:
    """No Python, no allocation, no lock; of the C library only its square root, which has neither.

    References are counted for arrays that own memory; one over a bare pointer has none to count.
    """
    text = compiled_afresh()
    bodies = re.findall(r"^define[^\n]*@_ZN.*?^}", text, re.MULTILINE | re.DOTALL)
    called = {name for body in bodies for name in re.findall(r"\bcall [^@\n]*@([\w.]+)", body)}
    assert len(bodies) > 5
    assert "llvm.memset.p0.i64" in called  # the zeros
    here = set(re.findall(r"^define[^\n]*@(_ZN7beamctl[\w.]+)", text, re.MULTILINE))
    others = {name for name in called if not name.startswith("llvm.")} - here
    assert others <= {"NRT_incref", "NRT_decref", "sqrt"}
    for name in ("NRT_incref", "NRT_decref"):
        (body,) = re.findall(rf"^define[^\n]*@{name}\(.*?^}}", text, re.MULTILINE | re.DOTALL)
        assert re.search(r"icmp eq ptr %\.1, null\n\s*br i1", body)  # first thing


def test_no_shortcut_of_arithmetic_is_allowed() -> None:
    """Not in the callback, and not in the final stage as Python calls it."""
    names = "fast|nnan|ninf|nsz|arcp|contract|afn|reassoc"
    flags = rf"\b(?:fadd|fsub|fmul|fdiv|fcmp|fneg|frem|call|select|phi)(?: \w+)*? (?:{names})\b"
    texts = [compiled_afresh()]
    functions = [f for _, f in inspect.getmembers(final) if isinstance(f, Dispatcher)]
    assert final.pull in functions
    for function in functions:
        afresh = numba.njit(nogil=True, error_model="numpy")(function.py_func)
        for signature in function.nopython_signatures:
            afresh.compile(signature.args)
            texts.append(afresh.inspect_llvm(signature.args))
    assert len(texts) > 2
    for text in texts:
        assert not re.search(flags, text)
    shortcut = numba.njit(fastmath=True)(lambda x: x + 1.0)
    shortcut.compile((numba.float64,))
    assert re.search(flags, shortcut.inspect_llvm((numba.float64,)))  # it would be found


# -- shared ----------------------------------------------------------------------------------------

PUSHER = """
import sys
from pathlib import Path
import numpy as np
from beamctl.engine.outlet import Outlet

outlet, total = Outlet.attach(Path(sys.argv[1])), int(sys.argv[2])
sent = 0
while sent < total:
    n = min(256, total - sent)
    if outlet.room >= n:
        frames = np.arange(sent, sent + n, dtype=np.float32)[:, None] * np.float32(2.0**-22)
        outlet.push(np.repeat(frames, 4, 1))
        sent += n
"""
SHARED_FRAMES = 2_000_000


def test_two_processes_share_it_without_losing_or_repeating_a_frame(tmp_path: Path) -> None:
    """One pushes numbered frames as fast as it may, the other pulls, droughts and all."""
    path = tmp_path / "outlet"
    outlet = Outlet.create(path, 3_001, CHANNELS, WIRES, 0)  # comes back at once from a drought
    outlet.grant(FOREVER, [1e6])
    outlet.host_lives(1 << 62)
    outlet.ask_open(0)
    rng = np.random.default_rng(5)
    sizes = rng.integers(1, 1_025, 1_000).tolist()
    command = [sys.executable, "-c", PUSHER, str(path), str(SHARED_FRAMES)]
    with subprocess.Popen(command) as pusher, contextlib.ExitStack() as whatever_comes:
        whatever_comes.callback(pusher.kill)
        read = pulls = 0
        deadline = time.monotonic() + 120.0
        while read < SHARED_FRAMES and time.monotonic() < deadline:
            out = np.full((sizes[pulls % len(sizes)], CHANNELS), np.nan, np.float32)
            outlet.pull(out)
            pulls += 1
            taken = outlet.count(at.READ) - read
            wanted = np.arange(read, read + taken, dtype=np.float32) * np.float32(2.0**-22)
            assert (out[:taken, 1:] == wanted[:, None]).all()
            assert not out[taken:].any()
            assert not out[:, 0].any()
            read += taken
        assert read == SHARED_FRAMES
        assert pusher.wait(30.0) == 0
    print(f"{pulls} pulls, {outlet.count(at.EMPTY)} of them found too little")
    assert outlet.count(at.FAULTS) == outlet.count(at.CLIPS) == 0


def test_what_it_costs() -> None:
    """µs for 1024 frames of 64 channels, open, under the ceiling and held by it; printed."""
    for name, ceiling in (("untouched", 1e6), ("held", 0.5)):
        outlet = Outlet.create(None, 8_192, 64, (Wire(0, 32, 1.0), Wire(32, 32, 1.0)), 0)
        outlet.grant(FOREVER, [ceiling, ceiling])
        outlet.host_lives(1 << 62)
        outlet.ask_open(0)
        block = np.random.default_rng(6).uniform(-1.0, 1.0, (1_024, 64)).astype(np.float32)
        out = np.empty((1_024, 64), np.float32)
        took_ns = []
        for _ in range(100):
            while outlet.room >= 1_024:
                outlet.push(block)
            start = time.perf_counter_ns()
            outlet.pull(out)
            took_ns.append(time.perf_counter_ns() - start)
        print(f"{name}: {np.median(took_ns) / 1e3:.0f} µs")
        drive = np.sqrt(np.sum(np.mean(out[:, :32].astype(np.float64) ** 2, axis=0)))
        assert drive == pytest.approx(min(ceiling, np.sqrt(32 / 3)), rel=0.02)
