"""Drift of the device's clock against the system's, from when it asked for which frame.

The time is the system's own, taken by whoever looks: the clock that a device tells may be its own.
"""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass, field

import numpy as np

WINDOW_S = 120.0
LEAST_S = 20.0
SPACING_S = 0.05


@dataclass
class Drift:
    """Least squares over the last two minutes of (time, frame) pairs."""

    rate_hz: int
    _marks: deque[tuple[int, int]] = field(default_factory=deque)

    def note(self, now_ns: int, frame: int) -> None:
        """At `now_ns` the device had asked for `frame` last; a frame seen before says nothing."""
        if self._marks:
            last_ns, last_frame = self._marks[-1]
            if now_ns - last_ns < SPACING_S * 1e9 or frame <= last_frame:
                return
        self._marks.append((now_ns, frame))
        while now_ns - self._marks[0][0] > WINDOW_S * 1e9:
            self._marks.popleft()

    @property
    def ppm(self) -> float | None:
        """How much faster the device is than the system's clock; None before twenty seconds."""
        if len(self._marks) < 8:
            return None
        marks = np.array(self._marks, np.int64)
        seconds = (marks[:, 0] - marks[0, 0]) * 1e-9
        if seconds[-1] < LEAST_S:
            return None
        ahead = (marks[:, 1] - marks[0, 1]) / self.rate_hz - seconds
        slope = np.polyfit(seconds - seconds.mean(), ahead, 1)[0]
        return float(slope * 1e6)
