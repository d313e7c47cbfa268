"""Edits go over the line and come back; whatever else is sent is no edit."""

from __future__ import annotations

import json
from typing import Any

import pytest

from beamctl.host.editrows import DEEPEST, MOST_STEPS, edit_of, edit_row
from beamctl.show.edits import Drop, Edit, Move, Put, Rename, Set

EDIT = Edit(
    "everything once",
    (
        Set("sheet.toml", ("cue", "12.5", "act", 2), "point_m", [0.5, -1.0, 2]),
        Set("house.toml", ("air",), "humidity_pct", None),
        Put("sheet.toml", ("cue", "13"), {"title": "gone", "note": "zwei\nZeilen"}, "12.5"),
        Drop("rig.toml", ("panel", "prow")),
        Move("sheet.toml", ("cue", "13"), ""),
        Rename("sheet.toml", ("beam", "whisper"), "hiss"),
    ),
)
SET: dict[str, Any] = edit_row(EDIT)["steps"][0]


def deep(levels: int) -> Any:
    return [] if levels == 0 else [deep(levels - 1)]


def test_an_edit_comes_back_as_it_went() -> None:
    assert edit_of(json.loads(json.dumps(edit_row(EDIT)))) == EDIT


@pytest.mark.parametrize(
    "row",
    [
        None,
        [],
        {"label": "no steps"},
        {"label": "none", "steps": []},
        {"label": 5, "steps": [SET]},
        {"label": "two\nlines", "steps": [SET]},
        {"label": "long" * 60, "steps": [SET]},
        {"label": "many", "steps": [SET] * (MOST_STEPS + 1)},
        *(
            {"label": "one is wrong", "steps": [SET, step]}
            for step in (
                None,
                {},
                SET | {"kind": "exec"},
                SET | {"kind": []},
                SET | {"file": "../sheet.toml"},
                SET | {"file": "sounds/a.wav"},
                SET | {"file": ["sheet.toml"]},
                SET | {"place": "cue"},
                SET | {"place": [True]},
                SET | {"place": [{}]},
                SET | {"key": 5},
                SET | {"more": 1},
                {key: value for key, value in SET.items() if key != "value"},
                SET | {"value": float("nan")},
                SET | {"value": "half a letter \ud800"},
                SET | {"value": {"\udfff": 1}},
                SET | {"value": deep(DEEPEST)},
                {"kind": "put", "file": "rig.toml", "place": [], "table": [], "after": ""},
            )
        ),
    ],
)
def test_what_is_no_edit_is_none(row: Any) -> None:
    assert edit_of(row) is None
