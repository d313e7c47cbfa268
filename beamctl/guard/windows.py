"""Energies over the averaging time, per band and listener, and what may still follow.

Everything counts in units of the cap: 1 is the cap's mean square. Time goes in steps; long windows
are kept in buckets of several steps, and a bucket counts until all of it is past.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

BUCKETS = 128
SHARES = (0.5, 0.25, 0.125, 0.0625, 0.03125)  # of the window, in which what follows must fit
OVERSHOOT = 2.0  # the most that a moment may have re cap, within the average: a full sideband more


class Windows:
    """Sliding means of levels re cap, (…) of any one shape."""

    def __init__(self, shape: tuple[int, ...], step_s: float, averaging_s: float) -> None:
        self.step_s, self.averaging_s = step_s, averaging_s
        self._per_bucket = max(1, round(averaging_s / step_s / BUCKETS))
        self._length = max(1, int(np.ceil(averaging_s / (step_s * self._per_bucket))))
        self._total = np.zeros(shape)  # seconds at the cap since the start
        self._marks = np.zeros((self._length + 1, *shape))  # the total at each bucket's beginning
        self._steps = 0

    def add(self, power: Array) -> None:
        """One more step of mean squares re cap."""
        if self._steps % self._per_bucket == 0:
            self._marks[self._steps // self._per_bucket % len(self._marks)] = self._total
        self._total = self._total + power * self.step_s
        self._steps += 1

    def mean(self) -> Array:
        """Mean over the averaging time, re cap; 0 before anything sounded."""
        mean: Array = self._newest(self._length) / self.averaging_s
        return mean

    def allowed(self) -> Array:
        """Mean square re cap that may go on from now without a window passing the cap.

        For every share u of the window: what is in its newest 1 - u, and u of what follows, must
        not be more than the whole window at its cap. (Of what swings within the least share, a
        window may pass it by what that amounts to: 0.1 dB.)
        """
        most = np.full(self._total.shape, OVERSHOOT)
        bucket_s = self._per_bucket * self.step_s
        for share in SHARES:
            follow = max(1, round(share * self._length))
            left_s = self._length * bucket_s - self._newest(self._length - follow)
            np.minimum(most, left_s / (follow * bucket_s), out=most)
        allowed: Array = np.maximum(most, 0.0)
        return allowed

    def _newest(self, buckets: int) -> Array:
        """Seconds at the cap in the newest buckets, besides one that is being filled."""
        if buckets == 0 or self._steps == 0:
            return np.zeros_like(self._total)
        first = max(0, self._steps // self._per_bucket - buckets)
        kept: Array = self._total - self._marks[first % len(self._marks)]
        return kept


class Dose:
    """Energy re cap over the dose window and since doors; 100 % is a whole window at the cap."""

    def __init__(self, listeners: int, step_s: float, window_s: float) -> None:
        self._windows = Windows((listeners,), step_s, window_s)
        self.since_doors = np.zeros(listeners)

    def add(self, power: Array) -> None:
        """One step: (L,) mean squares re cap, each in its worst band."""
        self._windows.add(power)
        self.since_doors += 100.0 * power * self._windows.step_s / self._windows.averaging_s

    @property
    def percent(self) -> Array:
        """(L,) percent over the window."""
        percent: Array = 100.0 * self._windows.mean()
        return percent

    def carry_on(self, counted: Array) -> None:
        """Take over (2, L) percent, over the window and since doors, that another had counted.

        It stays in the window for as long as one lasts.
        """
        self._windows.add(counted[0] / 100.0 * self._windows.averaging_s / self._windows.step_s)
        self.since_doors = counted[1].copy()
