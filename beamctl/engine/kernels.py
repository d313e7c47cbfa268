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
from beamctl.engine.compiled import compiled, inlined, jitable
from beamctl.engine.fused import fma
from beamctl.engine.turning import turn
from beamctl.show.glides import reach_at, travel_at

ROWS = 16
ROW_TAPS = 6
SLACK = 0.25  # by which a weight may leave 0 to 1 before the next pair of rows takes over
RUN = 32  # samples; where that costs little, runs end on multiples of it: full wide registers
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
def aim_feeds(
    coef, edge, known, cells, wanted, feed, share, scratch, aim_row, reach_row, start, span, k
):
    """Phasor parabola and row delay of every feed of one beam, from `start` over `span` samples.

    coef     (9, F) float64: phasor(x) = (c0 + j s0) + (c1 + j s1) x + (c2 + j s2) x² and delay(x) =
             d0 + d1 x + d2 x² in sixteenths of a sample, as c0 s0 d0 c1 s1 d1 c2 s2 d2
    edge     (3, F): phasor and row delay at the span's end, left here; where `known`, those of
             the span before are found here, which are what this one starts with
    cells    (4, N): right, out, up and squared distance from the centre, metres
    wanted   (2, N): real and imaginary part of what undoes polarity, phase and trim, times share
    feed     (N,) feed of each cell; share (N,) 1 / live cells of its feed, 0 for a dead cell
    scratch  (3, N) float64
    k        (carrier Hz, 1 / speed of sound, base delay s, sixteenths of a sample per s)
    """
    carrier_hz, slowness, base_s, per_s = k
    coef[:] = 0.0
    if known:
        coef[0:3] = edge
    for step in range(1 if known else 0, 3):
        sample = start + 0.5 * step * span
        x, y, z, distance = travel_at(aim_row, sample)
        per_m = reach_at(reach_row, sample, distance)
        _cell_phasors(scratch, cells, wanted, x, y, z, per_m, carrier_hz, slowness, base_s)
        c, s, d = coef[3 * step], coef[3 * step + 1], coef[3 * step + 2]
        for n in range(feed.shape[0]):
            f = feed[n]
            c[f] += scratch[0, n]
            s[f] += scratch[1, n]
            d[f] += share[n] * scratch[2, n] * per_s
    edge[:] = coef[6:9]
    per = 1.0 / span
    for q in range(3):
        p0, p1, p2 = coef[q], coef[3 + q], coef[6 + q]
        for f in range(p0.shape[0]):
            a, b, c = p0[f], p1[f], p2[f]
            p1[f] = (4.0 * b - 3.0 * a - c) * per
            p2[f] = 2.0 * (a - 2.0 * b + c) * (per * per)


@compiled
def _cell_phasors(scratch, cells, wanted, x, y, z, per_m, carrier_hz, slowness, base_s):
    """Phasor (real, imaginary) and delay in seconds of every cell, for one aim and focus."""
    right, out, up, square = cells[0], cells[1], cells[2], cells[3]
    re, im, taus = scratch[0], scratch[1], scratch[2]
    w_re, w_im = wanted[0], wanted[1]
    if per_m == 0.0:  # a plane wave: the same figure without the root and the division
        for n in range(right.shape[0]):
            taus[n] = base_s + (right[n] * x + out[n] * y + up[n] * z) * slowness
    else:
        for n in range(right.shape[0]):
            dot = right[n] * x + out[n] * y + up[n] * z
            taus[n] = base_s + _path_lead_m(dot, square[n], per_m) * slowness
    for n in range(right.shape[0]):
        c, s = turn(-carrier_hz * taus[n])
        re[n] = w_re[n] * c - w_im[n] * s
        im[n] = w_re[n] * s + w_im[n] * c


@compiled
def sum_feeds(out, acc, carrier, rows, coef, active, pieces, ramp, row_at, begin, end):
    """Every feed of a panel for positions begin <= p < end: sum its beams, and meet the carrier.

    out      (F, segment) float32
    acc      (2, segment) float32: one feed's in-phase and quadrature sum, which stays in the cache
    carrier  (2, segment) float32 as fill_carrier leaves it
    rows     (B, 16, 2, …) float32, rows[:, :, :, row_at + p] belonging to position p
    coef     (B, 9, F) as aim_feeds leaves it; active (B,): beams that are not passed over
    pieces   (B,) position at which a beam's coef starts; it holds to the segment's end
    ramp     (segment,) float32: 0, 1, 2 …
    """
    cosine, sine = carrier[0, begin:end], carrier[1, begin:end]
    in_phase, quadrature = acc[0, begin:end], acc[1, begin:end]
    for f in range(out.shape[0]):
        in_phase[:] = 0.0
        quadrature[:] = 0.0
        for b in range(active.shape[0]):
            if active[b]:
                _add_beam(acc, rows[b], coef[b], f, ramp, row_at, pieces[b], begin, end)
        feed = out[f, begin:end]
        for p in range(end - begin):
            feed[p] = fma(in_phase[p], cosine[p], -quadrature[p] * sine[p])


@inlined
def _add_beam(acc, rows, coef, f, ramp, row_at, piece, begin, end):
    """Add one beam to the sums of feed f."""
    segment = ramp.shape[0]
    length = segment - piece
    # the delay's parabola by its chord, moved half-way to the bulge
    d1 = coef[5, f] + coef[8, f] * length
    d0 = coef[2, f] - 0.125 * coef[8, f] * length * length
    step = RUN
    while step > 1 and abs(d1) * step > 0.5 * SLACK:
        step //= 2
    x = 0
    while x < length:
        row = floor(d0 + d1 * x)
        stop = length
        reached = d0 + d1 * length
        if reached > row + 1.0 + SLACK or reached < row - SLACK:
            edge = row + 1.0 + SLACK if d1 > 0.0 else row - SLACK
            stop = min(length, max(x + 1, ceil((edge - d0) / d1))) + piece
            stop = min((stop + step - 1) & -step, segment) - piece
        low, high = max(x, begin - piece), min(stop, end - piece)
        if low < high:
            n = high - low
            at = row_at + piece + low
            sa, sb = at - (row >> 4), at - ((row + 1) >> 4)
            near, far = rows[row & 15], rows[(row + 1) & 15]
            _add_run(
                acc[0, piece + low : piece + high],
                acc[1, piece + low : piece + high],
                near[0, sa : sa + n],
                near[1, sa : sa + n],
                far[0, sb : sb + n],
                far[1, sb : sb + n],
                ramp[low - x : high - x],
                np.float32(d0 + d1 * x - row),
                np.float32(d1),
                np.float32(coef[0, f] + x * (coef[3, f] + x * coef[6, f])),
                np.float32(coef[1, f] + x * (coef[4, f] + x * coef[7, f])),
                np.float32(coef[3, f] + 2.0 * x * coef[6, f]),
                np.float32(coef[4, f] + 2.0 * x * coef[7, f]),
                np.float32(coef[6, f]),
                np.float32(coef[7, f]),
            )
        x = stop


@inlined
def _add_run(out_i, out_q, a_i, a_q, b_i, b_q, ramp, w0, w1, c0, s0, c1, s1, c2, s2):
    """One run of samples between the same two rows; everything float32 and contiguous."""
    for i in range(out_i.shape[0]):
        t = ramp[i]
        w = fma(t, w1, w0)
        e_i = fma(w, b_i[i] - a_i[i], a_i[i])
        e_q = fma(w, b_q[i] - a_q[i], a_q[i])
        c = fma(t, fma(t, c2, c1), c0)
        s = fma(t, fma(t, s2, s1), s0)
        out_i[i] = fma(e_i, c, fma(-e_q, s, out_i[i]))
        out_q[i] = fma(e_i, s, fma(e_q, c, out_q[i]))


@compiled
def fill_carrier(carrier, gain, cycles_per_sample, sample, begin, end):
    """carrier (2, segment) float32: gain × (cos, sin) of the exact phase at sample + p - begin."""
    cosine, sine = carrier[0], carrier[1]
    for p in range(begin, end):
        c, s = turn((sample + p - begin) * cycles_per_sample)
        cosine[p] = gain[p] * c
        sine[p] = gain[p] * s
