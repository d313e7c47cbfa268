"""A panel in words."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from desk.conftest import NIGHT_TRAM

from beamctl.desk.rows.rig import panel_rows, panel_words

SHOW = NIGHT_TRAM


def test_feeds_loom_and_what_it_steers() -> None:
    assert panel_words(SHOW, "prow")[:3] == [
        "feeds 1 to 64, one to each cell",
        "not measured; counts 10 dB louder",
        "steers azimuth and elevation, of use to 25 deg: beyond, a second beam is louder",
    ]
    lantern = panel_words(SHOW, "lantern")
    assert lantern[0] == "feeds 65 to 80, one to each column, from the left"
    assert lantern[2].startswith("steers azimuth, of use to 25 deg")


def test_the_beam_is_as_wide_as_a_uniform_aperture_throws_it() -> None:
    """0.886 wavelengths over the aperture, in radians: 79 mm of an 8 by 8 panel at 16 °C."""
    (said,) = [words for words in panel_words(SHOW, "prow") if words.startswith("beam")]
    wide = np.rad2deg(0.886 * 340.8 / 40_000.0 / 0.079)
    assert abs(float(said.split()[1]) - wide) < 0.1


def test_a_measured_panel_names_its_file() -> None:
    prow = SHOW.rig.panel["prow"].model_copy(update={"measured": "prow.csv"})
    rig = SHOW.rig.model_copy(update={"panel": {**SHOW.rig.panel, "prow": prow}})
    assert panel_words(replace(SHOW, rig=rig), "prow")[1].startswith("measured: prow.csv")


def test_a_panel_of_dead_cells_says_so() -> None:
    cells = SHOW.cells["prow"]
    dead = cells._replace(dead=np.ones_like(cells.dead))
    show = replace(SHOW, cells={**SHOW.cells, "prow": dead})
    assert panel_words(show, "prow")[-1] == "every cell is dead"
    assert panel_rows(show, "prow", 40, 12)


def test_words_come_before_cells_and_nothing_is_more_than_the_room() -> None:
    for height in (0, 1, 5, 30):
        rows = panel_rows(SHOW, "prow", 50, height)
        assert len(rows) <= height
