"""The compiled code between the writer and the device: no Python, no allocation, no lock.

Both sides share one block of memory: HEADER_WORDS int64 words, then the ring of float32 frames.
The words that the writer changes and those that the callback changes lie on cache lines of their
own. Positions count frames since the start and only grow, so filled = WRITTEN - READ.
"""

from __future__ import annotations

import ctypes
from typing import Any

import numpy as np
from numba import carray, cfunc, njit, types
from numba.extending import intrinsic

WRITTEN, FLOWING = 0, 1  # the writer's words
READ, CALLBACKS, EMPTY, BLOCK, LAST_NS, LONGEST_NS = 8, 9, 10, 11, 12, 13  # the callback's words
FRAMES, CHANNELS = 16, 17  # set once
HEADER_WORDS = 24
_HEADER_FLOATS = 2 * HEADER_WORDS

_ULONG = types.uint64 if ctypes.sizeof(ctypes.c_ulong) == 8 else types.uint32
SIGNATURE = types.intc(  # PaStreamCallback, portaudio.h
    types.voidptr,
    types.CPointer(types.float32),
    _ULONG,
    types.CPointer(types.float64),
    _ULONG,
    types.voidptr,
)


def _build_fence(_typing_context: Any) -> Any:
    """Nothing moves across: what was copied is seen before the position that announces it."""

    def build(context: Any, builder: Any, _signature: Any, _arguments: Any) -> Any:
        builder.fence("seq_cst")
        return context.get_dummy_value()

    return types.void(), build


_fence: Any = intrinsic(_build_fence)


@njit(cache=True, nogil=True, error_model="numpy")
def _move(source, start, target, place, count):
    """Copy `count` floats; unsigned indices, so that none is taken from the end as in Python."""
    for k in range(np.uint64(count)):
        target[np.uint64(place) + k] = source[np.uint64(start) + k]


@njit(
    types.void(types.int64[::1], types.float32[::1], types.float32[:, ::1]),
    cache=True,
    nogil=True,
    error_model="numpy",
)
def push(words, ring, block):
    """Copy (n, channels) into the ring; the caller has made sure that it has room."""
    frames, channels, written = words[FRAMES], words[CHANNELS], words[WRITTEN]
    _fence()
    start = written % frames
    straight = min(block.shape[0], frames - start)
    flat = block.reshape(block.size)
    _move(flat, 0, ring, start * channels, straight * channels)
    _move(flat, straight * channels, ring, 0, (block.shape[0] - straight) * channels)
    _fence()
    words[WRITTEN] = written + block.shape[0]


@cfunc(SIGNATURE, cache=True, error_model="numpy")
def callback(_input, output, count, clock, _flags, user):
    """Ring → device; exact zeros for what the ring lacks, and before the ring was first full."""
    words = carray(user, HEADER_WORDS, np.int64)
    frames, channels, wanted = words[FRAMES], words[CHANNELS], np.int64(count)
    for k in range(wanted * channels):
        output[k] = np.float32(0.0)

    words[CALLBACKS] += 1
    words[BLOCK] = max(words[BLOCK], wanted)
    now_ns = np.int64(clock[1] * 1e9)  # PaStreamCallbackTimeInfo.currentTime
    if words[CALLBACKS] > 1:
        words[LONGEST_NS] = max(words[LONGEST_NS], now_ns - words[LAST_NS])
    words[LAST_NS] = now_ns
    if words[FLOWING] == 0:
        return np.int32(0)

    read = words[READ]
    held = words[WRITTEN] - read
    _fence()
    if held < wanted:
        words[EMPTY] += 1
    taken = min(held, wanted)
    ring = carray(user, _HEADER_FLOATS + frames * channels, np.float32)
    start = read % frames
    straight = min(taken, frames - start)
    begin = _HEADER_FLOATS + start * channels
    _move(ring, begin, output, 0, straight * channels)
    _move(ring, _HEADER_FLOATS, output, straight * channels, (taken - straight) * channels)
    _fence()
    words[READ] = read + taken
    return np.int32(0)


ADDRESS = int(callback.address or 0)
