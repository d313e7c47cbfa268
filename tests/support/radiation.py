"""Pressures by direct sums over cells, per frequency: the program's guard is held against these.

None of the program's code: the piston (Kinsler et al., Fundamentals of Acoustics), a single
resonance (ibid., ch. 1), the air's absorption (ISO 9613-1 eq. 3 to 5), the speed of sound
(Cramer, J. Acoust. Soc. Am. 93 (1993) 2510, eq. 15), mirror images by plane geometry.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.special import j1
from support.directsum import KELVIN, absorption_np_m

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]

PASCALS = 101_325.0
CARBON_DIOXIDE = 400e-6


@dataclass(frozen=True)
class Medium:
    """Air at 101.325 kPa."""

    celsius: float
    humidity_pct: float

    @property
    def speed_m_s(self) -> float:
        """Cramer's eq. 15 with Davis' saturation pressure (Metrologia 29 (1992) 67)."""
        t, p, c = self.celsius, PASCALS, CARBON_DIOXIDE
        k = t + KELVIN
        saturated = np.exp(1.2378847e-5 * k**2 - 1.9121316e-2 * k + 33.93711047 - 6343.1645 / k)
        w = self.humidity_pct / 100.0 * (1.00062 + 3.14e-8 * p + 5.6e-7 * t**2) * saturated / p
        speed = 331.5024 + 0.603055 * t - 0.000528 * t**2
        speed += (51.471935 + 0.1495874 * t - 0.000782 * t**2) * w
        speed += (-1.82e-7 + 3.73e-8 * t - 2.93e-10 * t**2) * p
        speed += (-85.20931 - 0.228525 * t + 5.91e-5 * t**2) * c
        speed += -2.835149 * w**2 - 2.15e-13 * p**2 + 29.179762 * c**2 + 0.000486 * w * p * c
        return float(speed)


@dataclass(frozen=True)
class Rectangle:
    """A surface, as house.toml states it."""

    corner_m: Array
    along_m: Array
    up_m: Array
    reflection: float

    @property
    def normal(self) -> Array:
        """Unit length."""
        across = np.cross(self.along_m, self.up_m)
        return np.asarray(across / np.linalg.norm(across))

    def mirrored(self, points_m: Array) -> Array:
        """Images of points (..., 3)."""
        away = (points_m - self.corner_m) @ self.normal
        return np.asarray(points_m - 2.0 * away[..., None] * self.normal)

    def lets_through(self, image_m: Array, points_m: Array) -> NDArray[np.bool_]:
        """(P,) whether the line from an image to each point crosses the rectangle."""
        way = points_m - image_m
        with np.errstate(divide="ignore", invalid="ignore"):
            share = ((self.corner_m - image_m) @ self.normal) / (way @ self.normal)
            hit = image_m + share[:, None] * way - self.corner_m
            crossed = (share > 0.0) & (share < 1.0)
            for edge in (self.along_m, self.up_m):
                part = hit @ edge / (edge @ edge)
                crossed &= (part >= 0.0) & (part <= 1.0)
        return np.asarray(crossed)


@dataclass(frozen=True)
class Radiator:
    """The cells of one panel where they hang; a full-scale sine on a feed is a phasor of 1.

    cells_m  (N, 3) in the room; axis (3,) of every cell
    feed     (N,) from 0
    gain     (N,) polarity and phase lead of each cell, 0 when dead
    pa_m     rms, of one cell on its axis at 1 m without air's loss, at resonance
    q        0 for a flat answer
    """

    cells_m: Array
    axis: Array
    feed: NDArray[np.int64]
    feeds: int
    gain: Complex
    cell_m: float
    pa_m: float
    resonance_hz: float
    q: float
    medium: Medium

    def transfers_pa(self, points_m: Array, hz: Array) -> Complex:
        """Complex rms pressure (f, P, feeds) per unit phasor on each feed."""
        way = points_m[:, None] - self.cells_m
        distance = np.linalg.norm(way, axis=-1)
        cosine = way @ self.axis / distance
        sine = np.sqrt(np.maximum(0.0, 1.0 - cosine**2))
        strength = self.pa_m * self.gain * (cosine > 0.0) / distance
        onto = np.zeros((len(self.feed), self.feeds))
        onto[np.arange(len(self.feed)), self.feed] = 1.0
        found = np.empty((len(hz), len(points_m), self.feeds), np.complex128)
        for n, f in enumerate(hz):
            k = 2.0 * np.pi * f / self.medium.speed_m_s
            x = np.maximum(0.5 * k * self.cell_m * sine, 1e-9)
            loss = absorption_np_m(float(f), self.medium.celsius, self.medium.humidity_pct)
            answer = 1.0 / (1.0 + 1j * self.q * (f / self.resonance_hz - self.resonance_hz / f))
            pressure = strength * 2.0 * j1(x) / x * np.exp(-(1j * k + loss) * distance) * answer
            found[n] = pressure @ onto
        return found

    def in_mirror(self, surface: Rectangle) -> Radiator:
        """Its image."""
        axis = surface.mirrored(self.cells_m[0] + self.axis) - surface.mirrored(self.cells_m[0])
        cells_m = surface.mirrored(self.cells_m)
        return replace(self, cells_m=cells_m, axis=axis, pa_m=self.pa_m * surface.reflection)

    def with_walls_pa(self, points_m: Array, hz: Array, surfaces: list[Rectangle]) -> Complex:
        """As `transfers_pa`, direct and first reflections added as complex pressures."""
        found = self.transfers_pa(points_m, hz)
        for surface in surfaces:
            image = self.in_mirror(surface)
            seen = surface.lets_through(image.cells_m.mean(axis=0), points_m)
            found[:, seen] += image.transfers_pa(points_m[seen], hz)
        return found

    def phasors(self, aim_m: Array, focused: bool, hz: Array) -> Complex:
        """(f, feeds) that steer at a point, or through it at far focus; cells' leads turned back.

        A feed of several cells takes the mean of their phasors.
        """
        centre = self.cells_m.mean(axis=0)
        far = np.linalg.norm(aim_m - centre)
        if focused:
            lead = np.linalg.norm(aim_m - self.cells_m, axis=-1) - far
        else:
            lead = -(self.cells_m - centre) @ (aim_m - centre) / far
        turns = np.exp(2j * np.pi * np.outer(hz, lead / self.medium.speed_m_s))
        sums = np.zeros((len(hz), self.feeds), np.complex128)
        np.add.at(sums.T, self.feed, (turns * self.gain.conj()).T)
        counts = np.bincount(self.feed, minlength=self.feeds)
        return np.asarray(sums / np.maximum(counts, 1))
