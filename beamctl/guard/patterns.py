"""Pressures of patterns that were seen a moment ago, without summing over the feeds again.

Beams that stand give vectors of the same few patterns step after step, only stronger or weaker, or
mixed otherwise. What each of an orthonormal set of them makes at every place is kept, and the set
grows until it holds what comes; what a step holds besides it counts by the bound that no pattern
passes, so that nothing is ever taken too low.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from beamctl.guard.field import Field

Array = NDArray[np.float64]
Vectors = NDArray[np.complex64]

BESIDES = 1e-7  # of a step's power: with more than that beside the set, it grows
MOST = 12  # vectors in a set; then it begins anew


class Patterns:
    """Asks a field; keeps one set of vectors for each panel and frequency."""

    def __init__(self, field: Field) -> None:
        self._field = field
        self._kept: dict[tuple[str, float], tuple[Vectors, Vectors]] = {}

    def power_pa2(self, panel: str, frequency_hz: float, vectors: Vectors) -> Array:
        """As `Field.power_pa2` of one set (F, K): mean square pressure (L,), never lower."""
        key = panel, frequency_hz
        least = BESIDES * _power(vectors)
        basis, there = self._kept.get(key) or self._grown(key, vectors, vectors[:, :0], least)
        if _power(vectors - basis @ (basis.conj().T @ vectors)) > least:
            room = basis.shape[1] + vectors.shape[1] <= MOST
            basis, there = self._grown(key, vectors, basis if room else basis[:, :0], least)
        shares = basis.conj().T @ vectors
        besides = _power(vectors - basis @ shares)
        seen = self._field.heard_pa2(panel, _by_place(shares.T @ there))[:, 0]
        more = besides * self._field.most_pa2(panel, frequency_hz)
        return np.asarray((np.sqrt(seen) + np.sqrt(more)) ** 2)

    def _grown(
        self, key: tuple[str, float], vectors: Vectors, basis: Vectors, least: float
    ) -> tuple[Vectors, Vectors]:
        """The set with what of `vectors` was besides it, and what all of it makes at the places."""
        panel, frequency_hz = key
        fresh, sizes, _ = np.linalg.svd(_besides(vectors, basis), full_matrices=False)
        fresh = fresh[:, sizes**2 > 0.1 * least / len(sizes)]  # the rest is rounding
        added, _ = np.linalg.qr(_besides(fresh, basis))  # again, so that the set stays orthonormal
        there = self._field.at_places(panel, frequency_hz, added)
        if basis.shape[1]:
            there = np.concatenate((self._kept[key][1], there))
        self._kept[key] = np.concatenate((basis, added), axis=1), there
        return self._kept[key]


def _besides(vectors: Vectors, basis: Vectors) -> Vectors:
    """What of vectors (F, K) is not in the span of an orthonormal basis (F, B)."""
    left: Vectors = vectors - basis @ (basis.conj().T @ vectors)
    return left


def _power(vectors: Vectors) -> float:
    """Sum of squares."""
    return float(np.sum(np.abs(vectors) ** 2))


def _by_place(pressure: NDArray[np.complexfloating]) -> NDArray[np.float32]:
    """Summed squares (1, R) of pressures (K, R)."""
    total: NDArray[np.float32] = np.sum(pressure.real**2 + pressure.imag**2, axis=0)
    return total[np.newaxis]
