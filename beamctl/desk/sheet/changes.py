"""Changes of single fields on the Sheet: asked for in a box, emptied, or fitted under the cap."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from beamctl.desk.forms import is_written, value_of, written
from beamctl.desk.sheet.boxes import NO_TARGET, act_box, cue_box, missing_names
from beamctl.desk.sheet.here import Here
from beamctl.show.checks import SHEET
from beamctl.show.edits import Edit, Place, Rename, Set
from beamctl.show.sheet import Act, Cue

KEPT = ("ref", "title", "beam")  # fields that are never empty
_TOGETHER: dict[str, dict[str, Any]] = {  # what goes with a field that is emptied
    "target": NO_TARGET,
    "then": {"then": None, "then_at_s": None},
    "sound": {"sound": None, "loop": None},
}


def change(here: Here) -> str:
    """Ask for the field under the cursor; returns why it cannot be asked for."""
    cue, number, key = here.cue, here.place.act, here.place.key
    if cue is None or not key:
        return ""
    if number is None:
        return change_cue(here, cue, key)
    if why := missing_names(key, here.draft):
        return why

    def take(values: Mapping[str, Any]) -> str:
        return _made(here, fields_edit(cue, number, values))

    here.asking.open(act_box(key, cue, number, here.draft, take))
    return ""


def change_cue(here: Here, cue: Cue, key: str) -> str:
    """Ask for a field of the cue; another reference is followed by the cursor."""

    def take(values: Mapping[str, Any]) -> str:
        if "ref" not in values:
            return _made(here, fields_edit(cue, None, values))
        ref = values["ref"]
        edit = Edit(f"call cue {cue.ref} {ref}", (Rename(SHEET, ("cue", cue.ref), ref),))
        return here.asking.edit(edit, lambda: here.stand(ref, here.place))

    here.asking.open(cue_box(key, cue, take))
    return ""


def emptied(cue: Cue, number: int | None, key: str) -> Edit | None:
    """A field without a value; None where there was none. ValueError for one that needs it."""
    if key in KEPT:
        raise ValueError(f"{key} cannot be empty")
    return fields_edit(cue, number, _TOGETHER.get(key, {key: None}))


def fields_edit(cue: Cue, number: int | None, values: Mapping[str, Any]) -> Edit | None:
    """Other values for fields of a cue, or of its act `number`; None when all are as they were."""
    table: Cue | Act = cue if number is None else cue.act[number]
    place: Place = ("cue", cue.ref) if number is None else ("cue", cue.ref, "act", number)
    changed = {key: value for key, value in values.items() if _differs(table, key, value)}
    if not changed:
        return None
    where = f"cue {cue.ref}" if number is None else f"cue {cue.ref} act {number + 1}"
    said = [f"{k} {written(v)}" if v is not None else f"no {k}" for k, v in _told(changed).items()]
    steps = tuple(Set(SHEET, place, key, value) for key, value in changed.items())
    return Edit(f"{where}: {', '.join(said)}", steps)


def fitted(cue: Cue, beam: str, before_db: float, most_db: float) -> Edit | None:
    """`beam` nowhere above `most_db` in this cue, which finds it at a trim of `before_db`.

    None when no act of the cue has it any louder.
    """
    steps, found_db = [], before_db
    for number, act in sorted(enumerate(cue.act), key=lambda numbered: numbered[1].at_s):
        if act.beam != beam or act.fall_s is not None:
            continue
        found_db = found_db if act.trim_db is None else act.trim_db
        if found_db > most_db:
            steps.append(Set(SHEET, ("cue", cue.ref, "act", number), "trim_db", most_db))
            found_db = most_db
    label = f"cue {cue.ref}: {beam} at trim {most_db:.1f} dB"
    return Edit(label, tuple(steps)) if steps else None


def _made(here: Here, edit: Edit | None) -> str:
    return here.asking.edit(edit) if edit is not None else ""


def _differs(table: Cue | Act, key: str, value: Any) -> bool:
    if value is None or not is_written(table, key):
        return value is not None or is_written(table, key)
    return written(value_of(table, key)) != written(value)


def _told(changed: Mapping[str, Any]) -> Mapping[str, Any]:
    """Of a new target the old one that goes away need not be told."""
    given = {key: value for key, value in changed.items() if value is not None}
    return given or changed
