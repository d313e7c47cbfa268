"""What holds: caps, margins and averaging, signed and unsigned, for every guard there can be."""

from __future__ import annotations

from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic import ValidationError

from beamctl.acoustics.exposure import TABLES
from beamctl.show.limits import Guard
from beamctl.show.rig import Rig
from beamctl.show.standing import GUARDED, HARD_DB, Caps, standing

SEAL = "5ea1"
PLAIN = {"seats": "irpa-1984-public", "crew": "irpa-1984-workers"}
PANEL = {
    "at_m": [0.0, 0.0, 3.0], "volts_at_full_scale": 5.0, "max_volts": 7.0, "q": 20.0,
    "grid": {"columns": 2, "rows": 2, "pitch_mm": 10.0}, "level_db_30cm_10v": 115.0,
    "cell_mm": 9.0, "resonance_hz": 40e3,
}  # fmt: skip
RIG = Rig.model_validate(
    {"format": 1, "panel": {"plain": PANEL, "known": PANEL | {"measured": "known.toml"}}}
)


def guard(digest: str | None = None, **keys: Any) -> Guard:
    signed = {"by": "M. Rail", "on": "2031-02-03", "digest": digest}
    return Guard.model_validate({"format": 1, **keys} | ({"signed": signed} if digest else {}))


GUARDS = st.builds(
    guard,
    digest=st.sampled_from([None, SEAL, "edited"]),
    seats_table=st.sampled_from(sorted(TABLES)),
    crew_table=st.sampled_from(sorted(TABLES)),
    seats_db=st.floats(0.0, 115.0),
    crew_db=st.floats(0.0, 115.0),
    averaging_s=st.floats(0.01, 3600.0),
    uncalibrated_margin_db=st.floats(0.0, 40.0),
)


def caps_of(caps: Caps, kind: str) -> dict[float, float]:
    return dict(caps.seats_db if kind == "seats" else caps.crew_db)


@given(guard=GUARDS)
def test_no_guard_is_looser_than_it_may_be(guard: Guard) -> None:
    caps = standing(guard, RIG, SEAL)
    signed = guard.signed is not None and guard.signed.digest == SEAL
    assert (caps.unsigned == "") == signed
    for kind in ("seats", "crew"):
        figure_db = guard.seats_db if kind == "seats" else guard.crew_db
        named = TABLES[guard.seats_table if kind == "seats" else guard.crew_table].limits_db
        plain = TABLES[PLAIN[kind]].limits_db
        found = caps_of(caps, kind)
        assert list(found) == [band.nominal_hz for band in GUARDED]
        for hz, cap_db in found.items():
            bounds = [figure_db, HARD_DB]
            bounds += [named[hz]] if hz in named else []
            bounds += [plain[hz]] if hz in plain and not (signed and hz in named) else []
            assert cap_db == min(bounds)
    assert caps.averaging_s == (guard.averaging_s if signed else min(guard.averaging_s, 1.0))
    assert caps.margin_db["plain"] == max(guard.uncalibrated_margin_db, 10.0)
    assert caps.margin_db["known"] == (0.0 if signed else caps.margin_db["plain"])


@given(guard=GUARDS)
def test_an_edit_never_loosens(guard: Guard) -> None:
    """Whatever a signature allowed, the state that an edit leaves allows no more."""
    with_seal = standing(guard, RIG, guard.signed.digest if guard.signed else SEAL)
    edited = standing(guard, RIG, "another")
    for kind in ("seats", "crew"):
        after = caps_of(edited, kind)
        assert all(after[hz] <= cap for hz, cap in caps_of(with_seal, kind).items())
    assert edited.averaging_s <= with_seal.averaging_s
    assert all(edited.margin_db[n] >= margin for n, margin in with_seal.margin_db.items())
    assert edited.signed_by == edited.signed_on == ""


def test_guarded_bands_are_from_12_5_to_80_khz() -> None:
    assert [band.nominal_hz for band in GUARDED] == [
        12.5e3, 16e3, 20e3, 25e3, 31.5e3, 40e3, 50e3, 63e3, 80e3
    ]  # fmt: skip


def test_a_looser_cap_holds_only_once_it_is_signed() -> None:
    looser = {"seats_table": "acgih-ceiling", "seats_db": 115.0}
    for digest in (None, "edited"):
        caps = standing(guard(digest, **looser), RIG, SEAL)
        assert [caps.seats_db[hz] for hz in (20e3, 25e3, 40e3)] == [70.0, 100.0, 100.0]
        assert caps.tables["seats"] == ("acgih-ceiling", "irpa-1984-public")
    caps = standing(guard(SEAL, **looser), RIG, SEAL)
    assert [caps.seats_db[hz] for hz in (20e3, 25e3, 40e3)] == [105.0, 110.0, 115.0]
    assert caps.tables["seats"] == ("acgih-ceiling",)
    assert (caps.signed_by, caps.signed_on) == ("M. Rail", "2031-02-03")


def test_a_table_over_the_hard_ceiling_is_held_at_it() -> None:
    caps = standing(guard(SEAL, crew_table="poland-2018-max", crew_db=115.0), RIG, SEAL)
    assert TABLES["poland-2018-max"].limits_db[40e3] == 130.0
    assert caps.crew_db[40e3] == HARD_DB == 115.0


def test_where_the_signed_table_is_silent_the_plain_one_holds() -> None:
    caps = standing(guard(SEAL, seats_table="acgih-8h", seats_db=115.0), RIG, SEAL)
    assert caps.seats_db == {
        12.5e3: 89.0, 16e3: 92.0, 20e3: 94.0, **{b.nominal_hz: 100.0 for b in GUARDED[3:]}
    }  # fmt: skip
    assert caps.tables["seats"] == ("acgih-8h", "irpa-1984-public")


def test_why_it_is_unsigned_is_told() -> None:
    assert standing(guard(), RIG, SEAL).unsigned == "never signed"
    assert standing(guard("edited"), RIG, SEAL).unsigned == (
        "guard, rig or house edited since M. Rail signed it on 2031-02-03"
    )
    assert standing(guard(SEAL), RIG, "").unsigned != ""


@pytest.mark.parametrize("key", ["seats_db", "crew_db"])
@pytest.mark.parametrize("figure", [-1.0, 115.1, float("nan"), float("inf"), "100", True])
def test_a_figure_that_is_no_cap_is_rejected(key: str, figure: object) -> None:
    with pytest.raises(ValidationError, match=key):
        guard(**{key: figure})


@pytest.mark.parametrize("name", TABLES)
def test_every_table_may_be_named(name: str) -> None:
    assert guard(seats_table=name, crew_table=name).seats_table == name


@pytest.mark.parametrize(
    ("name", "said"),
    [("irpa-1984-publik", '"irpa-1984-public"'), ("none", "a table, one of irpa-1984-p")],
)
def test_a_table_that_is_none_is_rejected(name: str, said: str) -> None:
    with pytest.raises(ValidationError, match=said):
        guard(crew_table=name)
