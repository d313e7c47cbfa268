"""The laws against what the theory of the parametric array says of them.

In the far field the air gives back the second time derivative of the squared envelope (Berktay,
J. Sound Vib. 2 (1965) 435); everything here follows from that and from the envelopes themselves:
1 + m x with both sidebands and the carrier (Yoneyama et al., J. Acoust. Soc. Am. 73 (1983) 1532),
its square root (Kamakura et al., on the self-demodulation of AM ultrasound, 1984, from memory), one
sideband with the carrier (Aoki et al., 1991, from memory). Tables were worked out by algebra and
by spectral differentiation. "Pointwise" is the product's law in double precision, sample by
sample; "rendered" is a feed that has been through every filter, taken apart again.
"""

from __future__ import annotations

import functools

import numpy as np
import pytest
from support.demodulating import RATE, audible, distortion, lines_of, render

from beamctl.acoustics.elements import resonance
from beamctl.signal.laws import LAW_NAMES, envelope

TONE_HZ = 1_000.0
WHOLE = 19_200  # samples of whole periods of every tone and carrier here
POINTS = 8_192  # of one period, pointwise: a root's lines have died out long before


def db(ratio: float) -> float:
    return float(20.0 * np.log10(abs(ratio)))


def pointwise(law: str, depth: float, programme: np.ndarray) -> np.ndarray:
    """Envelope re its rest of one period of an analytic programme, (n,) complex."""
    found = [envelope(LAW_NAMES.index(law), depth, x.real, x.imag) for x in programme]
    return 2.0 * np.array([a + 1j * b for a, b in found])


def tone(points: int, harmonics: dict[int, float]) -> np.ndarray:
    """One period of an analytic sum of harmonics, by number and amplitude."""
    turns = 2j * np.pi * np.arange(points) / points
    return np.sum([a * np.exp(h * turns) for h, a in harmonics.items()], axis=0)


def pointwise_lines(
    law: str, depth: float, harmonics: dict[int, float], reach: int = 400
) -> np.ndarray:
    """Lines -reach … reach of the envelope, the carrier at rest being 1."""
    spectrum = np.fft.fft(pointwise(law, depth, tone(POINTS, harmonics))) / POINTS
    return spectrum[np.arange(-reach, reach + 1)]


@functools.cache
def rendered_lines(law: str, depth: float, tone_hz: float = TONE_HZ, q: float = 0.01) -> np.ndarray:
    """Lines of a rendered unit tone."""
    return lines_of(rendered_tone(law, depth, tone_hz, q), tone_hz)


def rendered_tone(law: str, depth: float, tone_hz: float, q: float = 0.01) -> np.ndarray:
    period = tone(WHOLE // 2, {round(tone_hz * WHOLE / RATE): 1.0})
    return render(as_programme(period), law, depth, WHOLE, q)


def as_programme(analytic: np.ndarray) -> np.ndarray:
    return np.stack((analytic.real, analytic.imag), axis=1).astype(np.float32)


def line(lines: np.ndarray, h: int) -> complex:
    return complex(lines[len(lines) // 2 + h])


# -- one tone ---------------------------------------------------------------------------------


@pytest.mark.parametrize("depth", [0.3, 0.5, 0.7, 0.8])
def test_the_second_harmonic_of_two_sidebands_is_the_depth(depth):
    """Squared, 1 + m cos is 2 m cos + m²/2 cos 2: four times over for the octave, m in all."""
    tones = audible(rendered_lines("dsb", depth))
    percent = 100.0 * tones[2] / tones[1]
    print(f"depth {depth}: second harmonic {percent:.3f} %, all {100 * distortion(tones):.3f} %")
    assert percent == pytest.approx(100.0 * depth, abs=0.5)
    assert 100.0 * distortion(tones) == pytest.approx(100.0 * depth, abs=0.5)


@pytest.mark.parametrize("law", ["root", "ssb"])
def test_a_root_and_a_single_sideband_are_clean(law):
    """The root squares to 1 + m x; one sideband to 1 + m² + 2 m cos, for one tone only."""
    thd = distortion(audible(rendered_lines(law, 0.7)))
    print(f"{law}: THD {100 * thd:.5f} %")
    assert thd <= 0.001


@pytest.mark.parametrize("depth", [0.3, 0.5, 0.7])
def test_a_quadrature_pair_leaves_the_fourth_power(depth):
    """((1 + mx)² + (1 - m²x²/2)²)/2 = 1 + mx + m⁴x⁴/8: harmonics 2 and 4, m³/4 each."""
    tones = audible(rendered_lines("mam", depth))
    for h in (2, 4):
        assert tones[h] / tones[1] == pytest.approx(depth**3 / 4.0, abs=5e-4)
    assert distortion(tones) == pytest.approx(np.sqrt(2.0) * depth**3 / 4.0, abs=1e-3)


@pytest.mark.parametrize(("law", "part"), [("dsb", 2.0), ("ssb", 2.0), ("root", 1.0), ("mam", 1.0)])
def test_the_fundamental_of_each_law(law, part):
    """2 m for both sidebands and for one; m, 6.02 dB less, for the root and the pair."""
    at_rest = 0.5 * 0.5  # rest envelope times the gain of `render`
    tones = audible(rendered_lines(law, 0.7)) / at_rest**2
    assert db(tones[1] / (part * 0.7)) == pytest.approx(0.0, abs=0.02)


def test_without_its_carrier_a_tone_comes_back_an_octave_up():
    """|m cos|² = m²/2 (1 + cos 2): nothing at the tone, 2 m² at twice it."""
    lines = rendered_lines("dsb", 0.7).copy() / 0.25
    lines[len(lines) // 2] = 0.0
    tones = audible(lines)
    assert tones[2] == pytest.approx(2.0 * 0.7**2, rel=2e-3)
    others = np.delete(tones, 2)
    assert others.max() < 1e-3 * tones[2]


def test_a_decibel_more_is_two_decibels_more():
    """The audible sound goes with the square of the ultrasound."""
    programme = as_programme(tone(96, {1: 1.0}))
    feeds = [render(programme, "dsb", 0.7, WHOLE, power=p) for p in (0.1, 0.1 * 10.0**0.1)]
    before, after = (audible(lines_of(feed, TONE_HZ))[1] for feed in feeds)
    assert db(after / before) == pytest.approx(2.0, abs=1e-3)


def test_twelve_decibels_an_octave():
    """Two derivatives, at one depth: 12.0412 dB."""
    levels = [db(audible(rendered_lines("dsb", 0.7, f))[1] * f**2) for f in (500.0, 1e3, 2e3, 4e3)]
    assert np.diff(levels) == pytest.approx([12.0412] * 3, abs=0.01)


# -- sidebands --------------------------------------------------------------------------------

# Each line re the carrier's line of the modulated signal, dB, at depths 1, 0.9, 0.7 and 0.5:
# m/2 each for two sidebands, m for the one; for the root its Fourier series, which at m = 1 is
# exactly 1/(4 n² - 1) over a carrier of 2 √2 / π.
DEPTHS = (1.0, 0.9, 0.7, 0.5)
SIDEBANDS = {
    ("dsb", 1): (-6.021, -6.936, -9.119, -12.041),
    ("ssb", 1): (0.0, -0.915, -3.098, -6.021),
    ("root", 1): (-9.542, -11.376, -14.345, -17.694),
    ("root", 2): (-23.522, -27.978, -34.359, -41.254),
    ("root", 3): (-30.881, -38.327, -48.258, -58.754),
    ("root", 4): (-35.987, -46.638, -60.180, -74.300),
}
ROWS = [
    (*key, m, level) for key, row in SIDEBANDS.items() for m, level in zip(DEPTHS, row, strict=True)
]


@pytest.mark.parametrize(("law", "n", "depth", "level_db"), ROWS)
def test_sidebands(law, n, depth, level_db):
    """Pointwise to the table's last digit; rendered, where the air would see it, to 0.05 dB."""
    for lines, within_db in (
        (pointwise_lines(law, depth, {1: 1.0}), 0.002),
        (rendered_lines(law, depth), 0.05),
    ):
        carrier = line(lines, 0)
        assert db(line(lines, n) / carrier) == pytest.approx(level_db, abs=within_db)
        if law == "ssb":
            assert abs(line(lines, -n) / carrier) < 1e-4
        else:
            assert db(line(lines, -n) / carrier) == pytest.approx(level_db, abs=within_db)


def test_the_series_of_a_full_root_is_exact():
    carrier = line(pointwise_lines("root", 1.0, {1: 1.0}), 0)
    assert abs(carrier) == pytest.approx(2.0 * np.sqrt(2.0) / np.pi, abs=1e-6)
    for n in range(1, 12):
        found = line(pointwise_lines("root", 1.0, {1: 1.0}), n)
        assert abs(found / carrier) == pytest.approx(1.0 / (4.0 * n**2 - 1.0), abs=1e-6)


# Total harmonic distortion, percent, of a root at depth 0.7 of which K sidebands pass each side.
PASSED = {1: 38.35, 2: 17.71, 3: 7.98, 4: 3.55, 6: 0.68, 8: 0.13}


@pytest.mark.parametrize("passed", PASSED)
def test_a_root_needs_its_band(passed):
    lines = pointwise_lines("root", 0.7, {1: 1.0}, passed)
    assert 100.0 * distortion(audible(lines)) == pytest.approx(PASSED[passed], abs=0.006)


@pytest.mark.parametrize(
    "tone_hz, passed", [(3_900.0, 4), (5_200.0, 3), (7_800.0, 2), (15_600.0, 1)]
)
def test_a_rendered_root_has_the_distortion_of_its_band(tone_hz, passed):
    """±16 kHz pass, so a high tone keeps few sidebands, and exactly those."""
    lines = rendered_lines("root", 0.7, tone_hz)
    thd = 100.0 * distortion(audible(lines))
    print(f"{tone_hz:g} Hz: THD {thd:.3f} %, {passed} sidebands alone {PASSED[passed]} %")
    assert thd == pytest.approx(PASSED[passed], abs=0.1)


def test_a_tone_stands_either_side_of_its_carrier():
    """3 kHz on 100 kHz leaves 97 and 103 kHz beside it (common practice), pointwise.

    A panel's carrier goes up to 80 kHz: rendered, 3 kHz on 40 kHz leaves 37 and 43.
    """
    rate_hz, count = 400_000, 4_000
    t = np.arange(count) / rate_hz
    e = pointwise("dsb", 0.8, np.exp(2j * np.pi * 3e3 * t))
    drawn = np.real(e * np.exp(2j * np.pi * 100e3 * t))
    assert spectrum_peaks(drawn, rate_hz) == [97e3, 100e3, 103e3]
    assert spectrum_peaks(rendered_tone("dsb", 0.8, 3e3), RATE) == [37e3, 40e3, 43e3]


def spectrum_peaks(signal: np.ndarray, rate_hz: float) -> list[float]:
    """Frequencies of everything above -70 dB re the strongest."""
    size = np.abs(np.fft.rfft(signal))
    return (np.flatnonzero(size > size.max() * 10**-3.5) * rate_hz / len(signal)).tolist()


# -- two tones --------------------------------------------------------------------------------

# 1000 and 1500 Hz, m = 0.5 each: lines re 1000 Hz, dB, by harmonic of 500 Hz. Single sideband is
# clean for one tone only; the root, with all its band, for any.
TWO_TONES = {
    "dsb": {1: -24.082, 3: 7.044, 4: -6.021, 5: 3.876, 6: 1.023},
    "ssb": {1: -18.062, 3: 7.044},
    "root": {3: 7.044},
}


@pytest.mark.parametrize("law", TWO_TONES)
def test_two_tones_pointwise(law):
    """Two tones meet a root's zero at full depth, where its lines never end: a hair less."""
    depth = 1.0 if law != "root" else 0.999
    lines = pointwise_lines(law, depth, {2: 0.5, 3: 0.5}, POINTS // 2 - 1)
    check_lines(audible(lines), TWO_TONES[law], 0.001, -60.0)


@pytest.mark.parametrize(("law", "depth"), [("dsb", 1.0), ("ssb", 1.0), ("root", 0.7)])
def test_two_tones_rendered(law, depth):
    """As above; the root at 0.35 each, where ±16 kHz hold what it needs."""
    programme = as_programme(tone(192, {2: 0.5, 3: 0.5}))
    tones = audible(lines_of(render(programme, law, depth, WHOLE), 500.0))
    check_lines(tones, TWO_TONES[law], 0.05, -60.0)


def check_lines(tones, wanted, within_db, nothing_db):
    """Lines re the second; those not named are nothing, up to 10 kHz."""
    for h in (1, *range(3, 21)):
        level = db(tones[h] / tones[2] + 1e-30)
        if h in wanted:
            assert level == pytest.approx(wanted[h], abs=within_db)
        else:
            assert level < nothing_db, h


# -- peaks and power --------------------------------------------------------------------------


@pytest.mark.parametrize("depth", [0.5, 0.7, 1.0])
@pytest.mark.parametrize("law", ["dsb", "ssb", "root"])
def test_peak_and_mean_square_of_the_envelope(law, depth):
    """Peaks 1 + m, 1 + m, √(1 + m); powers 1 + m²/2 (+1.761 dB at m = 1), 1 + m², exactly 1."""
    peak = {"dsb": 1.0 + depth, "ssb": 1.0 + depth, "root": np.sqrt(1.0 + depth)}[law]
    power = {"dsb": 1.0 + depth**2 / 2.0, "ssb": 1.0 + depth**2, "root": 1.0}[law]
    e = pointwise(law, depth, tone(POINTS, {1: 1.0}))
    assert np.abs(e).max() == pytest.approx(peak, rel=1e-12)
    assert np.mean(np.abs(e) ** 2) == pytest.approx(power, rel=1e-12)
    lines = rendered_lines(law, depth) / 0.25
    turns = np.exp(2j * np.pi * np.outer(np.arange(720) / 720, np.arange(len(lines))))
    assert np.abs(turns @ lines).max() == pytest.approx(peak, rel=2e-3)
    assert np.sum(np.abs(lines) ** 2) == pytest.approx(power, rel=2e-3)


def test_mean_square_in_decibels():
    for depth, level_db in ((1.0, 1.761), (0.5, 0.512)):
        e = pointwise("dsb", depth, tone(POINTS, {1: 1.0}))
        assert 10.0 * np.log10(np.mean(np.abs(e) ** 2)) == pytest.approx(level_db, abs=5e-4)


# -- behind a real cell -----------------------------------------------------------------------


def behind_a_cell(law: str, tone_hz: float, q_known: float) -> np.ndarray:
    """Audible tones after a cell of Q = 20 at 40 kHz, its feed equalised for a Q of `q_known`."""
    lines = rendered_lines(law, 0.7, tone_hz, q_known)
    offsets = np.arange(len(lines)) - len(lines) // 2
    return audible(lines * resonance(40e3 + tone_hz * offsets, 40e3, 20.0))


@pytest.mark.parametrize(
    ("tone_hz", "most", "least"), [(500.0, 0.05, 6.0), (1_000.0, 1.0, 12.0), (2_000.0, 6.0, 16.0)]
)
def test_the_equaliser_gives_the_root_its_sidebands_back(tone_hz, most, least):
    """A cell that lags and sags its sidebands spoils what should square to 1 + m x.

    The equaliser lifts by 12 dB at most, which a cell of Q = 20 asks for 3.9 kHz off its resonance:
    the higher the tone, the fewer of the root's sidebands come back whole. Percent, at depth 0.7.
    """
    with_it = 100.0 * distortion(behind_a_cell("root", tone_hz, 20.0))
    without = 100.0 * distortion(behind_a_cell("root", tone_hz, 0.01))
    said = f"root, {tone_hz:g} Hz: THD {with_it:.3f} % equalised, {without:.2f} % not"
    print(said)
    assert with_it <= most, said
    assert without >= least, said


@pytest.mark.parametrize("tone_hz", [500.0, 1_000.0, 2_000.0])
def test_the_equaliser_gives_the_single_sideband_its_level_back(tone_hz):
    """One tone's sideband is clean through any cell: what it loses, and gets back, is level."""
    with_it = behind_a_cell("ssb", tone_hz, 20.0)
    without = behind_a_cell("ssb", tone_hz, 0.01)
    gains = [db(tones[1] / (2.0 * 0.7 * 0.25**2)) for tones in (with_it, without)]
    thd = [100.0 * distortion(tones) for tones in (with_it, without)]
    said = f"ssb, {tone_hz:g} Hz: {gains} dB, THD {thd} %, equalised and not"
    print(said)
    assert abs(gains[0]) < 0.05 and gains[1] < -0.9, said
    assert max(thd) <= 0.1, said
