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
ENOUGH = RISE / np.sqrt(2.0)  # times its drive: a panel that may have that much is given no more
KEPT = RISE * 2.0  # times its drive: what was given before stays, unless it is more
MAJOR = 0.1  # of a seat's pressure: a panel below it is not held for what others do there
MINOR_RISE = np.sqrt(2.0)  # the most that such a panel may grow by there …
TRACE = 0.01  # of a seat's pressure: … and a panel below this by more
SPARED = 0.2  # of the room over its drive, in dB: not given, so that little swings change nothing
LEAST = 0.1  # of what is left of a cap: what is below it may grow tenfold before it is seen
SILENT_ROOM = 2.0  # as if, of a panel that is silent
RISE_DB = 0.5  # no ceiling rises by less


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
        self._under_way: deque[tuple[Array, Array]] = deque(maxlen=steps_ahead)  # drive, its excess

    def next(self, step: Step, allowed: Array, step_s: float) -> Array:
        """Ceilings (panels,) after `step`; allowed (bands, L) is the mean square re cap left."""
        most = np.sqrt(allowed)
        fits = _fits(step.amplitude, most)
        released = self.held * 10.0 ** (RELEASE_DB_S * step_s / 20.0)
        self.held = np.minimum(np.minimum(fits, released), 1.0)
        excess = np.where(fits < 1.0, step.drive * np.minimum(fits, 1.0), np.inf)
        self._under_way.append((step.drive, excess))
        drives, excesses = (np.stack(rows) for rows in zip(*self._under_way, strict=True))
        drive, least = drives.max(axis=0), np.minimum(excesses.min(axis=0), self._most_drive)
        blind = self._blind(step, most)
        with np.errstate(invalid="ignore"):
            fitting = np.where(step.drive > 0.0, step.drive * fits, 0.0)

        def up_to(rise: float) -> Array:
            seen = np.minimum(fitting, drive * rise)
            found: Array = np.minimum(np.maximum(seen, blind), least)
            return found

        enough = np.maximum(ENOUGH * drive, blind)
        self._given = _moved(self._given, up_to(RISE), up_to(KEPT), drive, enough)
        return self._given.copy()

    def _blind(self, step: Step, most: Array) -> Array:
        """(panels,) drive that passes no cap in any pattern of a panel, the others as seen.

        What it makes in other bands than its carrier's is bounded for any pattern already, and
        grows with the drive.
        """
        found = np.full(len(step.drive), np.inf)
        total = step.amplitude.sum(axis=0)
        for panel, row in enumerate(self._estimator.most):
            home, own = self._estimator.home_band(panel), step.amplitude[panel]
            slack = np.maximum(most - (total - own), 0.0)
            beside = own >= np.maximum(TRACE * total, LEAST * slack)
            beside[home] = False
            with np.errstate(divide="ignore", invalid="ignore"):
                in_home = np.min(slack[home] / row, initial=np.inf, where=row > 0.0)
                grows = np.min(slack / own, initial=np.inf, where=beside)
            found[panel] = in_home / len(found)
            if beside.any():
                found[panel] = min(found[panel], step.drive[panel] * grows)
        return found


def _fits(amplitude: Array, most: Array) -> Array:
    """(panels,) factor by which each panel's drive may change so that every seat keeps its cap.

    The panel that must come down most comes first, and the others are looked at with it down.
    """
    gains = np.ones(len(amplitude))
    down = np.zeros(len(amplitude), dtype=np.bool_)
    while True:
        found = _alike(amplitude * gains[:, np.newaxis, np.newaxis], most, down)
        worst = int(np.argmin(found))
        if not found[worst] < 1.0:
            return np.where(down, gains, found)
        gains[worst], down[worst] = found[worst], True


def _alike(amplitude: Array, most: Array, down: NDArray[np.bool_]) -> Array:
    """(panels,) factor for each that is not `down` yet; those that share a seat change alike.

    A panel that adds little to a seat is not held for what the others do there.
    """
    total = amplitude.sum(axis=0)
    with np.errstate(divide="ignore", invalid="ignore"):
        share = np.where(total > 0.0, amplitude / total, 0.0)
        factor = np.where(total > 0.0, most / total, np.inf)
        over = factor < 1.0
        stay = np.where((share < MAJOR) | down[:, np.newaxis, np.newaxis], share, 0.0).sum(axis=0)
        held = np.where(over, np.maximum(factor - stay, 0.0) / (1.0 - stay), factor)
    found = np.full(len(amplitude), np.inf)
    for panel in np.flatnonzero(~down):
        part = share[panel]
        limits = np.where(over & (part < MAJOR), MINOR_RISE, held)
        found[panel] = np.min(limits, initial=np.inf, where=part >= TRACE)
    return found


def _moved(given: Array, goal: Array, most: Array, drive: Array, enough: Array) -> Array:
    """Ceilings after `given`, no more than `most`; as few changes as the drives leave a choice."""
    with np.errstate(divide="ignore", invalid="ignore"):
        room = np.clip(np.where(drive > 0.0, goal / drive, SILENT_ROOM), 1.0, RISE)
    fresh = goal * room**-SPARED
    rises = (fresh > given * 10.0 ** (RISE_DB / 20.0)) & (given < enough)
    return np.where(rises | (given > most), fresh, given)
