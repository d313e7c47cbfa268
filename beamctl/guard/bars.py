"""Before the show: the loudest moment of every cue at any seat, and the cues barred for it.

What passes a seat counts as if it stayed there, and a programme with the loudest stretch that the
averaging holds, so that what is forecast is never less than what is measured.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from math import floor

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.geometry import to_panel
from beamctl.acoustics.transfer import REFERENCE_PA
from beamctl.guard.field import Field
from beamctl.guard.loudness import Loudness, Powers
from beamctl.guard.points import listeners
from beamctl.guard.travels import Step, Travel, travels
from beamctl.show.show import Show
from beamctl.show.standing import GUARDED
from beamctl.show.targets import frame_of

LOT = 256  # steps looked at together
FOUND_DB = 0.5  # a cue that finds a seat over its cap answers only for what it adds beyond this
LOWEST_TRIM_DB = -90.0

Array = NDArray[np.float64]
Progress = Callable[[str, int, int], None]  # what, how many done, how many in all


@dataclass(frozen=True, slots=True)
class Bar:
    """Why a cue is barred: its worst moment, and the loudest beam there.

    ref, seat     the cue, and "stalls B4"
    band_hz       nominal frequency of the band
    at_s          seconds after the cue's GO
    trim_fits_db  the highest trim that keeps every seat to its cap when the beam is nowhere above
                  it in this cue; None when none does
    """

    ref: str
    seat: str
    band_hz: float
    level_db: float
    cap_db: float
    at_s: float
    beam: str
    trim_fits_db: float | None

    @property
    def text(self) -> str:
        """For people, without the cue's number."""
        if self.trim_fits_db is None:
            way_out = f"no trim of {self.beam} alone fits"
        else:
            way_out = f"{self.beam} at trim {self.trim_fits_db:.1f} dB fits"
        return (
            f"over its cap at {self.seat} by {self.level_db - self.cap_db:.1f} dB "
            f"({self.band_hz / 1000.0:g} kHz band, {self.level_db:.1f} against {self.cap_db:g}) "
            f"{self.at_s:.1f} s after GO; {way_out}"
        )


@dataclass(frozen=True, slots=True)
class Level:
    """One cue where it comes nearest to a cap, or farthest over it; `bar` when it is barred."""

    ref: str
    seat: str
    band_hz: float
    level_db: float
    cap_db: float
    at_s: float
    bar: Bar | None = None

    @property
    def margin_db(self) -> float:
        """What is left to the cap; below 0 over it."""
        return self.cap_db - self.level_db


def bars(show: Show, field: Field, powers: Powers) -> dict[str, Bar]:
    """The barred cues, by reference; see `levels`."""
    found = levels(show, field, powers)
    return {ref: level.bar for ref, level in found.items() if level.bar is not None}


def levels(
    show: Show, field: Field, powers: Powers, progress: Progress | None = None
) -> dict[str, Level]:
    """Every cue that sounds where somebody sits or works, in the order of the sheet.

    As the sheet is played from the top, each cue after the one before has settled: a cue that is
    fired from another state than the sheet's is the operator's matter, and the guard's when it
    measures. A seat that a cue finds over its cap already is on the account of the cue that made
    it so. Without listeners nothing is found.
    """
    found: dict[str, Level] = {}
    if not field.listeners:
        return found
    judge = _Judge(show, field, powers)
    order = [cue.ref for cue in show.sheet.cue]
    for done, travel in enumerate(travels(show)):
        if progress is not None:
            progress(f"cue {travel.ref}", done, len(order))
        level = judge.level(travel)
        known = found.get(travel.ref)
        if level is not None and (known is None or _worse(level, known)):
            found[travel.ref] = level
    return {ref: found[ref] for ref in order if ref in found}


def unheard(show: Show) -> tuple[str, ...]:
    """Names of the listeners behind the front of every panel: the field model knows nothing there.

    A panel radiates backward too, only nobody can say how much.
    """
    people = listeners(show.house)
    at_m = np.array([person.at_m for person in people]).reshape(-1, 3)
    behind = np.ones(len(people), dtype=np.bool_)
    for panel in show.rig.panel.values():
        behind &= to_panel(frame_of(panel), at_m)[:, 1] <= 0.0
    return tuple(person.name for person, gone in zip(people, behind, strict=True) if gone)


def _worse(one: Level, other: Level) -> bool:
    return (one.bar is not None, -one.margin_db) > (other.bar is not None, -other.margin_db)


@dataclass(frozen=True, slots=True)
class _Moment:
    """The largest ratio of power to limit, and where: listener, band, step."""

    ratio: float
    power_pa2: float
    listener: int
    band: int
    step: Step


class _Judge:
    """Holds a show's steps to its caps."""

    def __init__(self, show: Show, field: Field, powers: Powers) -> None:
        self._rate_hz = show.rig.rate_hz
        self._people = field.listeners
        self._loudness = Loudness(show, field, powers)
        caps = show.caps
        self._caps_db = np.array(
            [
                [(caps.crew_db if who.crew else caps.seats_db)[b.nominal_hz] for b in GUARDED]
                for who in field.listeners
            ]
        )
        self._caps_pa2 = REFERENCE_PA**2 * 10.0 ** (self._caps_db / 10.0)

    def level(self, travel: Travel) -> Level | None:
        """The worst of a cue, with its bar; None when nothing of it is heard anywhere."""
        worst = self._worst(travel.steps, self._caps_pa2)
        if worst is None:
            return None
        seat, band_hz, level_db, cap_db, at_s = self._words(travel, worst)
        bar = self._bar(travel) if worst.ratio > 1.0 else None
        return Level(travel.ref, seat, band_hz, level_db, cap_db, at_s, bar)

    def _bar(self, travel: Travel) -> Bar | None:
        limits = self._limits(travel.before)
        worst = self._worst(travel.steps, limits)
        if worst is None or worst.ratio <= 1.0:
            return None
        beam = self._loudest_beam(worst)
        found_over = limits[worst.listener, worst.band] > self._caps_pa2[worst.listener, worst.band]
        held_to = self._caps_pa2 if found_over else limits  # no credit for what was wrong before
        fits_db = self._fitting(travel.steps, held_to, beam, worst)
        return Bar(travel.ref, *self._words(travel, worst), beam, fits_db)

    def _words(self, travel: Travel, moment: _Moment) -> tuple[str, float, float, float, float]:
        """Seat, band, level, cap, and seconds after GO."""
        return (
            self._people[moment.listener].name,
            GUARDED[moment.band].nominal_hz,
            float(10.0 * np.log10(moment.power_pa2 / REFERENCE_PA**2)),
            float(self._caps_db[moment.listener, moment.band]),
            (moment.step.at - travel.go) / self._rate_hz,
        )

    def _limits(self, before: Step) -> Array:
        """(L, B) in Pa²: the caps, or what a cue finds over them."""
        found = self._loudness.power_pa2([before])[:, :, 0]
        return np.where(found > self._caps_pa2, found * 10.0 ** (FOUND_DB / 10.0), self._caps_pa2)

    def _worst(self, steps: Sequence[Step], limits_pa2: Array) -> _Moment | None:
        """None when nothing sounds."""
        worst: _Moment | None = None
        for first in range(0, len(steps), LOT):
            lot = steps[first : first + LOT]
            power = self._loudness.power_pa2(lot)
            ratio = power / limits_pa2[:, :, np.newaxis]
            most = ratio.max(axis=(0, 1))
            if (best := float(most.max())) > (worst.ratio if worst else 0.0):
                step = int(most.argmax())
                who, band = divmod(int(ratio[:, :, step].argmax()), len(GUARDED))
                worst = _Moment(best, float(power[who, band, step]), who, band, lot[step])
        return worst

    def _loudest_beam(self, moment: _Moment) -> str:
        alone = [moment.step._replace(sources=(source,)) for source in moment.step.sources]
        power = self._loudness.power_pa2(alone)[moment.listener, moment.band]
        return moment.step.sources[int(power.argmax())].beam

    def _fitting(
        self, steps: Sequence[Step], limits: Array, beam: str, worst: _Moment
    ) -> float | None:
        """The beam's highest trim, in tenths of a dB, with which no step is over the limits.

        Searched on the steps found over them so far, tried on all, until none is.
        """

        def over(tenths: int, among: Sequence[Step]) -> _Moment | None:
            held = [_held(step, beam, 10.0 ** (tenths / 200.0)) for step in among]
            found = self._worst(held, limits)
            return found if found is not None and found.ratio > 1.0 else None

        now_db = max(20.0 * np.log10(s.gain) for s in worst.step.sources if s.beam == beam)
        low, high = round(10.0 * LOWEST_TRIM_DB), floor(10.0 * now_db + 0.5)
        if over(low, steps):
            return None
        hard = [worst.step]
        while True:
            fits, too_much = low, high + 1
            while too_much - fits > 1:
                tried = (fits + too_much) // 2
                fits, too_much = (fits, tried) if over(tried, hard) else (tried, too_much)
            found = over(fits, steps)
            if found is None:
                return fits / 10.0
            high = fits - 1
            hard.append(found.step)


def _held(step: Step, beam: str, gain: float) -> Step:
    """The step with one beam held to a gain."""
    sources = (source.held(gain) if source.beam == beam else source for source in step.sources)
    return step._replace(sources=tuple(sources))
