"""Compiled: a panel's drive, the ceiling it is held under, and what it left with.

Drive is the root of the summed mean squares of a panel's feeds: over 64 chunks (21 ms at 192 kHz),
or over 8 where that is more than 2 dB higher. It is taken in the ring, so that a rise is met before
it leaves, and it falls slowly, so that what is held does not pump. A ceiling never jumps: it falls
by 3 dB a chunk and rises by a hundredth of itself.
"""

from __future__ import annotations

from math import sqrt

import numpy as np

from beamctl.engine import layout as at
from beamctl.engine.compiled import compiled

MAGNITUDE = np.int32(0x7FFFFFFF)  # a float32's bits without its sign
SHORT_SHARE = 10.0**-0.2  # of the power over the last SMOOTH chunks
RELEASE = 0.9993  # of a drive that falls, per chunk: 6 dB in a third of a second at 192 kHz
FALL = 0.7  # of a ceiling that comes down, per chunk
RISE = 0.01  # of the ceiling that it goes up to, per chunk
LEAST = 1e-9  # a drive below it is none


@compiled
def measure(memory, panel, chunk, broken):
    """Note power and drive of a chunk that has just come whole into the ring.

    What cannot be a sample (bits from `broken` on) is left out: it will not be sent.
    """
    floats = memory.view(np.float64)
    floats[_place(at.POWERS, panel, chunk)] = _power(memory, panel, chunk, broken)
    long = short = 0.0
    for k in range(at.LONG):
        value = floats[_place(at.POWERS, panel, chunk - k)] if chunk >= k else 0.0
        long += value
        if k < at.SMOOTH:
            short += value
    power = max(long / at.LONG, short / at.SMOOTH * SHORT_SHARE)
    before = floats[_place(at.DRIVES, panel, chunk - 1)] if chunk > 0 else 0.0
    floats[_place(at.DRIVES, panel, chunk)] = max(sqrt(power), before * RELEASE)


@compiled
def _power(memory, panel, chunk, broken):
    """Mean square of a chunk, summed over a panel's feeds."""
    frames, channels = memory[at.FRAMES], memory[at.CHANNELS]
    first, feeds = memory[at.FIRSTS + panel], np.uint64(memory[at.FEEDS + panel])
    ring, bits = memory[at.SAMPLES :].view(np.float32), memory[at.SAMPLES :].view(np.int32)
    squares = memory[at.SQUARES : at.SQUARES + at.MAX_CHANNELS // 2].view(np.float32)
    for f in range(feeds):
        squares[f] = np.float32(0.0)
    for i in range(at.CHUNK):
        start = np.uint64(((chunk * at.CHUNK + i) % frames) * channels + first)
        for f in range(feeds):
            value = ring[start + f]
            whole = np.int32(bits[start + f] & MAGNITUDE) < broken
            squares[f] += value * value if whole else np.float32(0.0)
    total = 0.0
    for f in range(feeds):
        total += squares[f]
    return total / at.CHUNK


@compiled
def at_mark(memory, table, panel, chunk):
    """A panel's value in a table by chunk; the newest there is, near the ring's end."""
    newest = memory[at.SCANNED] - 1
    if newest < 0:
        return 0.0
    return memory.view(np.float64)[_place(table, panel, min(chunk, newest))]


@compiled
def glide(memory, panel, chunk):
    """Take the panel's ceiling on to the two marks that enclose `chunk`."""
    floats = memory.view(np.float64)
    goal = floats[at.TARGETS + panel]
    if not goal >= 0.0:  # what is not a number lets nothing out
        goal = 0.0
    row = at.GLIDES + 2 * panel
    for _ in range(chunk - memory[at.GLIDED + panel]):
        here = floats[row + 1]
        floats[row] = here
        floats[row + 1] = (
            max(goal, here * FALL - LEAST) if goal < here else min(goal, here + RISE * goal)
        )
        if floats[row] == goal and floats[row + 1] == goal:
            break
    memory[at.GLIDED + panel] = max(chunk, memory[at.GLIDED + panel])


@compiled
def held_at_marks(memory, panel, chunk):
    """Gains that hold the panel's drive under its ceiling at both ends of a chunk, 1 for none."""
    row = memory[at.GLIDES + 2 * panel : at.GLIDES + 2 * panel + 2].view(np.float64)
    before = at_mark(memory, at.DRIVES, panel, chunk + at.SMOOTH - 1)
    after = at_mark(memory, at.DRIVES, panel, chunk + at.SMOOTH)
    return _held(before, row[0]), _held(after, row[1])


@compiled
def _held(drive, ceiling):
    if not ceiling >= 0.0:  # what is not a number lets nothing out
        return 0.0
    return ceiling / drive if drive > ceiling and drive > LEAST else 1.0


@compiled
def note_left(memory, panel, sample, squares):
    """Add squared gains of frames from `sample` on, all in one chunk, to what left of it."""
    place = _place(at.LEFT, panel, sample // at.CHUNK)
    floats = memory.view(np.float64)
    if sample % at.CHUNK == 0:
        floats[place] = 0.0
    floats[place] += squares


@compiled
def _place(table, panel, chunk):
    return table + panel * at.DEMANDS_KEPT + chunk % at.DEMANDS_KEPT
