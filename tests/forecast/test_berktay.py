"""The ideal far field of every law, against algebra on Berktay's law.

Berktay, J. Sound Vib. 2 (1965) 435: the audible pressure goes with the second time derivative of
the squared envelope. Squared, and with m the depth: two sidebands are 1 + 2 m cos + m² cos²
(Yoneyama et al., J. Acoust. Soc. Am. 73 (1983) 1532), the root is 1 + m cos, one sideband is
1 + m² + 2 m cos, the quadrature pair is 1 + m cos + m⁴ cos⁴ / 8.
"""

from __future__ import annotations

import numpy as np
import pytest

from beamctl.forecast.berktay import heard

DEPTHS = (0.1, 0.3, 0.5, 0.7, 0.8, 1.0)


def db(ratio: float, per_decade: float = 20.0) -> float:
    return per_decade * float(np.log10(ratio))


@pytest.mark.parametrize("depth", DEPTHS)
def test_the_distortion_of_two_sidebands_is_the_depth(depth: float) -> None:
    assert heard("dsb", depth).distortion == pytest.approx(depth, abs=1e-9)


@pytest.mark.parametrize("depth", DEPTHS)
@pytest.mark.parametrize("law", ["root", "ssb"])
def test_a_root_and_one_sideband_are_clean(law, depth: float) -> None:
    assert heard(law, depth).distortion < 1e-9


@pytest.mark.parametrize("depth", DEPTHS)
def test_a_quadrature_pair_leaves_two_harmonics_of_a_quarter_of_the_cube(depth: float) -> None:
    assert heard("mam", depth).distortion == pytest.approx(np.sqrt(2.0) * depth**3 / 4, abs=1e-9)


@pytest.mark.parametrize("depth", DEPTHS)
@pytest.mark.parametrize(("law", "part"), [("dsb", 2.0), ("ssb", 2.0), ("root", 1.0), ("mam", 1.0)])
def test_the_tone_itself(law, part: float, depth: float) -> None:
    """2 m cos for both sidebands and for one, m cos for the others: 6.02 dB less."""
    assert heard(law, depth).programme_db == pytest.approx(db(part * depth / 2.0), abs=1e-9)


@pytest.mark.parametrize(
    ("law", "depth", "rise_db"),
    [
        ("dsb", 1.0, 1.761),  # 1 + m²/2
        ("dsb", 0.5, 0.512),
        ("ssb", 1.0, 3.010),  # 1 + m²
        ("ssb", 0.5, 0.969),
        ("root", 0.8, 0.0),  # exactly 1
        ("mam", 0.8, db(1.0 + 3.0 * 0.8**4 / 64.0, 10.0)),  # the mean of cos⁴ is 3/8
    ],
)
def test_what_a_seat_gets_more_than_the_resting_carrier(law, depth: float, rise_db: float) -> None:
    assert heard(law, depth).carrier_rise_db == pytest.approx(rise_db, abs=5e-4)


def test_at_depth_0_nothing_is_heard() -> None:
    for law in ("dsb", "root", "ssb", "mam"):
        silent = heard(law, 0.0)
        assert (silent.distortion, silent.programme_db) == (0.0, -np.inf)
        assert silent.carrier_rise_db == pytest.approx(0.0, abs=1e-9)
