"""One panel in words and as a map: feeds, loom, what it steers, how wide its beam is."""

from __future__ import annotations

import numpy as np

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.desk.format import BLANK, Row, Span, wrap
from beamctl.desk.rows.elements import element_rows
from beamctl.show.aims import throw_of
from beamctl.show.rig import PanelSpec
from beamctl.show.show import Show

_LOOMS = {
    "each": "one to each cell",
    "columns": "one to each column, from the left",
    "rows": "one to each row, from the top",
    "csv": "as its list of cells says",
}
_AXES = ("azimuth", "elevation")


def panel_rows(show: Show, name: str, width: int, height: int) -> list[Row]:
    """`height` rows at most: what the panel is, in words, then its cells."""
    words = [(Span(line),) for text in panel_words(show, name) for line in wrap(text, width, 3)]
    cells, first = show.cells[name], show.rig.panel[name].first_feed
    room = height - len(words)
    drawn = element_rows(cells, first, width, room)
    gap = [BLANK] * (len(drawn) < room)
    return [*words, *gap, *drawn][: max(height, 0)]


def panel_words(show: Show, name: str) -> list[str]:
    """Feeds and loom; measured or not; what it steers, how far, and how wide its beam is."""
    spec, cells = show.rig.panel[name], show.cells[name]
    last = spec.first_feed + cells.feeds - 1
    margin_db = show.caps.margin_db[name]
    measured = f"measured: {spec.measured}" if spec.measured else "not measured"
    counts = f"; counts {margin_db:g} dB louder" if margin_db else ""
    return [
        f"feeds {spec.first_feed} to {last}, {_LOOMS[spec.loom]}",
        measured + counts,
        *_throws(show, spec, name),
    ]


def _throws(show: Show, spec: PanelSpec, name: str) -> list[str]:
    """What the loom steers and how far that is of use; how wide the beam is at half power."""
    cells = show.cells[name]
    if cells.dead.all():
        return ["every cell is dead"]
    throw = throw_of(spec, cells, sound_speed_m_s(Air(**show.house.air.model_dump())))
    steers = [axis for axis, can in zip(_AXES, throw.steers, strict=True) if can]
    widest = f", of use to {_deg(throw.widest):.0f} deg: beyond, a second beam is louder"
    across, up = (2.0 * _deg(half) for half in throw.half_width)
    return [
        f"steers {' and '.join(steers)}{widest}" if steers else "steers nothing: aim it by hand",
        f"beam {across:.1f} deg wide, {up:.1f} high, at half power",
    ]


def _deg(sine: float) -> float:
    return float(np.rad2deg(np.arcsin(min(sine, 1.0))))
