"""Compiled: the one smooth gain that the beams of a panel share.

Their peaks may sum to no more than the panel's full drive. Each beam's envelope peaks are watched a
few chunks ahead: held, released slowly, averaged, so that the demand of a beam never falls short of
its envelope and never jumps; where the demands sum to more than the drive, one gain takes them down
together, over a soft knee.
"""

from __future__ import annotations

import numpy as np

from beamctl.engine.compiled import compiled

CHUNK = 64  # samples a peak is taken over
SMOOTH = 8  # chunks a demand is averaged over
LOOKAHEAD = (SMOOTH + 1) * CHUNK  # samples by which the envelope is played later than it is known
RELEASE_S = 0.3
KNEE = 0.2  # width of the knee, in parts of the drive


@compiled
def take_peak(peaks, held, demands, peak, release):
    """Shift one chunk in: peaks (K,), held (SMOOTH,), demands (D,) of one beam, newest last.

    The newest demand covers the chunk SMOOTH - 1 chunks back and the ones after it up to the
    newest; K chunks are held so that feeds which run late are covered too.
    """
    peaks[:-1] = peaks[1:]
    peaks[-1] = peak
    most = 0.0
    for value in peaks:
        most = max(most, value)
    floor_value = held[-1] * release
    held[:-1] = held[1:]
    held[-1] = max(most, floor_value)
    total = 0.0
    for value in held:
        total += value
    demands[:-1] = demands[1:]
    demands[-1] = total / held.shape[0]


@compiled
def add_demand(total, gain, gain_late, before, after, offset, begin, end):
    """total[p] += larger gain × demand between two chunk marks, for begin <= p < end.

    gain and gain_late (segment,) are the beam's gain now and as its latest feed still plays it;
    `before` and `after` are demands at the chunk's two ends, `offset` is begin's place in it.
    """
    for p in range(begin, end):
        share = (offset + p - begin) / 64.0
        total[p] += max(gain[p], gain_late[p]) * (before + (after - before) * share)


@compiled
def shared_gain(total, drive, begin, end):
    """Turn summed demands into the gain that keeps them to `drive`, in place, over the knee."""
    low = 1.0 - 0.5 * KNEE
    for p in range(begin, end):
        y = total[p] / drive
        if y <= low:
            total[p] = 1.0
        elif y < low + KNEE:
            total[p] = (y - (y - low) * (y - low) / (2.0 * KNEE)) / y
        else:
            total[p] = np.float32(1.0 / y)
