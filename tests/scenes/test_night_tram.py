"""The shipped show: reads clean, uses what it should teach, and stays under its own caps."""

from __future__ import annotations

import numpy as np
import pytest
from support.exposure import Seat, levels_of_show, listening_points

from beamctl.acoustics.exposure import TABLES, cap_db
from beamctl.files.reader import read_show
from beamctl.show.show import Show


@pytest.fixture(scope="module")
def show() -> Show:
    from pathlib import Path

    found, problems = read_show(Path(__file__).parents[2] / "scenes" / "night-tram")
    assert [p.severity for p in problems] == ["warning"]
    assert "unsigned" in problems[0].what
    assert found is not None
    return found


def test_uses_what_it_should_teach(show: Show) -> None:
    """Two panels, 24 seats and a spot, every law, a travel, a bounce, two beams, a follow-on."""
    acts = [act for cue in show.sheet.cue for act in cue.act]
    assert len(show.sheet.cue) >= 8
    assert len(show.rig.panel) == 2
    seats = [b for b in show.house.block.values() if b.class_ == "seats"]
    assert sum(len(b.seat_points()) for b in seats) == 24
    assert "conductor" in show.house.spot
    assert {act.law for act in acts} >= {"dsb", "root", "ssb", "mam"}
    assert any(act.via == "back_wall" for act in acts)
    assert any(act.aims and act.sound is None and act.over_s > 1.0 for act in acts)
    assert any(cue.then is not None for cue in show.sheet.cue)
    assert any(len({act.beam for act in cue.act}) > 1 for cue in show.sheet.cue)


def test_no_cue_is_over_its_own_cap(show: Show) -> None:
    """Carrier level at every seat and crew point, along every travel, margin included.

    Coherent sum over each panel's cells, direct and by one reflection off each surface, magnitudes
    added over beams and reflections; mean square of the modulated envelope at full programme.
    """
    points = listening_points(show)
    guard = show.guard
    caps = {}
    for kind, table, figure in (
        ("seats", guard.seats_table, guard.seats_db),
        ("crew", guard.crew_table, guard.crew_db),
    ):
        published = cap_db(TABLES[table], 40_000.0)
        assert published is not None
        caps[kind] = min(published, figure)
    worst: tuple[float, str, Seat] | None = None
    for ref, levels_db in levels_of_show(show, points):
        for point, level_db in zip(points, levels_db + guard.uncalibrated_margin_db, strict=True):
            over = level_db - caps[point.kind]
            if worst is None or over > worst[0]:
                worst = (float(over), ref, point)
    assert worst is not None
    assert np.isfinite(worst[0])
    assert -12.0 < worst[0] <= 0.0, worst  # the show is loud enough to be about something
