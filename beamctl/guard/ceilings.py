"""Drive ceilings: how much each panel may be driven so that no seat passes its cap.

Drive is the root of the summed mean squares of a panel's feeds. A panel may always have what no
pattern could pass the cap with; more only in the pattern that was seen, by as much as fits. What is
on its way through the ring with too much in it keeps the ceiling down until it has left.
"""

from __future__ import annotations

from collections import deque

import numpy as np
from numpy.typing import NDArray

from beamctl.guard.estimator import Estimator, Step

Array = NDArray[np.float64]

RELEASE_DB_S = 12.0  # how fast a panel that was held comes back
RISE = 4.0  # the most that a pattern seen once may grow by before it is seen again
MAJOR = 0.1  # of a seat's pressure: a panel below it is not held for what others do there
TRACE = 0.01  # of a seat's pressure: a panel below it may grow regardless
STEP_DB = 0.05  # ceilings go by these steps, and up by two at least: a still beam has a still one


class Ceilings:
    """One call of `next` for every step, in order.

    held  (panels,) gain that the newest step leaves each panel, 1 when it is not held
    """

    def __init__(self, estimator: Estimator, most_drive: Array, steps_ahead: int) -> None:
        """`most_drive` (panels,): what converters can give; `steps_ahead`: how long a ring is."""
        self._estimator = estimator
        self._most_drive = most_drive
        self.held = np.ones(len(most_drive))
        self._given = np.zeros(len(most_drive))
        self._under_way: deque[Array] = deque(maxlen=steps_ahead)

    def next(self, step: Step, allowed: Array, step_s: float) -> Array:
        """Ceilings (panels,) after `step`; allowed (bands, L) is the mean square re cap left."""
        most = np.sqrt(allowed)
        fits = _fits(step.amplitude, most)
        released = self.held * 10.0 ** (RELEASE_DB_S * step_s / 20.0)
        self.held = np.minimum(np.minimum(fits, released), 1.0)
        seen = step.drive * np.where(self.held < 1.0, self.held, np.minimum(fits, RISE))
        ceilings = np.maximum(seen, self._blind(step.amplitude, most))
        self._under_way.append(np.where(fits < 1.0, step.drive * np.minimum(fits, 1.0), np.inf))
        ceilings = np.minimum(ceilings, np.min(self._under_way, axis=0))
        wanted = _stepped(np.minimum(ceilings, self._most_drive))
        rises = wanted > self._given * 10.0 ** (1.5 * STEP_DB / 20.0)
        self._given = np.where(rises, wanted, np.minimum(wanted, self._given))
        return self._given.copy()

    def _blind(self, amplitude: Array, most: Array) -> Array:
        """(panels,) drive that passes no cap in any pattern of a panel, the others as seen."""
        found = np.full(len(amplitude), np.inf)
        for panel, row in enumerate(self._estimator.most):
            home = self._estimator.home_band(panel)
            others = amplitude[:, home].sum(axis=0) - amplitude[panel, home]
            slack = np.maximum(most[home] - others, 0.0)
            heard = row > 0.0
            if heard.any():
                found[panel] = np.min(slack[heard] / row[heard]) / len(amplitude)
        return found


def _fits(amplitude: Array, most: Array) -> Array:
    """(panels,) factor by which each panel's drive may change so that every seat keeps its cap.

    Panels that share a seat change alike; one that adds little to it is not held for the others.
    """
    total = amplitude.sum(axis=0)
    found = np.full(len(amplitude), np.inf)
    with np.errstate(divide="ignore", invalid="ignore"):
        share = np.where(total > 0.0, amplitude / total, 0.0)
        minor = np.where(share < MAJOR, share, 0.0).sum(axis=0)
        factor = np.where(total > 0.0, most / total, np.inf)
        over = factor < 1.0
        held = np.where(over, np.maximum(factor - minor, 0.0) / (1.0 - minor), factor)
    for panel in range(len(amplitude)):
        counts = share[panel] >= np.where(over, MAJOR, TRACE)
        if counts.any():
            found[panel] = float(np.min(held[counts]))
    return found


def _stepped(ceilings: Array) -> Array:
    """Ceilings rounded down to whole steps of level; 0 stays 0."""
    with np.errstate(divide="ignore"):
        level_db = 20.0 * np.log10(ceilings)
    found: Array = 10.0 ** (np.floor(level_db / STEP_DB) * STEP_DB / 20.0)
    return found
