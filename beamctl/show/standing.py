"""What the guard holds a show to: the cap of every band, and who signed for it.

Unsigned, or edited since it was signed, nothing is looser than the tables for the public and for
workers as they are, with the full margin and the shortest averaging. A signature may choose another
table, average longer, and take the margin off a measured rig. Where the table it chose is silent,
the plain one goes on holding, and nothing passes 115 dB.
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
    """What holds now; levels in dB re 20 µPa by nominal band, every band of GUARDED."""

    seats_db: Mapping[float, float]
    crew_db: Mapping[float, float]
    averaging_s: float
    dose_window_s: float
    margin_db: Mapping[str, float]  # by panel: how much louder it counts than the model says
    tables: Mapping[str, tuple[str, ...]]  # class → the tables that hold somewhere, by name
    signed_by: str  # "" when unsigned
    signed_on: str
    unsigned: str  # why it counts as unsigned, "" when signed


def standing(guard: Guard, rig: Rig, seal: str) -> Caps:
    """The caps of a show whose guard, rig and house have the digest `seal`."""
    unsigned = why_unsigned(guard, seal)
    held = {
        "seats": _tables_by_band(guard.seats_table, PLAIN_TABLES["seats"], bool(unsigned)),
        "crew": _tables_by_band(guard.crew_table, PLAIN_TABLES["crew"], bool(unsigned)),
    }
    averaging_s = guard.averaging_s
    if unsigned:
        averaging_s = min(averaging_s, PLAIN_AVERAGING_S)
    full_db = max(guard.uncalibrated_margin_db, PLAIN_MARGIN_DB)
    signed = None if unsigned else guard.signed
    return Caps(
        seats_db=_caps(held["seats"], guard.seats_db),
        crew_db=_caps(held["crew"], guard.crew_db),
        averaging_s=averaging_s,
        dose_window_s=guard.dose_window_s,
        margin_db={n: 0.0 if signed and p.measured else full_db for n, p in rig.panel.items()},
        tables={who: tuple(dict.fromkeys(sum(by.values(), ()))) for who, by in held.items()},
        signed_by=signed.by if signed else "",
        signed_on=signed.on if signed else "",
        unsigned=unsigned,
    )


def why_unsigned(guard: Guard, seal: str) -> str:
    """Why a guard counts as unsigned for files with the digest `seal`; "" when it is signed."""
    signed = guard.signed
    if signed is None:
        return "never signed"
    if signed.digest != seal:
        return f"guard, rig or house edited since {signed.by} signed it on {signed.on}"
    return ""


def _tables_by_band(named: str, plain: str, unsigned: bool) -> dict[float, tuple[str, ...]]:
    """The tables that hold in each band: unsigned all that speak there, signed the first."""
    found = {}
    for band in GUARDED:
        names = dict.fromkeys((named, plain))
        speaking = tuple(n for n in names if band.nominal_hz in TABLES[n].limits_db)
        found[band.nominal_hz] = speaking if unsigned else speaking[:1]
    return found


def _caps(tables: Mapping[float, tuple[str, ...]], figure_db: float) -> dict[float, float]:
    """Per band the least of the tables that hold there, the figure and the hard ceiling."""
    return {
        hz: min(figure_db, HARD_DB, *(TABLES[name].limits_db[hz] for name in names))
        for hz, names in tables.items()
    }
