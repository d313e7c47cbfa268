"""Compiled: delay-and-sum. Arrays in, arrays out, nothing allocated.

For feed n, y_n(t) = Re Σ_beams e(t - τ_n) exp(jω(t - τ_n)): the envelope of each beam is laid out
once per panel in 16 rows, each a sixteenth of a sample later than the one before. A feed reads the
two rows around its delay with a moving weight (linear between rows: (ω/16)²/8, -89 dB at 8 kHz and
192 kHz) and turns them by its phasor, which follows a parabola through three exact points of the
segment (third-order rest: φ³/125 for a phase change φ, -89 dB for 0.16 rad). In-phase and
quadrature sums meet the carrier once per feed.
"""

from __future__ import annotations

from math import ceil, floor

import numpy as np

from beamctl.acoustics.steering import path_lead_m
from beamctl.engine.compiled import compiled, jitable
from beamctl.engine.fused import fma
from beamctl.engine.turning import turn
from beamctl.show.glides import reach_at, travel_at

ROWS = 16
ROW_TAPS = 6
RUN = 32  # samples; runs between rows end on multiples of it, which the compiler can widen
ROW_DELAY = 2  # whole samples that the middle of the six taps adds to every row

_path_lead_m = jitable(path_lead_m)


def row_taps() -> np.ndarray:
    """(16, 6) float32 Lagrange weights: row j is base(t - ROW_DELAY - j/16) from base(t … t-5).

    Fifth-order Lagrange interpolation between the two middle points (any numerical-methods text);
    on a signal kept under 17.6 kHz at 192 kHz its error stays under -78 dB, under -110 dB at 8 kHz.
    """
    nodes = np.arange(ROW_TAPS, dtype=np.float64)
    taps = np.ones((ROWS, ROW_TAPS))
    for j in range(ROWS):
        at = ROW_DELAY + j / ROWS
        for k in range(ROW_TAPS):
            others = np.delete(nodes, k)
            taps[j, k] = np.prod((at - others) / (k - others))
    return taps.astype(np.float32)


@compiled
def fill_rows(rows, base, taps, row_at, base_at, count):
    """rows[j, q, row_at + i] = Σ_k taps[j, k] base[q, base_at + i - k] for i < count.

    rows (16, 2, …), base (2, …), taps (16, 6), all float32.
    """
    for j in range(rows.shape[0]):
        h0, h1, h2, h3, h4, h5 = taps[j]
        for q in range(2):
            out = rows[j, q, row_at : row_at + count]
            b = base[q, base_at - 5 : base_at + count]
            for i in range(count):
                near = fma(h2, b[i + 3], fma(h3, b[i + 2], h4 * b[i + 1]))
                out[i] = fma(h0, b[i + 5], fma(h1, b[i + 4], fma(h5, b[i], near)))


@compiled
def aim_feeds(coef, delay, cells, wanted, feed, share, scratch, aim_row, reach_row, start, span, k):
    """Phasor parabola and row delay of every feed of one beam, from `start` over `span` samples.

    coef     (F, 6) float64: real and imaginary part of c0, c1, c2; phasor(x) = c0 + c1 x + c2 x²
    delay    (F, 3) float64: delay in sixteenths of a sample, d0 + d1 x + d2 x²
    cells    (4, N): right, out, up and squared distance from the centre, metres
    wanted   (2, N): real and imaginary part of what undoes polarity, phase and trim, times share
    feed     (N,) feed of each cell; share (N,) 1 / live cells of its feed, 0 for a dead cell
    scratch  (3, N) float64
    k        (carrier Hz, 1 / speed of sound, base delay s, sixteenths of a sample per s)
    """
    carrier_hz, slowness, base_s, per_s = k
    coef[:] = 0.0
    delay[:] = 0.0
    for step in range(3):
        sample = start + 0.5 * step * span
        x, y, z, distance = travel_at(aim_row, sample)
        per_m = reach_at(reach_row, sample, distance)
        _cell_phasors(scratch, cells, wanted, x, y, z, per_m, carrier_hz, slowness, base_s)
        for n in range(feed.shape[0]):
            f = feed[n]
            coef[f, 2 * step] += scratch[0, n]
            coef[f, 2 * step + 1] += scratch[1, n]
            delay[f, step] += share[n] * scratch[2, n] * per_s
    for f in range(coef.shape[0]):
        for q in range(2):
            _to_parabola(coef[f, q::2], span)
        _to_parabola(delay[f], span)


@compiled
def _cell_phasors(scratch, cells, wanted, x, y, z, per_m, carrier_hz, slowness, base_s):
    """Phasor (real, imaginary) and delay in seconds of every cell, for one aim and focus."""
    right, out, up, square = cells[0], cells[1], cells[2], cells[3]
    re, im, taus = scratch[0], scratch[1], scratch[2]
    w_re, w_im = wanted[0], wanted[1]
    for n in range(right.shape[0]):
        dot = right[n] * x + out[n] * y + up[n] * z
        taus[n] = base_s + _path_lead_m(dot, square[n], per_m) * slowness
    for n in range(right.shape[0]):
        c, s = turn(-carrier_hz * taus[n])
        re[n] = w_re[n] * c - w_im[n] * s
        im[n] = w_re[n] * s + w_im[n] * c


@compiled
def _to_parabola(p, span):
    """Values at 0, span / 2 and span, in place, to the coefficients of 1, x and x²."""
    p0, p1, p2 = p[0], p[1], p[2]
    p[1] = (-3.0 * p0 + 4.0 * p1 - p2) / span
    p[2] = 2.0 * (p0 - 2.0 * p1 + p2) / (span * span)


@compiled
def add_beam(acc, rows, coef, delay, ramp, row_at, piece, begin, end, segment):
    """Add one beam to the in-phase and quadrature sums of every feed, for begin <= p < end.

    acc    (2, F, segment) float32
    rows   (16, 2, …) float32, rows[:, :, row_at + p] belonging to position p of the segment
    piece  position at which `coef` and `delay` of aim_feeds start; they hold to the segment's end
    ramp   (segment,) float32: 0, 1, 2 …
    """
    for f in range(coef.shape[0]):
        d0, d2 = delay[f, 0], delay[f, 2]
        d1 = delay[f, 1] + d2 * (segment - piece)  # of the chord, which picks the rows
        step = RUN if abs(d1) * RUN < 0.25 else 1
        x = 0
        while x < segment - piece:
            row = floor(d0 + d1 * x)
            stop = segment - piece
            if d1 > 0.0:
                stop = min(stop, ceil((row + 1 - d0) / d1))
            elif d1 < 0.0:
                stop = min(stop, floor((row - d0) / d1) + 1)
            # on to a full wide register, even if the weight leaves 0 to 1 by a little there
            stop = max(stop, x + 1) + piece
            stop = min((stop + step - 1) & -step, segment) - piece
            low, high = max(x, begin - piece), min(stop, end - piece)
            if low < high:
                n = high - low
                at = row_at + piece + low
                ra, rb = row & 15, (row + 1) & 15
                sa, sb = at - (row >> 4), at - ((row + 1) >> 4)
                _add_run(
                    acc[0, f, piece + low : piece + high],
                    acc[1, f, piece + low : piece + high],
                    rows[ra, 0, sa : sa + n],
                    rows[ra, 1, sa : sa + n],
                    rows[rb, 0, sb : sb + n],
                    rows[rb, 1, sb : sb + n],
                    ramp[low - x : high - x],
                    np.float32(d0 + x * (delay[f, 1] + x * d2) - row),
                    np.float32(delay[f, 1] + 2.0 * x * d2),
                    np.float32(d2),
                    np.float32(coef[f, 0] + x * (coef[f, 2] + x * coef[f, 4])),
                    np.float32(coef[f, 1] + x * (coef[f, 3] + x * coef[f, 5])),
                    np.float32(coef[f, 2] + 2.0 * x * coef[f, 4]),
                    np.float32(coef[f, 3] + 2.0 * x * coef[f, 5]),
                    np.float32(coef[f, 4]),
                    np.float32(coef[f, 5]),
                )
            x = stop


@compiled
def _add_run(out_i, out_q, a_i, a_q, b_i, b_q, ramp, w0, w1, w2, c0, s0, c1, s1, c2, s2):
    """One run of samples between the same two rows; everything float32 and contiguous."""
    for i in range(out_i.shape[0]):
        t = ramp[i]
        w = fma(t, fma(t, w2, w1), w0)
        e_i = fma(w, b_i[i] - a_i[i], a_i[i])
        e_q = fma(w, b_q[i] - a_q[i], a_q[i])
        c = fma(t, fma(t, c2, c1), c0)
        s = fma(t, fma(t, s2, s1), s0)
        out_i[i] = fma(e_i, c, fma(-e_q, s, out_i[i]))
        out_q[i] = fma(e_i, s, fma(e_q, c, out_q[i]))


@compiled
def meet_carrier(out, acc, carrier, begin, end):
    """out (F, segment) = Re of (acc[0] + j acc[1]) × carrier (2, segment), for begin <= p < end."""
    cosine, sine = carrier[0, begin:end], carrier[1, begin:end]
    for f in range(out.shape[0]):
        feed, in_phase, quadrature = out[f, begin:end], acc[0, f, begin:end], acc[1, f, begin:end]
        for p in range(end - begin):
            feed[p] = fma(in_phase[p], cosine[p], -quadrature[p] * sine[p])


@compiled
def fill_carrier(carrier, gain, cycles_per_sample, sample, begin, end):
    """carrier (2, segment) float32: gain × (cos, sin) of the exact phase at sample + p - begin."""
    cosine, sine = carrier[0], carrier[1]
    for p in range(begin, end):
        c, s = turn((sample + p - begin) * cycles_per_sample)
        cosine[p] = gain[p] * c
        sine[p] = gain[p] * s
