"""Levels by direct summation over cells and spectral lines: slow, and none of the program's code.

Written from the published formulas: the piston (Kinsler et al., Fundamentals of Acoustics), the
air's absorption (ISO 9613-1 eq. 3 to 5), delays from distances.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import j1

KELVIN = 273.15


def absorption_np_m(hz: float, celsius: float, humidity_pct: float) -> float:
    """Nepers per metre at 101.325 kPa."""
    kelvin = celsius + KELVIN
    warm = kelvin / 293.15
    h = humidity_pct * 10.0 ** (4.6151 - 6.8346 * (273.16 / kelvin) ** 1.261)
    oxygen = 24.0 + 4.04e4 * h * (0.02 + h) / (0.391 + h)
    nitrogen = (9.0 + 280.0 * h * np.exp(-4.170 * (warm ** (-1.0 / 3.0) - 1.0))) / np.sqrt(warm)
    loss = 0.01275 * np.exp(-2239.1 / kelvin) * oxygen / (oxygen**2 + hz**2)
    loss += 0.1068 * np.exp(-3352.0 / kelvin) * nitrogen / (nitrogen**2 + hz**2)
    return float(hz**2 * (1.84e-11 * np.sqrt(warm) + warm**-2.5 * loss))


def speed_m_s(celsius: float) -> float:
    """Sound in dry air; a tenth of a percent is nothing here, as delays scale alike."""
    return float(331.45 * np.sqrt(1.0 + celsius / KELVIN))


@dataclass(frozen=True)
class Slab:
    """A grid panel, one feed a cell; positions and angles as rig.toml states them."""

    at_m: tuple[float, float, float]
    pan_deg: float
    tilt_deg: float
    columns: int
    rows: int
    pitch_m: float
    carrier_hz: float
    cell_m: float
    pa_m: float  # rms, of one cell on its axis for a full-scale sine, at 1 m without air's loss
    celsius: float = 20.0
    humidity_pct: float = 50.0

    def cells_m(self) -> tuple[np.ndarray, np.ndarray]:
        """Positions (N, 3) and the axis (3,) in the room."""
        pan, tilt = np.deg2rad((self.pan_deg, self.tilt_deg))
        right = np.array((np.cos(pan), -np.sin(pan), 0.0))
        out = np.array((np.sin(pan) * np.cos(tilt), np.cos(pan) * np.cos(tilt), np.sin(tilt)))
        up = np.array((-np.sin(pan) * np.sin(tilt), -np.cos(pan) * np.sin(tilt), np.cos(tilt)))
        across = (np.arange(self.columns) - (self.columns - 1) / 2) * self.pitch_m
        along = (np.arange(self.rows) - (self.rows - 1) / 2) * self.pitch_m
        x, z = (grid.ravel() for grid in np.meshgrid(across, along))
        return np.array(self.at_m) + x[:, None] * right + z[:, None] * up, out

    def transfer_pa(self, points_m: np.ndarray, hz: float) -> np.ndarray:
        """Complex rms pressure (P, N) at points (P, 3) for a full-scale sine on each cell."""
        cells, out = self.cells_m()
        way = points_m[:, None] - cells
        distance = np.linalg.norm(way, axis=-1)
        cosine = way @ out / distance
        k = 2.0 * np.pi * hz / speed_m_s(self.celsius)
        x = np.maximum(0.5 * k * self.cell_m * np.sqrt(np.maximum(0.0, 1.0 - cosine**2)), 1e-9)
        loss = absorption_np_m(hz, self.celsius, self.humidity_pct)
        away = np.exp(-(1j * k + loss) * distance) / distance
        return self.pa_m * (cosine > 0.0) * 2.0 * j1(x) / x * away

    def power_pa2(
        self, points_m: np.ndarray, aims_m: np.ndarray, gain: float, lines: dict[float, float]
    ) -> np.ndarray:
        """Mean square pressure (A, P) for beams at far focus through aims (A, 3).

        gain   of the resting envelope, re full scale
        lines  offset from the carrier in Hz → power re the resting carrier
        """
        aim = aims_m - np.array(self.at_m)
        aim /= np.linalg.norm(aim, axis=-1, keepdims=True)
        delay = (self.cells_m()[0] - np.array(self.at_m)) @ aim.T / speed_m_s(self.celsius)
        total = np.zeros((len(aims_m), len(points_m)))
        for offset_hz, power in lines.items():
            hz = self.carrier_hz + offset_hz
            pressure = self.transfer_pa(points_m, hz) @ np.exp(-2j * np.pi * hz * delay)
            total += power * gain**2 * np.abs(pressure).T ** 2
        return total
