"""Compiled: delay-and-sum. Arrays in, arrays out, nothing allocated.

For feed n, y_n(t) = Re Σ_beams e(t - τ_n) exp(jω(t - τ_n)): the envelope of each beam is laid out
once per panel in 16 rows, each a sixteenth of a sample later than the one before. A feed reads the
two rows around its delay with a moving weight (linear between rows: (ω/16)²/8, -89 dB at 8 kHz and
192 kHz) and turns them by its phasor, which follows a parabola through three exact points of the
segment (third-order rest: φ³/125 for a phase change φ, -89 dB for 0.16 rad). In-phase and
quadrature sums meet the carrier once per feed.
"""

from __future__ import annotations

from math import ceil, cos, floor, pi, sin

import numpy as np

from beamctl.acoustics.steering import path_lead_m
from beamctl.engine.compiled import compiled, jitable
from beamctl.show.glides import reach_at, travel_at

ROWS = 16
ROW_TAPS = 6
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
                out[i] = (
                    h0 * b[i + 5]
                    + h1 * b[i + 4]
                    + h2 * b[i + 3]
                    + h3 * b[i + 2]
                    + h4 * b[i + 1]
                    + h5 * b[i]
                )


@compiled
def aim_feeds(coef, delay, cells, back, feed, share, aim_row, reach_row, start, span, k):
    """Phasor parabola and row delay of every feed of one beam, from `start` over `span` samples.

    coef   (F, 6) float64: real and imaginary part of c0, c1, c2; phasor(x) = c0 + c1 x + c2 x²
    delay  (F, 3) float64: delay in sixteenths of a sample, d0 + d1 x + d2 x²
    cells  (N, 3) positions in metres; back (N,) complex: what undoes polarity, phase, trim
    feed   (N,) feed of each cell; share (N,) 1 / live cells of its feed, 0 for a dead cell
    k      (rad/s of the carrier, 1 / speed of sound, base delay s, sixteenths of a sample per s)
    """
    omega, slowness, base_s, per_s = k
    coef[:] = 0.0
    delay[:] = 0.0
    for step in range(3):
        sample = start + 0.5 * step * span
        x, y, z, distance = travel_at(aim_row, sample)
        per_m = reach_at(reach_row, sample, distance)
        for n in range(cells.shape[0]):
            if share[n] == 0.0:
                continue
            cx, cy, cz = cells[n, 0], cells[n, 1], cells[n, 2]
            lead = _path_lead_m(cx * x + cy * y + cz * z, cx * cx + cy * cy + cz * cz, per_m)
            tau = base_s + lead * slowness
            phase = -omega * tau
            phasor = share[n] * back[n] * complex(cos(phase), sin(phase))
            coef[feed[n], 2 * step] += phasor.real
            coef[feed[n], 2 * step + 1] += phasor.imag
            delay[feed[n], step] += share[n] * tau * per_s
    for f in range(coef.shape[0]):
        for q in range(2):
            _to_parabola(coef[f, q::2], span)
        _to_parabola(delay[f], span)


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
        x = 0
        while x < segment - piece:
            row = floor(d0 + d1 * x)
            if d1 > 0.0:
                stop = ceil((row + 1 - d0) / d1)
            elif d1 < 0.0:
                stop = floor((row - d0) / d1) + 1
            else:
                stop = segment - piece
            stop = min(max(stop, x + 1), segment - piece)
            low, high = max(x, begin - piece), min(stop, end - piece)
            if low < high:
                n = high - low
                at = row_at + piece + low
                ra, rb = row % 16, (row + 1) % 16
                sa, sb = at - row // 16, at - (row + 1) // 16
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
        w = w0 + t * (w1 + t * w2)
        e_i = a_i[i] + w * (b_i[i] - a_i[i])
        e_q = a_q[i] + w * (b_q[i] - a_q[i])
        c = c0 + t * (c1 + t * c2)
        s = s0 + t * (s1 + t * s2)
        out_i[i] += e_i * c - e_q * s
        out_q[i] += e_i * s + e_q * c


@compiled
def meet_carrier(out, acc, carrier, begin, end):
    """out (F, segment) = Re of (acc[0] + j acc[1]) × carrier (2, segment), for begin <= p < end."""
    cosine, sine = carrier[0, begin:end], carrier[1, begin:end]
    for f in range(out.shape[0]):
        feed, in_phase, quadrature = out[f, begin:end], acc[0, f, begin:end], acc[1, f, begin:end]
        for p in range(end - begin):
            feed[p] = in_phase[p] * cosine[p] - quadrature[p] * sine[p]


@compiled
def fill_carrier(carrier, gain, cycles_per_sample, sample, begin, end):
    """carrier (2, segment) float32: gain × (cos, sin) of the exact phase at sample + p - begin."""
    for p in range(begin, end):
        cycles = (sample + p - begin) * cycles_per_sample
        angle = 2.0 * pi * (cycles - floor(cycles))
        carrier[0, p] = gain[p] * cos(angle)
        carrier[1, p] = gain[p] * sin(angle)
