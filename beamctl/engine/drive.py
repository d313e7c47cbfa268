"""Compiled: a panel's drive, the ceiling it is held under, and what it left with.

Drive is the root of the summed mean squares of a panel's feeds: over 64 chunks (21 ms at 192 kHz),
or over 8 where that is more than 2 dB higher. It is taken in the ring, so that a rise is met before
it leaves. A ceiling never jumps: it falls by 3 dB a chunk and rises by a tenth of itself. A panel
that was held for more than a moment comes back slowly, so that it does not pump.
"""

from __future__ import annotations

from math import sqrt

import numpy as np

from beamctl.engine import layout as at
from beamctl.engine.compiled import compiled

MAGNITUDE = np.int32(0x7FFFFFFF)  # a float32's bits without its sign
SHORT_SHARE = 10.0**-0.2  # of the power over the last SMOOTH chunks
SETTLING = 0.01  # of the way to what a panel is held to, per chunk: a moment is 33 ms at 192 kHz
RELEASE = 1.00044  # of the gain that a panel comes back by, per chunk: 11.5 dB in a second
FROM_NOTHING = 1e-6  # and this
FALL = 0.7  # of a ceiling that comes down, per chunk
RISE = 0.1  # of the ceiling that it goes up to, per chunk
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
    floats[_place(at.DRIVES, panel, chunk)] = sqrt(power)


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
    if memory[at.SEEN_TO] > 0:
        newest = min(newest, memory[at.SEEN_TO] - 1)
    if newest < 0:
        return 0.0
    return memory.view(np.float64)[_place(table, panel, min(chunk, newest))]


@compiled
def glide(memory, panel, chunk):
    """Take a panel's ceiling, and the gain it leaves, on to the marks that enclose `chunk`."""
    floats = memory.view(np.float64)
    goal = floats[at.TARGETS + panel]
    if not goal >= 0.0:  # what is not a number lets nothing out
        goal = 0.0
    row = at.GLIDES + 2 * panel
    for mark in range(memory[at.GLIDED + panel] + 2, chunk + 2):
        here = floats[row + 1]
        floats[row] = here
        floats[row + 1] = (
            max(goal, here * FALL - LEAST) if goal < here else min(goal, here + RISE * goal)
        )
        drive = at_mark(memory, at.DRIVES, panel, mark + at.SMOOTH - 1)
        _hold(floats, at.DOWNS + 3 * panel, _held(drive, floats[row + 1]))
    memory[at.GLIDED + panel] = max(chunk, memory[at.GLIDED + panel])


@compiled
def _hold(floats, row, gain):
    """Go on by one mark: the gain asked for, or less where a longer hold is still coming back.

    The row: what the panel is held down by at the mark before, at this one, and for longer.
    """
    longer = 1.0 - floats[row + 2]
    if gain < longer:
        longer -= SETTLING * (longer - gain)
    else:
        longer = min(gain, longer * RELEASE + FROM_NOTHING)
    floats[row] = floats[row + 1]
    floats[row + 1] = 1.0 - min(gain, longer)
    floats[row + 2] = 1.0 - longer


@compiled
def held_at_marks(memory, panel):
    """Gains that the panel is held to at both marks, 1 for none."""
    down = memory[at.DOWNS + 3 * panel : at.DOWNS + 3 * panel + 2].view(np.float64)
    return 1.0 - down[0], 1.0 - down[1]


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
