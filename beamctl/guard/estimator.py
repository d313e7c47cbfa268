"""One step of final samples to what every seat gets of them, in units of its cap.

The band of a panel's carrier is taken in full, from the feeds' own phasors; every other band by a
bound that is never low. A panel without a measurement counts louder by its margin.
"""

from __future__ import annotations

from functools import partial
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.exposure import band_at
from beamctl.acoustics.transfer import REFERENCE_PA
from beamctl.guard.field import Field
from beamctl.guard.patterns import Patterns
from beamctl.guard.spectrum import Analyser, Spectrum, frame_length
from beamctl.show.show import Show
from beamctl.show.standing import GUARDED, Caps

Array = NDArray[np.float64]

FRAMES_PER_STEP = 2  # whole frames; half-overlapping ones lie between them


class Step(NamedTuple):
    """What one step holds, if all of it left unchanged.

    amplitude  (panels, bands, L) rms pressure re each cap
    drive      (panels,) root of the summed mean squares of a panel's feeds
    carrier    (panels,) power in the carrier's band, audible: power below 17.8 kHz
    """

    amplitude: Array
    drive: Array
    carrier: Array
    audible: Array


class Ear(NamedTuple):
    """How one panel is listened to; `home` is the place of its carrier's band in GUARDED."""

    feeds: slice
    analyser: Analyser
    home: int
    margin: float


def step_length(rate_hz: int) -> int:
    """Samples of a step: a power of two near 11 ms."""
    return FRAMES_PER_STEP * frame_length(rate_hz)


class Estimator:
    """Reads every step of the stream in order; `panels` names the rows of what it finds.

    most  (panels, L) the most rms pressure re cap, in the carrier's band, that a panel's drive of 1
          can make at each listener, whatever its pattern
    """

    def __init__(self, show: Show, field: Field, caps: Caps) -> None:
        self._field, self._patterns = field, Patterns(field)
        self.panels = field.panels
        self.cap_pa = cap_pa(field, caps)
        self._ears = {name: self._ear(show, name, caps) for name in self.panels}
        self._most_pa2 = {name: self._loudest_pa2(name) for name in self.panels}
        self.most = np.stack([self._most(name) for name in self.panels])
        for name, ear in self._ears.items():  # every matrix is worked out before it is needed
            for frequency_hz in ear.analyser.frequencies_hz:
                nothing = np.zeros((ear.feeds.stop - ear.feeds.start, 1, 1), np.complex64)
                field.power_pa2(name, frequency_hz, nothing)
            for band in GUARDED:
                field.bound_pa2(name, band, np.zeros(ear.feeds.stop - ear.feeds.start))

    def take(self, block: NDArray[np.float32]) -> Step:
        """The next step of the stream, (step_length, channels) float32."""
        spectra = {n: ear.analyser.take(block[:, ear.feeds]) for n, ear in self._ears.items()}
        return Step(
            amplitude=np.stack([self._amplitude(n, spectra[n]) for n in self.panels]),
            drive=np.array([spectra[n].drive for n in self.panels]),
            carrier=np.array([spectra[n].carrier for n in self.panels]),
            audible=np.array([spectra[n].audible for n in self.panels]),
        )

    def home_band(self, panel: int) -> int:
        """Place in GUARDED of the band of a panel's carrier."""
        return self._ears[self.panels[panel]].home

    def _ear(self, show: Show, name: str, caps: Caps) -> Ear:
        panel, feeds = show.rig.panel[name], show.cells[name].feeds
        band = band_at(panel.carrier_hz)
        assert band is not None  # a rig's carriers lie between 24 and 80 kHz
        return Ear(
            slice(panel.first_feed - 1, panel.first_feed - 1 + feeds),
            Analyser(
                show.rig.rate_hz,
                feeds,
                panel.carrier_hz,
                self._field.spread_s[name],
                partial(self._field.answer, name),
            ),
            GUARDED.index(band),
            10.0 ** (caps.margin_db[name] / 20.0),
        )

    def _amplitude(self, panel: str, spectrum: Spectrum) -> Array:
        """(bands, L) rms pressure of one panel re each cap."""
        ear, field = self._ears[panel], self._field
        power = np.zeros(self.cap_pa.shape)
        for frequency_hz, vectors in spectrum.parts:
            power[ear.home] += self._patterns.power_pa2(panel, frequency_hz, vectors)
        power[ear.home] += spectrum.rest * self._most_pa2[panel]
        for band, squares in spectrum.bands.items():
            power[GUARDED.index(band)] = field.bound_pa2(panel, band, np.sqrt(squares))
        found: Array = np.sqrt(power) * ear.margin / self.cap_pa
        return found

    def _loudest_pa2(self, panel: str) -> Array:
        """(L,) of no more than unit drive at any one frequency of the carrier's band."""
        stood_for = self._ears[panel].analyser.frequencies_hz.items()
        by_sub_band = [self._field.most_pa2(panel, hz) * most**2 for hz, most in stood_for]
        return np.asarray(np.max(by_sub_band, axis=0))

    def _most(self, panel: str) -> Array:
        ear = self._ears[panel]
        drive = np.sqrt(2.0 * self._most_pa2[panel])  # a phasor of √2
        found: Array = drive * ear.margin / self.cap_pa[ear.home]
        return found


def cap_pa(field: Field, caps: Caps) -> Array:
    """(bands, L) rms pressure of every listener's cap in every band of GUARDED."""
    by_class = [
        [10.0 ** (limits[band.nominal_hz] / 20.0) * REFERENCE_PA for band in GUARDED]
        for limits in (caps.seats_db, caps.crew_db)
    ]
    rows = [by_class[int(listener.crew)] for listener in field.listeners]
    return np.array(rows, dtype=np.float64).reshape(len(rows), len(GUARDED)).T
