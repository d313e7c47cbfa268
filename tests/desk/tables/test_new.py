"""What a new table begins as must read without an error, in every show."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from beamctl.desk.tables.new import KINDS, begun
from beamctl.files.edits import edited
from beamctl.files.reader import read_show
from beamctl.show.edits import Edit, Put
from beamctl.show.house import House
from beamctl.show.show import Show

FOLDER = Path(__file__).parents[3] / "scenes" / "night-tram"
TEXTS = {path.name: path.read_text(encoding="utf-8") for path in FOLDER.glob("*.toml")}


def after(*edits: Edit) -> Show:
    """The show of the scene after edits; none of them may make an error of the reader."""
    texts = TEXTS
    for edit in edits:
        texts = edited(texts, edit)
    show, problems = read_show(FOLDER, texts)
    assert [problem for problem in problems if problem.severity == "error"] == []
    assert show is not None
    return show


def table_of(edit: Edit) -> dict[str, object]:
    (step,) = edit.steps
    assert isinstance(step, Put)
    return step.table


@pytest.mark.parametrize("kind", KINDS)
def test_a_new_table_reads_and_so_does_another_beside_it(kind: str) -> None:
    first = begun(kind, "fresh", after())
    again = begun(kind, "other", after(first))
    show = after(first, again)
    tables = show.rig.panel if kind == "panel" else getattr(show.house, kind)
    assert {"fresh", "other"} <= tables.keys()
    assert first.label == f"new {kind} fresh"


def test_a_new_block_sits_in_front_of_the_first_panel_where_there_is_no_seat() -> None:
    block = table_of(begun("block", "stalls", replace(after(), house=House(format=1))))
    assert block["first_m"] == [-1.38, 4.0, 1.2]
    assert block["rows"] == ["A", "B", "C"]
    assert (block["seats"], block["class"]) == (6, "seats")


def test_a_new_block_takes_rows_and_room_that_are_free() -> None:
    block = table_of(begun("block", "stalls", after()))
    assert block["rows"] == ["D", "E", "F"]
    assert block["first_m"][1] > max(at_m[1] for at_m in after().house.seats().values())


def test_a_new_wall_stands_behind_all_that_can_be_aimed_at() -> None:
    wall = table_of(begun("surface", "wall", after()))
    assert wall["corner_m"] == [-5.0, 9.2, 0.0]
    assert (wall["along_m"], wall["up_m"]) == ([10.0, 0.0, 0.0], [0.0, 0.0, 4.0])


def test_a_new_panel_hangs_beside_the_last_on_the_next_free_feeds_and_is_not_measured() -> None:
    show = after()
    panel = table_of(begun("panel", "stern", show))
    assert panel["first_feed"] == 81
    assert panel["grid"] == {"columns": 16, "rows": 4, "pitch_mm": 10.0}
    assert panel["pan_deg"] == 36.0
    assert "measured" not in panel
    assert panel["at_m"] != list(show.rig.panel["lantern"].at_m)
