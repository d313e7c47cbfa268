"""The guard without its process: steps in, ceilings and readings out. Pure, counted in samples.

`take` reads a step as it enters the ring and says how far each panel may be driven from now on;
`left` is told with what gain the oldest step went out, and keeps averages, dose and the alarms. A
trip is latched: only `clear` takes it away.
"""

from __future__ import annotations

from collections import deque
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.transfer import REFERENCE_PA
from beamctl.guard.ceilings import Ceilings
from beamctl.guard.estimator import Estimator, Step, step_length
from beamctl.guard.field import Field
from beamctl.guard.windows import Dose, Windows
from beamctl.show.show import Show
from beamctl.show.standing import GUARDED

Array = NDArray[np.float64]
State = Literal["CLEAR", "NEAR", "CAPPING", "TRIPPED"]

NEAR_DB = 3.0
HELD_DB = 0.25  # a panel held by more is shown, and told
SHOWN_S = 1.0  # how long CAPPING stands after the last hold
ALARM = 1e-6  # audible power over the carrier's: -60 dB
QUIET = 1e-6  # of a full-scale sine on every feed: the least carrier that the alarm compares with
ALARM_S = 1.0
NO_SAMPLE = 16.0  # from there on, and what is no number, the final stage sends nothing
EXCESS_DB = 3.0  # over a cap in spite of its ceilings: then nothing obeys, and it trips


class Watch:
    """Holds one show to its caps."""

    def __init__(self, show: Show, ring_n: int, field: Field | None = None) -> None:
        """`ring_n`: the samples that may be between entering and leaving."""
        self.field = field or Field(show)
        self.step_n = step_length(show.rig.rate_hz)
        self.step_s = self.step_n / show.rig.rate_hz
        caps = show.caps
        self._estimator = Estimator(show, self.field, caps)
        feeds = np.array([show.cells[name].feeds for name in self.field.panels], np.float64)
        self._feeds = feeds
        ahead = -(-ring_n // self.step_n) + 2
        self._ceilings = Ceilings(self._estimator, np.sqrt(feeds), ahead)
        count = len(self.field.listeners)
        self._windows = Windows((len(GUARDED), count), self.step_s, caps.averaging_s)
        self.dose = Dose(count, self.step_s, caps.dose_window_s)
        self._under_way: deque[Step] = deque()
        self._audible_s = np.zeros(len(feeds))
        self._held_ago_s = np.full(len(feeds), np.inf)
        self.trip = ""

    def begin(self) -> None:
        """A stream begins, or is joined: what was on its way before will not be told."""
        self._under_way.clear()

    def take(self, block: NDArray[np.float32]) -> Array:
        """Read the next step (step_n, channels); returns the ceilings (panels,) from now on."""
        if not np.abs(block).max() < NO_SAMPLE:
            block = np.where(np.abs(block) < NO_SAMPLE, block, np.float32(0.0))
        step = self._estimator.take(block)
        self._under_way.append(step)
        ceilings = self._ceilings.next(step, self._windows.allowed(), self.step_s)
        sounding = self._ceilings.held < 10.0 ** (-HELD_DB / 20.0)
        self._held_ago_s = np.where(sounding, 0.0, self._held_ago_s + self.step_s)
        return ceilings

    def left(self, gains: Array) -> None:
        """The oldest step went out with these gains (panels,), as `Outlet.gains_left`."""
        step = self._under_way.popleft()
        amplitude = np.tensordot(gains, step.amplitude, 1)
        power = amplitude**2
        self._windows.add(power)
        self.dose.add(power.max(axis=0))
        self._listen(step, gains)
        if (excess_db := -(self.headroom_db() or 0.0)) > EXCESS_DB:
            self.trip = self.trip or f"a cap passed by {excess_db:.1f} dB in spite of its ceilings"

    def clear(self) -> None:
        """Forget the trip; what led to it must come again for another."""
        self.trip = ""
        self._audible_s[:] = 0.0

    # -- what it says ----------------------------------------------------------------------------

    @property
    def state(self) -> State:
        """Where the guard stands; a guard that cannot say so is BLIND, and does not live here."""
        if self.trip:
            return "TRIPPED"
        if np.min(self._held_ago_s) < SHOWN_S:
            return "CAPPING"
        headroom = self.headroom_db()
        return "NEAR" if headroom is not None and headroom <= NEAR_DB else "CLEAR"

    def headroom_db(self) -> float | None:
        """Least of cap minus level over bands and listeners; None when nothing is heard."""
        mean = self._windows.mean()
        most = float(mean.max()) if mean.size else 0.0
        return -10.0 * float(np.log10(most)) if most > 0.0 else None

    def held_db(self) -> dict[str, float]:
        """How far each panel that is held is held down."""
        held_db = -20.0 * np.log10(np.maximum(self._ceilings.held, 1e-6))
        return {
            name: round(float(db), 2)
            for name, db in zip(self.field.panels, held_db, strict=True)
            if db > HELD_DB
        }

    def levels(self) -> tuple[Array, NDArray[np.int64], Array]:
        """Per listener: level in dB re 20 µPa, its band in GUARDED, and the cap there, (L,) each.

        The band is the one in which the listener is nearest its cap; -inf where nothing is heard.
        """
        mean = self._windows.mean()
        band = np.argmax(mean, axis=0) if mean.size else np.zeros(0, np.int64)
        place = np.arange(mean.shape[1])
        cap_db = 20.0 * np.log10(self._estimator.cap_pa[band, place] / REFERENCE_PA)
        with np.errstate(divide="ignore"):
            level_db = cap_db + 10.0 * np.log10(mean[band, place])
        return level_db, band, cap_db

    # -- inside ----------------------------------------------------------------------------------

    def _listen(self, step: Step, gains: Array) -> None:
        """The samples alarm: nothing below 17.8 kHz belongs into a feed."""
        compared = np.maximum(step.carrier, QUIET * self._feeds)
        heard = (step.audible > ALARM * compared) & (gains > 0.0)
        self._audible_s = np.where(heard, self._audible_s + self.step_s, 0.0)
        if (longest := float(self._audible_s.max())) >= ALARM_S:
            panel = self.field.panels[int(np.argmax(self._audible_s))]
            self.trip = self.trip or (
                f"{panel} sends sound below 17.8 kHz for {longest:.1f} s: a fault in the samples"
            )
