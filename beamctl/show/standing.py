"""What the guard holds a show to: the cap of every band, and who signed for it.

Unsigned, or edited since it was signed, nothing is looser than the tables for the public and for
workers as they are, with the full margin and the shortest averaging. A signature may choose another
table, average longer, and take the margin off a measured rig; nothing passes 115 dB.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from beamctl.acoustics.exposure import BANDS, TABLES
from beamctl.show.limits import Guard
from beamctl.show.rig import Rig

HARD_DB = 115.0
PLAIN_TABLES = {"seats": "irpa-1984-public", "crew": "irpa-1984-workers"}
PLAIN_MARGIN_DB = 10.0
PLAIN_AVERAGING_S = 1.0
GUARDED = BANDS[1:-1]  # 12.5 to 80 kHz


@dataclass(frozen=True, slots=True)
class Caps:
    """What holds now; levels in dB re 20 µPa by a band's nominal frequency, every band of GUARDED."""

    seats_db: Mapping[float, float]
    crew_db: Mapping[float, float]
    averaging_s: float
    dose_window_s: float
    margin_db: Mapping[str, float]  # by panel: how much louder it counts than the model says
    tables: Mapping[str, tuple[str, ...]]  # class → the tables that hold, by name
    signed_by: str  # "" when unsigned
    signed_on: str
    unsigned: str  # why it counts as unsigned, "" when signed


def standing(guard: Guard, rig: Rig, seal: str) -> Caps:
    """The caps of a show whose guard, rig and house have the digest `seal`."""
    unsigned = _unsigned(guard, seal)
    named = {"seats": guard.seats_table, "crew": guard.crew_table}
    tables = {
        who: (named[who],) if not unsigned else tuple({PLAIN_TABLES[who]: 0, named[who]: 0})
        for who in named
    }
    averaging_s, margin_db = guard.averaging_s, guard.uncalibrated_margin_db
    if unsigned:
        averaging_s = min(averaging_s, PLAIN_AVERAGING_S)
    margins = {
        name: 0.0 if panel.measured and not unsigned else max(margin_db, PLAIN_MARGIN_DB)
        for name, panel in rig.panel.items()
    }
    signed = guard.signed
    return Caps(
        seats_db=_caps(tables["seats"], guard.seats_db),
        crew_db=_caps(tables["crew"], guard.crew_db),
        averaging_s=averaging_s,
        dose_window_s=guard.dose_window_s,
        margin_db=margins,
        tables=tables,
        signed_by=signed.by if signed and not unsigned else "",
        signed_on=signed.on if signed and not unsigned else "",
        unsigned=unsigned,
    )


def _unsigned(guard: Guard, seal: str) -> str:
    if guard.signed is None:
        return "never signed"
    if guard.signed.digest != seal:
        return "guard, rig or house edited since it was signed"
    return ""


def _caps(tables: tuple[str, ...], figure_db: float) -> dict[float, float]:
    """Per band the least of the tables, the figure and the hard ceiling."""
    found = {}
    for band in GUARDED:
        limits = [TABLES[name].limits_db.get(band.nominal_hz, HARD_DB) for name in tables]
        found[band.nominal_hz] = min(*limits, figure_db, HARD_DB)
    return found
