"""Edits that cannot be made: one line says where and what, and nothing is changed."""

from __future__ import annotations

from pathlib import Path

import pytest

from beamctl.errors import ShowError
from beamctl.files.edits import edited
from beamctl.show.edits import Drop, Edit, Move, Put, Rename, Set, Step

SCENE = Path(__file__).parents[2] / "scenes" / "night-tram"
TEXTS = {path.name: path.read_bytes().decode() for path in SCENE.glob("*.toml")}
SHEET, RIG, HOUSE = "sheet.toml", "rig.toml", "house.toml"


def refusal(step: Step, texts: dict[str, str] = TEXTS) -> tuple[str, str]:
    """What an edit is refused with, and what to do."""
    before = dict(texts)
    first = Set("wire.toml", (), "heartbeat_s", 2.0)
    with pytest.raises(ShowError) as caught:
        edited(texts, Edit("an edit", (first, step)))
    assert texts == before
    assert "\n" not in caught.value.what + caught.value.do
    return caught.value.what, caught.value.do


@pytest.mark.parametrize(
    ("step", "said"),
    [
        (Set(SHEET, ("cue", "6B"), "title", "x"), 'sheet.toml: "6B", no such cue; did you mean'),
        (Drop(SHEET, ("cue", "6", "act", 2)), "sheet.toml cue 6: no act 3, there are 2"),
        (Put(SHEET, ("cue", "6", "act", 3), {}), "sheet.toml cue 6: no act 4, there are 2"),
        (Put(SHEET, ("cue", "9", "act", 0), {}), 'sheet.toml: "9", no such cue'),
        (Put(SHEET, ("cue", "6"), {"title": "x"}), "sheet.toml: cue 6 is there already"),
        (Put(SHEET, ("cue", "8"), {"title": "x"}, after="9"), 'sheet.toml: "9", no such cue'),
        (Put(RIG, ("panel", "prow"), {}), "rig.toml: panel prow is there already"),
        (Move(SHEET, ("cue", "6"), "9"), 'sheet.toml: "9", no such cue'),
        (Move(SHEET, ("beam", "hum"), ""), "sheet.toml: only a cue can be moved"),
        (Drop(HOUSE, ("spot", "bufer")), 'house.toml: "bufer", no such spot; did you mean "buff'),
        (Drop(HOUSE, ()), "house.toml: the top of a file stays"),
        (Rename(HOUSE, ("spot", "buffer"), "conductor"), 'house.toml: there is a spot "conductor"'),
        (Rename(HOUSE, ("air",), "wind"), "house.toml: only a cue or a table with a name can be"),
        (Set("strip.csv", (), "a", 1), "strip.csv cannot be edited"),
        (Set(SHEET, ("beam",), "a", 1), "sheet.toml: ('beam',) is no place of a table"),
        (Set(SHEET, ("cue", 1), "a", 1), "sheet.toml: ('cue', 1) is no place of a table"),
        (Set(SHEET, ("cue", "1"), "title", "\udcff"), "'\\udcff' cannot be written"),
        (Set(SHEET, ("cue", "1"), "title", {1, 2}), "{1, 2} cannot be written"),
        (Set(SHEET, ("cue", "1"), "title", [None]), "None cannot be written"),
    ],
)  # fmt: skip
def test_an_edit_without_its_table_is_refused(step: Step, said: str) -> None:
    what, _ = refusal(step)
    assert what.startswith(said)


@pytest.mark.parametrize(
    ("step", "text", "said", "do"),
    [
        (Set(RIG, ("panel", "a"), "q", 9.0), "panel = { a = {} }\n", "2 panel", "[panel.a]"),
        (Set(RIG, ("panel", "a"), "q", 9.0), "\npanel.a.q = 1\n", "3 panel", "[panel.a]"),
        (Put(RIG, ("panel", "a"), {}), "# c\n[panel]\nb.q = 1\na.q = 1\n", "5 a", "[panel.a]"),
        (Set(HOUSE, ("air",), "humidity_pct", 9.0), "air = {}\n", "2 air", "[air]"),
        (Drop(SHEET, ("cue", "1")), 'cue = [{ ref = "1" }]\n', "2 cue", "[[cue]]"),
        (Put(SHEET, ("cue", "1", "act", 0), {}), '[[cue]]\nref = "1"\nact = []\n', "4 act",
         "[[cue.act]]"),
    ],
)  # fmt: skip
def test_a_table_without_a_header_of_its_own_is_refused_with_its_line(
    step: Step, text: str, said: str, do: str
) -> None:
    texts = {SHEET: "format = 1\n", step.file: f"format = 1\n{text}"}
    assert refusal(step, texts) == (
        f"{step.file}:{said}: written inside a line", f"write it as {do}",
    )  # fmt: skip
