"""How loud steps of a show are at every seat, per band: from beams and programmes, not samples.

Within a panel one oscillator feeds every beam, so their carriers add as pressures. What modulates a
beam has the beam's own pattern; unlike programmes add in power, those of one sound may add in
pressure. Bands without the carrier are bounded by the triangle over the feeds, and panels add as
magnitudes.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.bands import band_at
from beamctl.acoustics.steering import base_delay_s, cell_delays_s, feed_drive
from beamctl.guard.field import Field
from beamctl.guard.travels import BETWEEN, Place, Programme, Source, Step
from beamctl.show.show import Show
from beamctl.show.standing import GUARDED

REST = 0.5  # the envelope of a resting beam at trim 0 dB, re a full-scale sine: every law's

Array = NDArray[np.float64]
Phasors = NDArray[np.complex128]
Powers = Callable[[str, Programme], Array]
"""(B,) of a programme on a panel: power per band of GUARDED re the resting carrier."""


class Loudness:
    """Mean square pressures of one show's steps."""

    def __init__(self, show: Show, field: Field, powers: Powers) -> None:
        self._field = field
        air = Air(**show.house.air.model_dump())
        self._panels = [
            _Panel(show, field, powers, name, sound_speed_m_s(air)) for name in field.panels
        ]

    def power_pa2(self, steps: Sequence[Step]) -> Array:
        """(L, B, S) in Pa², margins included, at the worst place in each head."""
        total = np.zeros((len(self._field.listeners), len(GUARDED), len(steps)))
        for panel in self._panels:
            panel.add(total, steps)
        return np.square(total, out=total)


class _Panel:
    """The beams of one panel."""

    def __init__(
        self, show: Show, field: Field, powers: Powers, name: str, sound_speed_m_s: float
    ) -> None:
        self._name, self._field, self._powers = name, field, powers
        self._spec, self._cells = show.rig.panel[name], show.cells[name]
        self._speed = sound_speed_m_s
        self._mine = {beam for beam in show.sheet.beam if show.panel_of(beam) == name}
        self._rise = 10.0 ** (show.caps.margin_db[name] / 20.0)
        band = band_at(self._spec.carrier_hz)
        self._carrier = next(i for i, guarded in enumerate(GUARDED) if guarded == band)

    def add(self, total: Array, steps: Sequence[Step]) -> None:
        """Add this panel's amplitudes to `total` (L, B, S); like steps are worked out once."""
        kinds: dict[tuple[Source, ...], int] = {}
        numbers = [
            kinds.setdefault(tuple(s for s in step.sources if s.beam in self._mine), len(kinds))
            for step in steps
        ]
        amplitude = np.zeros((total.shape[0], len(GUARDED), len(kinds)))
        by_count: dict[int, list[tuple[Source, ...]]] = {}
        for sources in kinds:
            by_count.setdefault(len(sources), []).append(sources)
        by_count.pop(0, None)
        for alike in by_count.values():
            places = [kinds[sources] for sources in alike]
            amplitude[:, :, places] = self._amplitude(alike)
        total += self._rise * amplitude[:, :, numbers]

    def _amplitude(self, kinds: Sequence[tuple[Source, ...]]) -> Array:
        """(L, B, S) of S sets of sources, all of the same number."""
        drives: dict[Place, Phasors] = {}
        vectors = []  # per set (F, K)
        rms = []  # per set (F, B)
        for sources in kinds:
            gains = self._gains(sources)
            each = np.stack(
                [g * self._drive(s.place, drives) for g, s in zip(gains, sources, strict=True)],
                axis=1,
            )
            power = np.stack([self._power(source) for source in sources])
            beside = np.sqrt(power[:, self._carrier] - 1.0)
            beside *= np.sqrt(_together(sources, np.array(gains) * beside))
            vectors.append(_vectors(each, power[:, self._carrier], beside))
            rms.append(np.abs(each) @ np.sqrt(power))
        found = np.zeros((len(self._field.listeners), len(GUARDED), len(kinds)))
        stacked, spread = np.stack(vectors, axis=1), np.stack(rms, axis=1)
        for number, band in enumerate(GUARDED):
            if number == self._carrier:
                square = self._field.power_pa2(self._name, self._spec.carrier_hz, stacked)
            elif not spread[:, :, number].any():
                continue
            else:
                square = self._field.bound_pa2(self._name, band, spread[:, :, number])
            found[:, number] = np.sqrt(square)
        return found

    def _gains(self, sources: Sequence[Source]) -> list[float]:
        """Resting envelope of each, with what the panel's shared gain takes at the least."""
        total = REST * sum(source.gain for source in sources)
        shared = min(1.0, self._spec.full_drive / total)
        return [REST * shared * s.gain * (BETWEEN if s.moving else 1.0) for s in sources]

    def _power(self, source: Source) -> Array:
        """(B,) of what the beam plays: the carrier at rest, and what each programme adds.

        Of programmes that cross-fade no more than each one's share, the square being convex.
        """
        resting = np.zeros(len(GUARDED))
        resting[self._carrier] = 1.0
        found = [resting]
        for mix in source.mixes:
            added = (share * (self._powers(self._name, what) - resting) for what, share in mix)
            found.append(sum(added, resting))
        return np.asarray(np.max(found, axis=0))

    def _drive(self, place: Place, known: dict[Place, Phasors]) -> Phasors:
        """(F,) carrier phasors of a beam of gain 1."""
        if place not in known:
            at_m = self._cells.at_m
            aim = np.array(place[:3])
            delays = cell_delays_s(at_m, aim, place[3], self._speed, base_delay_s(at_m))
            known[place] = feed_drive(self._cells, delays, self._spec.carrier_hz)
        return known[place]


def _vectors(each: Phasors, power: Array, beside: Array) -> Phasors:
    """(F, K) of beams (F, N) with carrier-band powers (N,): carriers together, then the rest.

    `beside` (N,) is the amplitude of what modulates each. Of a single beam that is one vector: its
    modulation has the pattern of its carrier.
    """
    if each.shape[1] == 1:
        return np.asarray(each * np.sqrt(power))
    return np.concatenate((each.sum(axis=1, keepdims=True), each * beside), axis=1)


def _together(sources: Sequence[Source], strength: Array) -> Array:
    """(N,) by how much the power of each counts for more because others play the same sound.

    (Σ a)² ≤ Σ a² / w for any w that sum to 1 (Cauchy-Schwarz): each by its share of the strength.
    """
    sounds = [{what.sound for mix in source.mixes for what, _ in mix} for source in sources]
    alike = np.array([[not mine.isdisjoint(theirs) for theirs in sounds] for mine in sounds])
    total = (alike | np.eye(len(sources), dtype=np.bool_)) @ strength
    return np.divide(total, strength, out=np.ones_like(total), where=strength > 0.0)
