"""The caps that hold now."""

from __future__ import annotations

from dataclasses import replace

from desk.conftest import NIGHT_TRAM

from beamctl.desk.rows.caps import cap_rows
from beamctl.show.limits import Signed


def lines_of(show, width: int = 60, height: int = 40) -> list[str]:
    return ["".join(span.text for span in row) for row in cap_rows(show, width, height)]


def test_every_band_has_the_least_of_table_and_figure() -> None:
    lines = lines_of(NIGHT_TRAM)
    assert "UNSIGNED: never signed" in lines[0]
    assert "       20        70        75" in lines  # IRPA 1984: public, workers
    assert "       40       100       110" in lines
    guard = NIGHT_TRAM.guard.model_copy(update={"seats_db": 90.0})
    assert "       40        90       110" in lines_of(replace(NIGHT_TRAM, guard=guard))


def test_who_signed_is_told_and_how_to_sign_again() -> None:
    signed = Signed(by="the depot", on="2026-12-01", digest="abc")
    guard = NIGHT_TRAM.guard.model_copy(update={"signed": signed})
    lines = lines_of(replace(NIGHT_TRAM, guard=guard, seal="abc"))
    assert lines[0] == "signed by the depot on 2026-12-01"
    assert "beamctl sign" in " ".join(lines)
    assert "edited since the depot signed" in lines_of(replace(NIGHT_TRAM, guard=guard))[0]


def test_small_rooms_are_kept_to() -> None:
    for width, height in ((10, 3), (40, 1), (80, 0)):
        lines = lines_of(NIGHT_TRAM, width, height)
        assert len(lines) <= height
