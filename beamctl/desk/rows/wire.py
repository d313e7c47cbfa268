"""The network in words."""

from __future__ import annotations

from beamctl.desk.format import Row, Span, fit
from beamctl.snapshot import WireView


def wire_rows(wire: WireView, width: int) -> list[Row]:
    """What listens where."""
    if not wire.listen:
        words = f"nothing listens: the wire is {wire.state}. What is set here is kept with the show"
        return [fit((Span(words, "text"),), width)]
    return [fit((Span(f"listens at {wire.listen}", "text"), Span(f"  {wire.state}")), width)]
