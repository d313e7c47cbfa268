"""A cell's resonance."""

from __future__ import annotations

import numpy as np
import pytest

from beamctl.acoustics.elements import resonance


def test_response_is_one_at_resonance() -> None:
    assert resonance(40e3, 40e3, 20.0) == 1.0


@pytest.mark.parametrize(("offset_hz", "expected_db"), [(1e3, -5.9), (2e3, -11.0), (3e3, -14.2)])
def test_roll_off_of_a_data_sheet_cell(offset_hz: float, expected_db: float) -> None:
    """A 40 kHz cell of 2 kHz bandwidth at -6 dB (public data sheets), upper side."""
    q = np.sqrt(3.0) * 40e3 / 2e3  # |H| = 1/2 at the edges
    found = 20.0 * np.log10(abs(resonance(40e3 + offset_hz, 40e3, q)))
    assert float(found) == pytest.approx(expected_db, abs=0.06)


def test_half_power_bandwidth_is_the_resonance_over_q() -> None:
    """The definition of Q; the edges f lie at f0 (sqrt(1 + 1/4Q²) ± 1/2Q)."""
    f0, q = 40e3, 20.0
    edges = f0 * (np.sqrt(1.0 + 1.0 / (4.0 * q * q)) + np.array((-0.5, 0.5)) / q)
    np.testing.assert_allclose(np.abs(resonance(edges, f0, q)), np.sqrt(0.5), rtol=1e-12)
    np.testing.assert_allclose(np.rad2deg(np.angle(resonance(edges, f0, q))), (45.0, -45.0))
