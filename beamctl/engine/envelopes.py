"""Compiled: programme to full-rate envelope of one beam, inside one segment.

The law runs at half the device rate, one complex filter (band limit and element equaliser) brings
it to a quarter, a short real one back to the full rate. Every buffer holds its history first and
the segment's samples after it, so that a value depends on absolute positions only, never on where
a block ends. All sums run in one fixed order per output sample for the same reason.
"""

from __future__ import annotations

import numpy as np

from beamctl.engine.compiled import compiled
from beamctl.engine.fused import fma
from beamctl.show.glides import is_settled, scalar_at
from beamctl.signal.laws import envelope

SEGMENT_HALVES = 128  # half-rate positions in a segment


@compiled
def mix_voice(programme, source, start, loop, weight, first, count):
    """Add one sound to a beam's programme.

    programme  (2, count) float32, real and imaginary part at half the device rate
    source     (frames, 2) float32, the prepared analytic signal
    start      position (half rate) of the sound's first frame; `loop` repeats it
    weight     scalar row of glides.py
    first      absolute half-rate position of programme[:, 0]
    """
    frames = source.shape[0]
    for i in range(count):
        at = first + i - start
        if loop and at >= 0:
            at %= frames
        if 0 <= at < frames:
            w = scalar_at(weight, 2.0 * (first + i))
            programme[0, i] += w * source[at, 0]
            programme[1, i] += w * source[at, 1]


@compiled
def modulate(half, programme, law_rows, depth_row, begin, first, count):
    """Law and depth: programme to envelope, both at half rate, float32.

    half       (2, 2, …) parity of the absolute position, then real and imaginary part
    programme  (2, count), its first value at the absolute half-rate position `first`
    begin      place in half[0, 0] of the segment's first pair of positions
    """
    for i in range(count):
        sample = 2.0 * (first + i)
        depth = scalar_at(depth_row, sample)
        x, hilbert_x = programme[0, i], programme[1, i]
        real = imag = 0.0
        for law in range(law_rows.shape[0]):
            share = scalar_at(law_rows[law], sample)
            if share != 0.0:
                a, b = envelope(law, depth, x, hilbert_x)
                real += share * a
                imag += share * b
        at = begin + (first % SEGMENT_HALVES + i) // 2
        half[(first + i) % 2, 0, at] = real
        half[(first + i) % 2, 1, at] = imag


@compiled
def shape_band(out, out_at, count, half, begin, taps_re, taps_im):
    """Band limit and equaliser, two to one: out[:, out_at + n] is Σ_k h[k] envelope[2 n - k].

    out   (2, …) float32, contiguous, as is half: only then does the compiler use wide registers
    half  as `modulate` leaves it; half[0, :, begin + n] is envelope[2 n], and (K + 1) / 2 values
          of history stand before `begin`
    taps  (K,) float32 each, K odd
    """
    out_re, out_im = out[0, out_at : out_at + count], out[1, out_at : out_at + count]
    out_re[:] = 0.0
    out_im[:] = 0.0
    for pair in range((taps_re.shape[0] + 1) // 2):
        k = 2 * pair
        re, im = taps_re[k], taps_im[k]
        re_odd = im_odd = np.float32(0.0)
        if k + 1 < taps_re.shape[0]:
            re_odd, im_odd = taps_re[k + 1], taps_im[k + 1]
        at = begin - pair
        a, b = half[0, 0, at : at + count], half[0, 1, at : at + count]
        c, d = half[1, 0, at - 1 : at - 1 + count], half[1, 1, at - 1 : at - 1 + count]
        for n in range(count):
            even = fma(re, a[n], fma(-im, b[n], out_re[n]))
            out_re[n] = fma(re_odd, c[n], fma(-im_odd, d[n], even))
            even = fma(re, b[n], fma(im, a[n], out_im[n]))
            out_im[n] = fma(re_odd, d[n], fma(im_odd, c[n], even))


@compiled
def raise_rate(out, out_at, count, quarter, at, taps, first, line):
    """One to four: out[:, out_at + i], i < count, at absolute positions first + i.

    quarter  (2, …) float32; quarter[:, at] is the value at the quarter-rate position of `first`
             rounded down, and K / 4 - 1 values of history stand before it
    taps     (K,) float32, K a multiple of 4
    line     (…,) float32, room for count / 4 + 1 values: one of the four phases at a time
    """
    for phase in range(4):
        skip = (phase - first) % 4
        n = (count - skip + 3) // 4
        newest = at + (first % 4 + skip) // 4
        for q in range(2):
            total = line[: max(n, 0)]
            total[:] = 0.0
            for k in range(taps.shape[0] // 4):
                h = taps[4 * k + phase]
                values = quarter[q, newest - k : newest - k + n]
                for i in range(n):
                    total[i] = fma(h, values[i], total[i])
            for i in range(n):
                out[q, out_at + skip + 4 * i] = total[i]


@compiled
def chunk_peak(full, begin, count):
    """Largest magnitude of (2, …) over count samples; 4 % more, for what lies between samples.

    At 192 kHz a 16 kHz swing has twelve samples a cycle and cos(π/12) = 0.966 of its peak at worst.
    """
    peak = 0.0
    for i in range(begin, begin + count):
        square = full[0, i] * full[0, i] + full[1, i] * full[1, i]
        peak = max(peak, square)
    return 1.04 * np.sqrt(peak)


@compiled
def gain_ramp(out, level_row, sample, count):
    """Beam gain over count samples from `sample`: the level row, float32 (count,)."""
    if is_settled(level_row, sample):
        still = max(0.0, scalar_at(level_row, sample))
        for i in range(count):
            out[i] = still
        return
    for i in range(count):
        out[i] = max(0.0, scalar_at(level_row, sample + i))
