"""Edits as they go over the line: plain data, and back; whatever else is sent makes no edit."""

from __future__ import annotations

import math
from dataclasses import fields
from typing import Any

from beamctl.host.document import FILES
from beamctl.show.edits import KINDS, Edit, Step

LONGEST_LABEL = 200
MOST_STEPS = 20_000  # a long sheet renumbered
DEEPEST = 8  # tables and lists in one another
TEXTS = frozenset(("file", "key", "after", "name"))


def edit_row(edit: Edit) -> dict[str, Any]:
    """An edit as plain data."""
    return {"label": edit.label, "steps": [_step_row(step) for step in edit.steps]}


def edit_of(row: Any) -> Edit | None:
    """The edit that `edit_row` made this of; None when it is not one."""
    if not isinstance(row, dict) or not isinstance(label := row.get("label"), str):
        return None
    if len(label) > LONGEST_LABEL or not label.isprintable():
        return None
    rows = row.get("steps")
    if not isinstance(rows, list) or not 0 < len(rows) <= MOST_STEPS or not _plain(rows):
        return None
    steps = tuple(step for given in rows if (step := _step(given)) is not None)
    return Edit(label, steps) if len(steps) == len(rows) else None


def _step_row(step: Step) -> dict[str, Any]:
    row = {field.name: getattr(step, field.name) for field in fields(step)}
    return {"kind": type(step).__name__.lower(), **row, "place": list(step.place)}


def _step(row: Any) -> Step | None:
    if not isinstance(row, dict) or not isinstance(kind := row.get("kind"), str):
        return None
    place = row.get("place")
    if kind not in KINDS or not isinstance(place, list) or not all(map(_is_key, place)):
        return None
    if row.get("file") not in FILES:
        return None
    if not all(isinstance(row[name], str) for name in TEXTS & row.keys()):
        return None
    if not isinstance(row.get("table", {}), dict):
        return None
    values = {key: value for key, value in row.items() if key != "kind"}
    try:
        return KINDS[kind](**values | {"place": tuple(place)})
    except TypeError:  # a field too few, or one that it does not have
        return None


def _is_key(key: object) -> bool:
    return isinstance(key, str | int) and not isinstance(key, bool)


def _is_text(value: str) -> bool:
    """False for half a letter, which no file can hold."""
    try:
        value.encode()
    except UnicodeEncodeError:
        return False
    return True


def _plain(value: object, deep: int = 0) -> bool:
    """True for data that a text file can hold."""
    if isinstance(value, dict | list):
        inside = [*value, *value.values()] if isinstance(value, dict) else value
        return deep < DEEPEST and all(_plain(one, deep + 1) for one in inside)
    if isinstance(value, str):
        return _is_text(value)
    if isinstance(value, float):
        return math.isfinite(value)
    return value is None or isinstance(value, int)
