"""Cross checks of a show's files, on models built by hand."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from scipy.special import j1

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.cells import CellMap, cell_map, grid_positions, hex_positions, loom
from beamctl.show.aims import check_aims
from beamctl.show.checks import Parts, check_names
from beamctl.show.house import House
from beamctl.show.limits import Guard
from beamctl.show.rig import Rig
from beamctl.show.sheet import Sheet

PANEL = {
    "at_m": [0.0, 0.0, 1.2], "volts_at_full_scale": 5.0, "max_volts": 7.0,
    "level_db_30cm_10v": 115.0, "cell_mm": 9.0, "resonance_hz": 40e3, "q": 20.0,
}  # fmt: skip
BLOCK = {
    "class": "seats", "first_m": [-1.0, 5.0, 1.2], "rows": ["A", "B"],
    "row_step_m": [0.0, 1.0, 0.0], "seats": 5, "seat_step_m": [0.5, 0.0, 0.0],
}  # fmt: skip
WALL = {
    "corner_m": [-5.0, 9.0, 0.0], "along_m": [10.0, 0.0, 0.0], "up_m": [0.0, 0.0, 4.0],
    "reflection": 0.9,
}  # fmt: skip


def cue(ref: str, *acts: dict[str, Any], **more: Any) -> dict[str, Any]:
    return {"ref": ref, "title": ref, "act": [{"beam": "b", **act} for act in acts], **more}


def parts(*cues: dict[str, Any], wiring: str = "each", **more: Any) -> Parts:
    """A show of one beam on one 8 x 8 panel at ear height before two rows of five seats."""
    panels = more.get("panels") or {"p": {}}
    rig = {"format": 1, "rate_hz": more.get("rate_hz", 192_000), "panel": {}}
    cells: dict[str, CellMap] = {}
    for name, changes in panels.items():
        grid = {"grid": {"columns": 8, "rows": 8, "pitch_mm": 10.0}}
        shape = {} if "hex" in changes else grid
        rig["panel"][name] = {**PANEL, **shape, "loom": wiring, **changes}
    made = Rig.model_validate(rig)
    for name, spec in made.panel.items():
        if spec.hex:
            at_m = hex_positions(spec.hex.rings, spec.hex.pitch_mm / 1e3)
        else:
            assert spec.grid
            at_m = grid_positions(spec.grid.columns, spec.grid.rows, spec.grid.pitch_mm / 1e3)
        assert spec.loom != "csv"
        cells[name] = cell_map(at_m, loom(at_m, spec.loom))
    house = {
        "format": 1, "block": more.get("blocks", {"s": BLOCK}),
        "spot": {"desk": {"at_m": [0, 6, 1]}}, "surface": {"wall": more.get("wall", WALL)},
    }  # fmt: skip
    beams = more.get("beams", {"b": {"panel": "p"}})
    sheet = {"format": 1, "title": "t", "beam": beams, "cue": list(cues)}
    return Parts(
        Sheet.model_validate(sheet), made, House.model_validate(house), None, cells,
        frozenset(more.get("cut", ())),
    )  # fmt: skip


def told(show: Parts) -> list[tuple[tuple[str | int, ...], str, str]]:
    found = [*check_names(show), *check_aims(show)]
    return [(finding.where, finding.severity, finding.what) for finding in found]


ACT = ("cue", 0, "act", 0)


@pytest.mark.parametrize(
    ("show", "where", "severity", "what"),
    [
        (parts(cue("1", {"beam": "c"}, {})), (*ACT, "beam"), "error", '"c", no such beam'),
        (parts(cue("1", {"seat": "B6"})), (*ACT, "seat"), "error", '"B6", no such seat; expected'),
        (parts(cue("1", {"seat": "B44"})), (*ACT, "seat"), "error", 'did you mean "B4"?'),
        (parts(cue("1", {"spot": "dusk"})), (*ACT, "spot"), "error", 'did you mean "desk"?'),
        (parts(cue("1", {"seat": "A1", "via": "well"})), (*ACT, "via"), "error",
         '"well", no such surface; did you mean "wall"?'),
        (parts(cue("1", {}), beams={"b": {"panel": "q"}}), ("beam", "b", "panel"), "error",
         '"q", no such panel; expected one of "p"'),
        (parts(cue("1", {}), cue("1", {})), ("cue", 1, "ref"), "error", "name of an earlier cue"),
        (parts(cue("2", {}), cue("1A", {})), ("cue", 1, "ref"), "warning",
         '"1A" stands after "2": out of order'),
        (parts(cue("1", {}, then="3", then_at_s=1.0), cue("2", {})), ("cue", 0, "then"), "error",
         '"3", no such cue'),
        (parts(cue("1", {}, then="2", then_at_s=1.0), cue("2", {}, then="3", then_at_s=1.0),
               cue("3", {}, then="2", then_at_s=1.0)),
         ("cue", 1, "then"), "error", "follow-ons in a circle: 2 → 3 → 2"),
        (parts(cue("1", {}, then="1", then_at_s=1.0)), ("cue", 0, "then"), "error", "1 → 1"),
        (parts(cue("1", {}), cue("2")), ("cue", 1), "warning", "no acts"),
        (parts(cue("1", {}), beams={"b": {"panel": "p"}, "c": {"panel": "p"}}), ("beam", "c"),
         "warning", "no act uses this beam"),
        (parts(cue("1", {}), blocks={"s": BLOCK, "t": {**BLOCK, "rows": ["B", "C"]}}),
         ("block", "t", "rows"), "error", 'seats named before in block "s": B1 to B5'),
        (parts(cue("1", {}), panels={"p": {}, "q": {"first_feed": 64}}),
         ("panel", "q", "first_feed"), "error", 'feeds 64 to 127 overlap panel "p", feeds 1 to 64'),
        (parts(cue("1", {}), rate_hz=88_200), ("panel", "p", "carrier_hz"), "error",
         "40000, expected 39454 or less at a rate of 88200 Hz"),
        (parts(cue("1", {}), rate_hz=96_000), ("panel", "p", "carrier_hz"), "warning",
         "leaves the programme 5120 Hz"),
        (parts(cue("1", {}), wall={**WALL, "up_m": [1.0, 0.0, 4.0]}), ("surface", "wall"), "error",
         "along_m and up_m must be at right angles"),
        (parts(cue("1", {}), wall={**WALL, "up_m": [0.0, 0.0, 0.0]}), ("surface", "wall"), "error",
         "along_m and up_m must both have a length"),
        (parts(cue("1", {"point_m": [0.0, -5.0, 1.2]})), (*ACT, "point_m"), "error",
         "azimuth 180°, elevation 0° from the panel: behind it or beyond 80°"),
        (parts(cue("1", {"point_m": [0.0, 0.0, 1.2]})), (*ACT, "point_m"), "error",
         "the target is the panel itself"),
        (parts(cue("1", {"seat": "A1", "via": "wall"}), wall={**WALL, "along_m": [2.0, 0.0, 0.0]}),
         (*ACT, "via"), "error", 'the path by "wall" misses its rectangle'),
        (parts(cue("1", {"point_m": [0.0, 9.5, 1.2], "via": "wall"})), (*ACT, "via"), "error",
         'the path by "wall" misses its rectangle'),
        (parts(cue("1", {"elevation_deg": 3.0}), wiring="columns"), (*ACT, "elevation_deg"),
         "error", "3, but the loom cannot steer in elevation: expected 0"),
        (parts(cue("1", {"azimuth_deg": 3.0}), wiring="rows"), (*ACT, "azimuth_deg"),
         "error", "3, but the loom cannot steer in azimuth: expected 0"),
        (parts(cue("1", {"point_m": [0.0, 5.0, 1.7]}), wiring="columns"), (*ACT, "point_m"),
         "error", "5.7° off the panel's axis in elevation, which its loom cannot steer; its beam"),
        (parts(cue("1", {"azimuth_deg": -26.0})), (*ACT, "azimuth_deg"), "warning",
         "26.0° of steering: beyond 25.5° a second beam is louder"),
    ],
)  # fmt: skip
def test_one_fault_gives_one_finding(
    show: Parts, where: tuple[str | int, ...], severity: str, what: str
) -> None:
    found = told(show)
    assert len(found) == 1
    assert found[0][:2] == (where, severity)
    assert what in found[0][2]


@pytest.mark.parametrize(
    "show",
    [
        parts(cue("1", {"seat": "A1"}, {"spot": "desk"}, {"seat": "B5", "via": "wall"})),
        parts(cue("1", {}, then="2", then_at_s=1.0), cue("1.5", {}), cue("2", {"at_s": 9.0})),
        parts(cue("1", {"azimuth_deg": 20.0, "elevation_deg": 0.0}), wiring="columns"),
        parts(cue("1", {"point_m": [0.0, 5.0, 1.4]}), wiring="columns"),
        parts(cue("1", {"azimuth_deg": 25.0})),
        parts(cue("1", {"azimuth_deg": 29.0}), panels={"p": {"hex": {"rings": 4, "pitch_mm": 10}}}),
    ],
)
def test_what_can_be_done_is_let_pass(show: Parts) -> None:
    assert told(show) == []


@pytest.mark.parametrize(
    "show",
    [
        parts(cue("1", {"seat": "B6"}), cut=[("house.toml", "block")]),
        parts(cue("1", {"spot": "x"}), cut=[("house.toml", "spot")]),
        parts(cue("1", {"seat": "B5", "via": "x"}), cut=[("house.toml", "surface")]),
        parts(cue("1", {}, {"beam": "c"}), cut=[("sheet.toml", "beam")]),
        parts(cue("1", then="2", then_at_s=1.0), cut=[("sheet.toml", "cue")]),
        parts(cue("1", {}), beams={"b": {"panel": "q"}}, cut=[("rig.toml", "panel")]),
    ],
)
def test_nothing_is_said_of_what_may_be_in_an_entry_left_out(show: Parts) -> None:
    assert told(show) == []


def test_an_unsigned_guard_is_a_warning() -> None:
    signed = {"by": "M. Rail", "on": "2031-02-03", "digest": "0"}
    plain = Parts(guard=Guard(format=1))
    assert told(plain) == [((), "warning", "unsigned: the tables hold as they are")]
    assert told(Parts(guard=Guard.model_validate({"format": 1, "signed": signed}))) == []


def _loudest(cells: CellMap, aim: float, toward: tuple[float, float]) -> tuple[float, float]:
    """Level of a panel aimed at sine `aim` along `toward`, there and at its loudest elsewhere."""
    k = 2.0 * np.pi * 40e3 / sound_speed_m_s(Air())
    sines = np.linspace(-0.95, 0.95, 3801)
    way = np.array((toward[0], 0.0, toward[1]))
    along = cells.at_m @ way
    field = np.abs(np.exp(1j * k * np.outer(sines - aim, along)).sum(axis=1))
    x = k * 4.5e-3 * np.abs(sines) + 1e-12
    level = field * 2.0 * j1(x) / x
    near = np.abs(sines - aim) < 0.1
    return float(level[near].max()), float(level[~near].max())


@pytest.mark.parametrize(
    ("panels", "toward", "azimuth", "widest_deg"),
    [
        ({"p": {}}, (1.0, 0.0), True, 25.5),
        ({"p": {"hex": {"rings": 8, "pitch_mm": 10.0}}}, (0.0, 1.0), False, 29.7),
        ({"p": {"grid": {"columns": 16, "rows": 1, "pitch_mm": 16.0}}}, (1.0, 0.0), True, 15.6),
    ],
)
def test_the_second_beam_overtakes_where_the_warning_begins(
    panels: dict[str, Any], toward: tuple[float, float], azimuth: bool, widest_deg: float
) -> None:
    """The bound against the field itself: array sum times piston, uniform, 9 mm cells."""
    key = "azimuth_deg" if azimuth else "elevation_deg"
    for angle_deg, warns in ((widest_deg - 1.0, False), (widest_deg + 1.0, True)):
        show = parts(cue("1", {key: angle_deg}), panels=panels)
        main, second = _loudest(show.cells["p"], np.sin(np.deg2rad(angle_deg)), toward)
        assert (second > main) == warns
        assert bool(told(show)) == warns
