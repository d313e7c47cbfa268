"""Compiled: the final stage, the last thing that touches a sample. Ring in, device out.

No Python, no allocation, no lock, and no arithmetic shortcuts that assume a number is a number.
For every block it decides once, at the block's first frame, whether the gate may be open; then,
frame by frame: what cannot be a sample becomes 0 and a latched fault; a panel whose peaks would
pass its rating, or whose drive its ceiling, is held by one smooth gain that sees both coming in the
ring; a peak that passes all the same is cut off, and that is a fault too.

A closed gate stays closed until it is asked anew: neither a lease that comes back nor a device that
flows again opens it. Only a ring that ran dry for a moment comes back by itself, by the ramp.
How drive is measured against a ceiling, and how a ceiling moves, is in `drive.py`.
"""

from __future__ import annotations

import numpy as np
from llvmlite import ir
from numba import types
from numba.extending import intrinsic

from beamctl.engine import layout as at
from beamctl.engine.compiled import compiled
from beamctl.engine.drive import at_mark, glide, held_at_marks, measure, note_left
from beamctl.show.glides import is_settled, scalar_at, take_over

MAGNITUDE = np.int32(0x7FFFFFFF)  # a float32's bits without its sign
BROKEN = np.int32(0x41800000)  # the bits of 16: from 24 dB over full scale nothing is a sample
JUST_UNDER = 1.0 - 5e-7  # so that rounding to float32 never passes the limit
RELEASE = 0.997  # of a held peak, per chunk: 6 dB in 77 ms at 192 kHz


def _build_fence(_typing_context):
    """Nothing moves across: what was copied is seen before the position that announces it."""

    def build(context, builder, _signature, _arguments):
        builder.fence("seq_cst")
        return context.get_dummy_value()

    return types.void(), build


fence = intrinsic(_build_fence)


def _build_float_bits(_typing_context, _value):
    def build(_context, builder, _signature, arguments):
        return builder.bitcast(arguments[0], ir.IntType(32))

    return types.int32(types.float32), build


def _build_bits_float(_typing_context, _bits):
    def build(_context, builder, _signature, arguments):
        return builder.bitcast(arguments[0], ir.FloatType())

    return types.float32(types.int32), build


float_bits = intrinsic(_build_float_bits)
bits_float = intrinsic(_build_bits_float)


@compiled
def push(memory, block):
    """Append (n, channels) float32; the caller has made sure that the ring has room."""
    frames, channels, written = memory[at.FRAMES], memory[at.CHANNELS], memory[at.WRITTEN]
    ring = memory[at.SAMPLES :].view(np.float32)
    fence()
    start = written % frames
    straight = min(block.shape[0], frames - start)
    flat = block.reshape(block.size)
    _copy(flat, 0, ring, start * channels, straight * channels)
    _copy(flat, straight * channels, ring, 0, (block.shape[0] - straight) * channels)
    fence()
    memory[at.WRITTEN] = written + block.shape[0]
    if memory[at.WRITTEN] - memory[at.READ] + block.shape[0] > frames:
        memory[at.FLOWING] = 1  # the first full ring flows


@compiled
def pull(memory, out, count):
    """Fill out (count × channels,) float32 with the next frames, finished."""
    channels = memory[at.CHANNELS]
    for k in range(np.uint64(count * channels)):
        out[k] = np.float32(0.0)
    memory[at.CALLBACKS] += 1
    memory[at.BLOCK] = max(memory[at.BLOCK], count)
    if memory[at.FLOWING] == 0:
        return
    read = memory[at.READ]
    held = memory[at.WRITTEN] - read
    fence()
    _take_grant(memory, read)
    _decide(memory, read)
    _scan(memory, read + held)
    taken = min(held, count)
    _tell_short(memory, read, taken)
    sounded = _finish(memory, out, read, taken)
    if taken < count:
        went_dry(memory, read + taken)
    memory[at.SOUNDED] += sounded
    fence()
    memory[at.READ] = read + taken


@compiled
def _tell_short(memory, read, taken):
    """Log what is seen of a ring that holds less than is looked ahead: gains are made from that."""
    if taken == 0:
        return
    scanned = memory[at.SCANNED]
    last = (read + taken - 1) // at.CHUNK + at.SMOOTH
    short = scanned if scanned <= last else 0
    if short != memory[at.SHORT]:
        memory[at.SHORT] = short
        _log(memory, read, at.WENT_SHORT, short)


@compiled
def note_time(memory, now_ns):
    """When the device asked, for the longest gap and the drift of its clock."""
    if memory[at.CALLBACKS] > 0 and now_ns > 0:
        memory[at.LONGEST_NS] = max(memory[at.LONGEST_NS], now_ns - memory[at.LAST_NS])
    memory[at.LAST_NS] = now_ns
    memory[at.LAST_READ] = memory[at.READ]


@compiled
def _decide(memory, sample):
    """Open or close the gate at `sample`."""
    gate = memory[at.GATE]
    hush, ask = memory[at.HUSH], memory[at.OPEN_ASK]  # once: they may change at any time
    hushed, asked = hush != memory[at.SEEN_HUSH], ask != memory[at.SEEN_OPEN]
    memory[at.SEEN_HUSH], memory[at.SEEN_OPEN] = hush, ask
    leased, hosted = sample < memory[at.LEASE_UNTIL], sample < memory[at.HOST_UNTIL]
    if gate == 1 and (hushed or not leased or not hosted):
        _ramp(memory, sample, memory[at.RAMP_N], 0.0)
        over = at.HOST_OVER if leased else at.LEASE_OVER
        _log(memory, sample, at.HUSHED if hushed else over, memory[at.RAMP_N])
    elif gate == 0 and asked and leased and hosted and not hushed:
        _ramp(memory, sample, memory[at.OPEN_N], 1.0)
        _log(memory, sample, at.OPENED, memory[at.OPEN_N])


@compiled
def _take_grant(memory, sample):
    """From `sample` on the newest grant's ceilings hold: at once while the gate is shut."""
    grants = memory[at.GRANTS]
    if grants == memory[at.SEEN_GRANT]:
        return
    fence()
    row = at.CEILINGS + (grants % at.GRANTS_KEPT) * at.MAX_PANELS
    gate = memory[at.GATE_ROW : at.GATE_ROW + 6].view(np.float64)
    shut = memory[at.GATE] == 0 and scalar_at(gate, float(sample)) <= 0.0
    for panel in range(memory[at.PANELS]):
        memory[at.TARGETS + panel] = memory[row + panel]
        if shut:
            memory[at.GLIDES + 2 * panel] = memory[row + panel]
            memory[at.GLIDES + 2 * panel + 1] = memory[row + panel]
            memory[at.DOWNS + 3 * panel : at.DOWNS + 3 * panel + 3] = 0  # held down by nothing
    memory[at.SEEN_GRANT] = grants
    _log(memory, sample, at.GRANTED, grants)


@compiled
def _ramp(memory, sample, n, goal):
    """Take the gate from wherever it is to `goal` over n frames, at least RAMP_N, no step in slope.

    The arithmetic is that of BeamState's level glides, so that a journal's gate records give the
    same samples.
    """
    shortest = memory[at.RAMP_N]
    row = memory[at.GATE_ROW : at.GATE_ROW + 6].view(np.float64)
    take_over(row, float(sample), float(max(n, shortest)), goal, float(shortest))
    memory[at.GATE] = 1 if goal > 0.0 else 0


@compiled
def went_dry(memory, sample):
    """The ring had too little: count it, and come back by the ramp, if open, when it flows."""
    memory[at.EMPTY] += 1
    if memory[at.DRY] != sample + 1:  # once per drought
        memory[at.DRY] = sample + 1
        _log(memory, sample, at.WENT_DRY, memory[at.RAMP_N])
    row = memory[at.GATE_ROW : at.GATE_ROW + 6].view(np.float64)
    row[0], row[1], row[2] = float(sample), float(memory[at.RAMP_N]), 0.0
    row[3], row[4], row[5] = float(memory[at.GATE]), 0.0, 0.0


@compiled
def _log(memory, sample, kind, value):
    """One event, for whoever keeps the journal."""
    place = at.EVENT_AT + (memory[at.EVENTS] % at.EVENTS_KEPT) * at.EVENT_WORDS
    memory[place] = sample
    memory[place + 1] = kind
    memory[place + 2] = value
    fence()
    memory[at.EVENTS] += 1


@compiled
def _scan(memory, until):
    """Take the peaks of every chunk that is whole before frame `until`, per panel."""
    frames, channels = memory[at.FRAMES], memory[at.CHANNELS]
    bits = memory[at.SAMPLES :].view(np.int32)
    chunk = memory[at.SCANNED]
    while (chunk + 1) * at.CHUNK <= until:
        for panel in range(memory[at.PANELS]):
            first, feeds = memory[at.FIRSTS + panel], memory[at.FEEDS + panel]
            largest = np.int32(0)
            for i in range(at.CHUNK):
                start = ((chunk * at.CHUNK + i) % frames) * channels + first
                largest = max(largest, _peak(bits, start, feeds))
            _demand(memory, panel, chunk, bits_float(largest))
            measure(memory, panel, chunk, BROKEN)
        chunk += 1
    memory[at.SCANNED] = chunk


@compiled
def _peak(bits, start, count):
    """As `_largest`, of what can be a sample: the rest is dealt with when it is sent."""
    largest = np.int32(0)
    for k in range(np.uint64(count)):
        size = np.int32(bits[np.uint64(start) + k] & MAGNITUDE)
        largest = max(largest, size if size < BROKEN else np.int32(0))
    return largest


@compiled
def _largest(bits, start, count):
    """Largest magnitude of `count` floats, as its bits.

    Without the sign, floats are in the order of their bits, infinity and what is not a number above
    all others: a comparison that no shortcut of arithmetic can break, and that the compiler widens.
    """
    largest = np.int32(0)
    for k in range(np.uint64(count)):
        largest = max(largest, np.int32(bits[np.uint64(start) + k] & MAGNITUDE))
    return largest


@compiled
def _demand(memory, panel, chunk, peak):
    """Hold, release and average: a demand that never falls short of the peak, and never jumps.

    The demand of chunk c covers the chunks c - SMOOTH … c, and is used for chunk c - SMOOTH + 1.
    """
    peaks = memory[at.PEAKS + panel * at.HOLD : at.PEAKS + (panel + 1) * at.HOLD].view(np.float64)
    held = memory[at.HELD + panel * at.SMOOTH : at.HELD + (panel + 1) * at.SMOOTH].view(np.float64)
    most = float(peak)
    for k in range(at.HOLD - 1):
        peaks[k] = peaks[k + 1]
        most = max(most, peaks[k])
    peaks[at.HOLD - 1] = float(peak)
    released = held[at.SMOOTH - 1] * RELEASE
    total = 0.0
    for k in range(at.SMOOTH - 1):
        held[k] = held[k + 1]
        total += held[k]
    held[at.SMOOTH - 1] = max(most, released)
    total += held[at.SMOOTH - 1]
    place = at.DEMANDS + panel * at.DEMANDS_KEPT + chunk % at.DEMANDS_KEPT
    memory[place : place + 1].view(np.float64)[0] = total / at.SMOOTH


@compiled
def _finish(memory, out, read, taken):
    """Copy `taken` frames through gain, gate and the last check; 1 when anything sounded."""
    sounded = 0
    for panel in range(memory[at.PANELS]):
        limit = _limit(memory, panel)
        i = 0
        while i < taken:
            # one chunk at a time: what it demands is known at both its ends
            sample = read + i
            n = min(taken - i, at.CHUNK - sample % at.CHUNK)
            glide(memory, panel, sample // at.CHUNK)
            sounded |= _finish_chunk(memory, out, panel, read, i, n, limit)
            i += n
    return sounded


@compiled
def _finish_chunk(memory, out, panel, read, begin, n, limit):
    """Frames begin … begin + n of a panel, inside one chunk; 1 when the gate let any out."""
    frames, channels = memory[at.FRAMES], memory[at.CHANNELS]
    first, feeds = memory[at.FIRSTS + panel], memory[at.FEEDS + panel]
    chunk = (read + begin) // at.CHUNK
    ring = memory[at.SAMPLES :].view(np.float32)
    row = memory[at.GATE_ROW : at.GATE_ROW + 6].view(np.float64)
    still = is_settled(row, float(read + begin))
    gate = np.float32(max(0.0, scalar_at(row, float(read + begin))))
    peak_before = at_mark(memory, at.DEMANDS, panel, chunk + at.SMOOTH - 1)
    peak_after = at_mark(memory, at.DEMANDS, panel, chunk + at.SMOOTH)
    high = max(peak_before, peak_after) > limit
    before, after = held_at_marks(memory, panel)
    held = min(before, after) < 1.0
    limit_bits = float_bits(limit)
    sounded, squares = 0, 0.0
    for i in range(begin, begin + n):
        sample = read + i
        if not still:
            gate = np.float32(max(0.0, scalar_at(row, float(sample))))
        if gate == np.float32(0.0):
            continue
        gain = gate
        share = (sample % at.CHUNK) / at.CHUNK
        if high:
            demand = peak_before + (peak_after - peak_before) * share
            if demand > limit:
                gain = np.float32(gate * JUST_UNDER * limit / demand)
        if held:
            gain = min(gain, np.float32(gate * (before + (after - before) * share)))
        source = (sample % frames) * channels + first
        target = i * channels + first
        wrong = _send(ring, source, out, target, feeds, gain, limit, limit_bits)
        if wrong != 0:
            _tell_wrong(memory, sample, first, wrong)
        squares += gain * gain
        sounded = 1
    note_left(memory, panel, read + begin, squares)
    return sounded


@compiled
def _limit(memory, panel):
    """What no sample of a panel may pass: the lesser of its rating and full scale."""
    rating = memory[at.RATINGS + panel : at.RATINGS + panel + 1].view(np.float64)[0]
    if not rating >= 0.0:  # what is not a number lets nothing out
        return np.float32(0.0)
    exact = min(rating, 1.0)
    limit = np.float32(exact)
    return bits_float(float_bits(limit) - np.int32(1)) if limit > exact else limit


@compiled
def _send(ring, source, out, target, feeds, gain, limit, limit_bits):
    """One frame of one panel; 0, or 1 + feed of what is no sample, -(1 + feed) of one cut off."""
    for f in range(np.uint64(feeds)):
        out[np.uint64(target) + f] = gain * ring[np.uint64(source) + f]
    if _largest(out.view(np.int32), target, feeds) <= limit_bits:
        return 0
    wrong = 0
    for f in range(feeds):
        value = out[target + f]
        if not (abs(value) <= limit):
            if float_bits(abs(ring[source + f])) < BROKEN:
                out[target + f] = limit if value > 0.0 else -limit
                wrong = wrong if wrong != 0 else -(f + 1)
            else:
                out[target + f] = np.float32(0.0)
                wrong = wrong if wrong > 0 else f + 1
    return wrong


@compiled
def _tell_wrong(memory, sample, first, wrong):
    """Latch a fault or a clip with its feed; the first of a run is logged."""
    feed = first + abs(wrong)
    if wrong > 0:
        if memory[at.FAULTS] == 0:
            memory[at.FAULT_FEED] = feed
            _log(memory, sample, at.FAULT, feed)
        memory[at.FAULTS] += 1
    else:
        if memory[at.CLIPS] == 0:
            _log(memory, sample, at.CLIP, feed)
        memory[at.CLIPS] += 1


@compiled
def _copy(source, start, target, place, count):
    """Copy `count` floats; unsigned indices, so that none is taken from the end as in Python."""
    for k in range(np.uint64(count)):
        target[np.uint64(place) + k] = source[np.uint64(start) + k]
