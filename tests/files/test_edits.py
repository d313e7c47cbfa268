"""Edits in the texts of the show that ships: what changes, and that nothing else does."""

from __future__ import annotations

import tomllib
from collections.abc import Iterator
from difflib import unified_diff
from pathlib import Path

import pytest

from beamctl.files.edits import edited
from beamctl.files.reader import read_show
from beamctl.show.edits import Drop, Edit, Move, Put, Rename, Set, Step

SCENE = Path(__file__).parents[2] / "scenes" / "night-tram"
TEXTS = {path.name: path.read_bytes().decode() for path in SCENE.glob("*.toml")}
SHEET, RIG, HOUSE, GUARD, WIRE = "sheet.toml", "rig.toml", "house.toml", "guard.toml", "wire.toml"


def after(*steps: Step, texts: dict[str, str] = TEXTS) -> dict[str, str]:
    """The texts after an edit of these steps."""
    return edited(texts, Edit("an edit", steps))


def lines(*steps: Step, texts: dict[str, str] = TEXTS) -> list[str]:
    """The lines that an edit takes away and puts in, as "-…" and "+…"."""
    found = after(*steps, texts=texts)
    return [line for file in found for line in _changed(texts.get(file, ""), found[file])]


def _changed(old: str, new: str) -> Iterator[str]:
    for line in unified_diff(old.splitlines(), new.splitlines(), n=0, lineterm=""):
        if not line.startswith(("---", "+++", "@@")):
            yield line


def test_a_value_changes_and_its_comment_stays() -> None:
    assert lines(Set(SHEET, ("cue", "1", "act", 0), "trim_db", -30.0)) == [
        "-trim_db = -26.5         # carrier level",
        "+trim_db = -30.0         # carrier level",
    ]


def test_the_same_value_changes_nothing() -> None:
    step = Set(RIG, ("panel", "prow"), "at_m", [0.0, 0.0, 3.0])
    assert after(step, Set(RIG, (), "ring_ms", None)) == TEXTS
    assert lines(Set(SHEET, ("cue", "1", "act", 0), "loop", 1))[1].startswith("+loop = 1 ")


def test_a_new_key_stands_where_the_model_has_it() -> None:
    assert lines(
        Set(SHEET, ("cue", "3", "act", 1), "reach", "aim"),
        Set(SHEET, ("cue", "3"), "note", 'say "now"'),
        Set(RIG, ("panel", "prow"), "roll_deg", 90.0),
    ) == ['+note = "say \\"now\\""', '+reach = "aim"', "+roll_deg = 90.0"]
    act = tomllib.loads(after(Set(SHEET, ("cue", "3", "act", 1), "law", "mam"))[SHEET])
    assert list(act["cue"][2]["act"][1]) == ["at_s", "beam", "seat", "law", "over_s"]


def test_a_key_goes_and_its_comment_keeps_the_place() -> None:
    assert lines(Set(SHEET, ("cue", "1", "act", 0), "azimuth_deg", None)) == [
        "-azimuth_deg = 0.0       # to the right of the panel's axis, as seen from behind it",
        "+# to the right of the panel's axis, as seen from behind it",
    ]


INLINE = "grid = { columns = 8, rows = 8, pitch_mm = 10.0 }\n"
DOTTED = "grid.columns = 8\ngrid.rows = 8\ngrid.pitch_mm = 10.0\n"
BELOW = "[panel.prow.grid]\ncolumns = 8\nrows = 8\npitch_mm = 10.0\n"


@pytest.mark.parametrize(
    "text",
    [
        TEXTS[RIG],
        TEXTS[RIG].replace(INLINE, DOTTED),
        TEXTS[RIG].replace(INLINE, "").replace("# No measured", f"{BELOW}# No measured"),
    ],
    ids=["in a line", "dotted", "under a header"],
)
def test_an_inner_table_is_replaced_whole_however_it_is_written(text: str) -> None:
    assert tomllib.loads(text) == tomllib.loads(TEXTS[RIG])
    grid = {"columns": 4, "rows": 4, "pitch_mm": 10.0}
    found = after(Set(RIG, ("panel", "prow"), "grid", grid), texts={RIG: text})[RIG]
    assert tomllib.loads(found)["panel"]["prow"]["grid"] == grid
    assert found.count("\ngrid = { columns = 4, rows = 4, pitch_mm = 10.0 }\nloom") == 1
    gone = after(Set(RIG, ("panel", "prow"), "grid", None), texts={RIG: text})[RIG]
    assert "grid" not in tomllib.loads(gone)["panel"]["prow"]


def test_a_cue_comes_with_its_acts_and_one_empty_line() -> None:
    table = {
        "title": "both", "then_at_s": 2.0, "then": "3", "note": None,
        "act": [{"fall_s": 1.0, "beam": "hum"}, {"point_m": [1.0, 2, 3.5], "beam": "bell"}],
    }  # fmt: skip
    found = after(Put(SHEET, ("cue", "2.5"), table, after="2"))[SHEET]
    new = """
[[cue]]
ref = "2.5"
title = "both"
then = "3"
then_at_s = 2.0
[[cue.act]]
beam = "hum"
fall_s = 1.0
[[cue.act]]
beam = "bell"
point_m = [1.0, 2, 3.5]
"""
    before, found_new, _ = found.partition(new)
    assert found_new
    assert before + found[len(before) + len(new) :] == TEXTS[SHEET]
    assert before.endswith("over_s = 0.1\n")
    assert found[len(before) + len(new) :].startswith("\n# A travel")


@pytest.mark.parametrize("ending", ["", "\n", "\n\n\n", "\n\n# to be continued\n"])
def test_a_last_cue_is_set_off_whatever_the_text_ends_with(ending: str) -> None:
    texts = {SHEET: TEXTS[SHEET].rstrip("\n") + ending}
    found = after(Put(SHEET, ("cue", "8"), {"title": "z"}, after="7"), texts=texts)[SHEET]
    end = ending.removeprefix("\n") if "#" not in ending else "\n# to be continued\n"
    assert found.endswith('fall_s = 0.1\n\n[[cue]]\nref = "8"\ntitle = "z"\n' + end)
    dropped = after(Drop(SHEET, ("cue", "8")), texts={SHEET: found})[SHEET]
    assert dropped.rstrip() == texts[SHEET].rstrip()


def test_first_place_and_move() -> None:
    found = after(
        Put(SHEET, ("cue", "0"), {"title": "a"}), Move(SHEET, ("cue", "4"), "0"),
        Move(SHEET, ("cue", "7"), ""), Move(SHEET, ("cue", "5"), "5"),
    )[SHEET]  # fmt: skip
    order = [cue["ref"] for cue in tomllib.loads(found)["cue"]]
    assert order == ["7", "0", "4", "1", "2", "3", "4.5", "5", "6", "6A"]
    assert "\n\n# Loops end by a fall. The hum goes down first" in found
    assert sorted(found.split("\n")) == sorted(
        [*TEXTS[SHEET].split("\n"), "", "[[cue]]", 'ref = "0"', 'title = "a"']
    )


def test_acts_are_numbered_from_0() -> None:
    place = ("cue", "4.5", "act", 1)
    found = after(Put(SHEET, place, {"beam": "bell"}), Drop(SHEET, ("cue", "4.5", "act", 0)))[SHEET]
    cue = next(cue for cue in tomllib.loads(found)["cue"] if cue["ref"] == "4.5")
    assert [act["beam"] for act in cue["act"]] == ["bell", "reply"]
    assert lines(Put(SHEET, ("cue", "7", "act", 3), {"beam": "hum"})) == [
        "+[[cue.act]]", '+beam = "hum"',
    ]  # fmt: skip


def test_named_tables_come_after_the_last_of_their_kind() -> None:
    beam = after(Put(SHEET, ("beam", "owl"), {"panel": "prow"}))[SHEET]
    assert '[beam.clock]\npanel = "prow"\n[beam.owl]\npanel = "prow"\n\n# One beam' in beam
    spot = after(Put(HOUSE, ("spot", "door"), {"at_m": [0.0, 1.0, 2.0]}))[HOUSE]
    assert "\n\n[spot.door]\nat_m = [0.0, 1.0, 2.0]\n\n# The shed doors" in spot
    bare = {SHEET: "format = 1\n\n[[cue]]\nref = '1'\n", HOUSE: "format = 1"}
    found = after(
        Put(SHEET, ("beam", "a"), {"panel": "p"}),
        Put(HOUSE, ("surface", "w"), {"reflection": 0.5}),
        Put(HOUSE, ("block", "b"), {"seats": 1, "class": "crew"}), texts=bare,
    )  # fmt: skip
    assert found[SHEET] == "format = 1\n\n[beam.a]\npanel = \"p\"\n\n[[cue]]\nref = '1'\n"
    assert found[HOUSE] == (
        'format = 1\n\n[block.b]\nclass = "crew"\nseats = 1\n\n[surface.w]\nreflection = 0.5\n'
    )


def test_a_table_or_a_file_that_is_missing_is_begun() -> None:
    texts = {HOUSE: "format = 1\n", WIRE: TEXTS[WIRE]}
    found = after(
        Set(HOUSE, ("air",), "humidity_pct", 40.0), Set(HOUSE, ("air",), "temperature_c", 18.0),
        Set(GUARD, (), "seats_db", 95.0), Set(WIRE, ("allow",), "10.0.0.0/8", ["read"]),
        texts=texts,
    )  # fmt: skip
    assert found[HOUSE] == "format = 1\n\n[air]\ntemperature_c = 18.0\nhumidity_pct = 40.0\n"
    assert found[GUARD] == "format = 1\nseats_db = 95.0\n"
    assert '\n"10.0.0.0/8" = ["read"]\n' in found[WIRE]
    nothing = Set(GUARD, (), "seats_db", None), Set(HOUSE, ("air",), "humidity_pct", None)
    assert after(*nothing, texts={HOUSE: "format = 1\n"}) == {HOUSE: "format = 1\n"}


@pytest.mark.parametrize(
    ("step", "changed"),
    [
        (Rename(SHEET, ("cue", "6"), "6.1"), 2),  # `then` of cue 5
        (Rename(SHEET, ("beam", "whisper"), "soft"), 5),
        (Rename(RIG, ("panel", "prow"), "bow"), 5),
        (Rename(HOUSE, ("spot", "buffer"), "stop"), 2),
        (Rename(HOUSE, ("surface", "back_wall"), "doors"), 3),
        (Rename(HOUSE, ("block", "benches"), "pews"), 1),
    ],
    ids=lambda value: value.place[0] if isinstance(value, Rename) else "",
)
def test_a_name_is_followed_wherever_it_is_said(step: Rename, changed: int) -> None:
    found = after(step)
    assert sum(line[0] == "+" for line in lines(step)) == changed
    show, problems = read_show(SCENE, found)
    assert show is not None, problems
    back = Rename(step.file, (*step.place[:-1], step.name), str(step.place[-1]))
    assert after(back, texts=found) == TEXTS


def test_line_ends_and_the_mark_of_windows_stay() -> None:
    texts = {file: "\ufeff" + text.replace("\n", "\r\n") for file, text in TEXTS.items()}
    steps = (
        Put(SHEET, ("cue", "8"), {"title": "x", "act": [{"beam": "hum"}]}, after="7"),
        Set(SHEET, ("cue", "1"), "note", None), Set(SHEET, ("cue", "2", "act", 0), "reach", "aim"),
        Rename(RIG, ("panel", "prow"), "bow"), Set(HOUSE, ("air",), "humidity_pct", 9.0),
    )  # fmt: skip
    plain = after(*steps)
    assert after(*steps, texts=texts) == {
        file: "\ufeff" + text.replace("\n", "\r\n") for file, text in plain.items()
    }


def test_a_divider_stays_while_cues_come_and_go() -> None:
    one, divider = '\n[[cue]]\nref = "1"\n# of 1\n', "\n# --- part two ---\n"
    two = '\n# of 2\n[[cue]]\nref = "2"\n'
    texts = {SHEET: f"format = 1\n{one}{divider}{two}"}
    new = Put(SHEET, ("cue", "1.5"), {}, after="1")
    put = after(new, texts=texts)[SHEET]
    assert put == f'format = 1\n{one}\n[[cue]]\nref = "1.5"\n{divider}{two}'
    dropped = after(new, Drop(SHEET, ("cue", "1")), Drop(SHEET, ("cue", "1.5")), texts=texts)
    assert dropped[SHEET] == f"format = 1\n{divider}{two}"
    moved = after(Move(SHEET, ("cue", "2"), ""), texts=texts)[SHEET]
    assert moved == f"format = 1\n{two}{one}{divider}"
