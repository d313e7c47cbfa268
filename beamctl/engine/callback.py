"""Compiled: the C function that a device calls for every block. It never enters Python.

Its signature is PortAudio's PaStreamCallback; `user` points at an outlet's memory.
"""

from __future__ import annotations

import ctypes

import numpy as np
from numba import carray, cfunc, types

from beamctl.engine import compiled as _cache  # the cache folder is set there, before this compiles
from beamctl.engine import layout as at
from beamctl.engine.final import note_time, pull

__all__ = ["ADDRESS", "callback"]

_ULONG = types.uint64 if ctypes.sizeof(ctypes.c_ulong) == 8 else types.uint32
SIGNATURE = types.intc(
    types.voidptr,
    types.CPointer(types.float32),
    _ULONG,
    types.CPointer(types.float64),
    _ULONG,
    types.voidptr,
)


@cfunc(SIGNATURE, cache=_cache.KEPT, error_model="numpy")
def callback(_input, output, count, clock, _flags, user):
    """Ring → final stage → device; `clock[1]` is the time of the call in seconds."""
    header = carray(user, at.HEADER, np.int64)
    memory = carray(user, header[at.SIZE], np.int64)
    out = carray(output, np.int64(count) * header[at.CHANNELS], np.float32)
    note_time(memory, np.int64(clock[1] * 1e9))
    pull(memory, out, np.int64(count))
    return np.int32(0)


ADDRESS = int(callback.address or 0)
