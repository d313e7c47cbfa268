"""The compiled callback, called as PortAudio calls it, on a ring that wraps and runs empty."""

from __future__ import annotations

import ctypes
import re

import numpy as np
import pytest
from numba import cfunc
from numpy.typing import NDArray

from beamctl.sinks.callback import ADDRESS, SIGNATURE, callback
from beamctl.sinks.ring import Ring

CHANNELS = 3
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


def ask(ring: Ring, frames: int, now_s: float = 0.0) -> NDArray[np.float32]:
    """What the device gets; its buffer comes full of rubbish, and one frame too long."""
    output = np.full((frames + 1, CHANNELS), np.nan, np.float32)
    clock = np.array([0.0, now_s, 0.0])
    status = call(None, output.ctypes.data, frames, clock.ctypes.data, 0, ring.memory.ctypes.data)
    assert status == 0  # paContinue
    assert np.isnan(output[frames]).all()
    return output[:frames]


def count(start: int, frames: int) -> NDArray[np.float32]:
    """Frames that tell their place: exact in float32."""
    return np.arange(start * CHANNELS, (start + frames) * CHANNELS, dtype=np.float32).reshape(
        frames, CHANNELS
    )


@pytest.mark.parametrize("block", [1, 64, 256, 1000])
def test_order_is_kept_over_every_wrap(block: int) -> None:
    ring = Ring(1013, CHANNELS)  # a prime: the seam falls everywhere
    written = read = 0
    while read < 6 * ring.frames:
        while ring.room:
            frames = min(block, ring.room)
            ring.push(count(written, frames))
            written += frames
        np.testing.assert_array_equal(ask(ring, block), count(read, block))
        read += block
    assert ring.empty == 0
    assert ring.block == block


@pytest.mark.parametrize("block", [1, 64, 256, 1000])
def test_an_empty_ring_gives_exact_zeros_and_is_counted(block: int) -> None:
    ring = Ring(block + 7, CHANNELS)
    ring.push(count(1, block + 7))
    ask(ring, block)
    np.testing.assert_array_equal(ask(ring, 8)[7:], 0.0)
    for empties in range(2, 5):
        got = ask(ring, block)
        np.testing.assert_array_equal(got.view(np.uint32), 0)
        assert ring.empty == empties
    assert ring.callbacks == 5


def test_what_the_ring_has_comes_before_the_zeros() -> None:
    ring = Ring(100, CHANNELS)
    ring.push(count(1, 100))
    ask(ring, 70)
    got = ask(ring, 64)
    np.testing.assert_array_equal(got[:30], count(71, 30))
    np.testing.assert_array_equal(got[30:].view(np.uint32), 0)
    assert ring.empty == 1
    ring.push(count(101, 5))
    np.testing.assert_array_equal(ask(ring, 5), count(101, 5))


def test_nothing_sounds_or_counts_before_the_ring_was_full() -> None:
    ring = Ring(100, CHANNELS)
    ring.push(count(1, 60))
    np.testing.assert_array_equal(ask(ring, 10).view(np.uint32), 0)
    ring.push(count(61, 40))
    np.testing.assert_array_equal(ask(ring, 10), count(1, 10))
    assert (ring.callbacks, ring.empty) == (2, 0)


def test_the_longest_gap_is_by_the_device_clock() -> None:
    ring = Ring(100, CHANNELS)
    for now_s in (7.0, 7.005, 7.105, 7.110):
        ask(ring, 10, now_s)
    assert ring.longest_s == pytest.approx(0.1, abs=1e-6)


def test_a_block_that_does_not_fit_is_refused() -> None:
    ring = Ring(100, CHANNELS)
    with pytest.raises(ValueError, match="does not fit"):
        ring.push(count(0, 101))
    with pytest.raises(ValueError, match="does not fit"):
        ring.push(np.zeros((10, CHANNELS + 1), np.float32))
    assert ring.room == 100


def test_the_compiled_code_calls_nothing_but_itself() -> None:
    afresh = cfunc(SIGNATURE, error_model="numpy")(callback.__wrapped__)  # cached code has no text
    bodies = re.findall(r"^define[^\n]*@_ZN.*?^}", afresh.inspect_llvm(), re.MULTILINE | re.DOTALL)
    called = {name for body in bodies for name in re.findall(r"\bcall [^@\n]*@([\w.]+)", body)}
    assert bodies
    assert "llvm.memset.p0.i64" in called  # the zeros
    others = {n for n in called if not n.startswith(("llvm.", "_ZN7beamctl5sinks8callback"))}
    assert others == set()  # no Python, no allocation, no lock
