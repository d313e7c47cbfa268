"""How wide the envelope of a carrier may be."""

from __future__ import annotations

from typing import NamedTuple

LOWEST_HZ = 22_400.0
"""Lower edge of the 25 kHz third-octave band (IEC 61260-1, base 10, nominal): nothing is sent
below it, so that no skirt of an envelope reaches the bands the ear hears in."""

WIDEST_STOP_HZ = 17_600.0
NARROWEST_STOP_HZ = 1_000.0


class EnvelopeBand(NamedTuple):
    """Offsets from the carrier: passed up to ±pass_hz, stopped from ±stop_hz."""

    pass_hz: float
    stop_hz: float


def envelope_band(carrier_hz: float, rate_hz: float) -> EnvelopeBand:
    """The band of an envelope on this carrier: ±16 kHz at 40 kHz and 192 kHz.

    The lower skirt stays above `LOWEST_HZ`, the upper one below 0.47 of the sample rate, and the
    pass edge within a twelfth of it: that is what survives a quarter of the rate with room for the
    interpolator's skirt. The stop edge lies a tenth above the pass edge, which costs a filter of
    some 300 taps. ValueError when less than ±1 kHz is left.
    """
    stop_hz = min(
        WIDEST_STOP_HZ,
        carrier_hz - LOWEST_HZ,
        0.47 * rate_hz - carrier_hz,
        1.1 * rate_hz / 12.0,
    )
    if stop_hz < NARROWEST_STOP_HZ:
        raise ValueError(
            f"a carrier of {carrier_hz:g} Hz at a rate of {rate_hz:g} Hz "
            f"leaves no band for an envelope"
        )
    return EnvelopeBand(10.0 * stop_hz / 11.0, stop_hz)
