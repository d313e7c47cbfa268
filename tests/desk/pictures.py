"""Any picture of the guard and of the seats, for property tests."""

from __future__ import annotations

from hypothesis import strategies as st

from beamctl.snapshot import GuardView, SeatLevel

NAMES = st.text(st.characters(codec="utf-8"), max_size=30)
LEVELS_DB = st.floats(-200.0, 200.0)
DOSES_PCT = st.floats(0.0, 1e6)
BANDS_HZ = st.sampled_from([0.0, 12.5e3, 20e3, 25e3, 31.5e3, 40e3, 80e3])
STATES = st.sampled_from(["CLEAR", "NEAR", "CAPPING", "TRIPPED", "BLIND"])


def guard_views() -> st.SearchStrategy[GuardView]:
    """Any state with any of the rest."""
    return st.builds(
        GuardView,
        state=STATES,
        reason=NAMES,
        headroom_db=st.none() | LEVELS_DB,
        seat=NAMES,
        band_hz=BANDS_HZ,
        level_db=st.none() | LEVELS_DB,
        cap_db=LEVELS_DB,
        held_db=st.dictionaries(NAMES, st.floats(0.1, 60.0), max_size=4),
        dose_pct=DOSES_PCT,
        dose_seat=NAMES,
        signed=NAMES | st.just("signed by the depot on 2026-12-01"),
        margin_db=st.floats(0.0, 40.0),
    )


def seat_levels() -> st.SearchStrategy[tuple[SeatLevel, ...]]:
    """Any seats anywhere, in any of a few blocks."""
    metres = st.floats(-100.0, 100.0)
    seat = st.builds(
        SeatLevel,
        name=NAMES,
        block=st.sampled_from(["stalls", "balcony", "crew"]),
        crew=st.booleans(),
        at_m=st.tuples(metres, metres, metres),
        level_db=st.none() | LEVELS_DB,
        band_hz=BANDS_HZ,
        cap_db=st.floats(70.0, 115.0),
        dose_pct=DOSES_PCT,
    )
    return st.lists(seat, max_size=40).map(tuple)
