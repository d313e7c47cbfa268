"""A panel of the rig as the field model wants it."""

from __future__ import annotations

from beamctl.acoustics.air import Air, absorption_db_m
from beamctl.acoustics.cells import CellMap
from beamctl.acoustics.transfer import Emitters, cell_strength_pa_m, panel_emitters
from beamctl.show.rig import PanelSpec
from beamctl.show.targets import frame_of

DATA_SHEET_M = 0.3  # where the level of a cell is stated


def emitters_of(panel: PanelSpec, cells: CellMap, air: Air) -> Emitters:
    """The panel's cells as sources in the room, for a feed at full scale.

    The stated level was measured through 0.3 m of air, so the source is that much stronger. Without
    a measurement of the rig the cells get no credit for their resonance: they count as flat.
    """
    through_air_db = DATA_SHEET_M * float(absorption_db_m(panel.carrier_hz, air))
    strength = cell_strength_pa_m(
        panel.level_db_30cm_10v + through_air_db, panel.volts_at_full_scale
    )
    q = panel.q if panel.measured else 0.0
    frame = frame_of(panel)
    return panel_emitters(cells, frame, strength, panel.cell_mm / 1000.0, panel.resonance_hz, q)
