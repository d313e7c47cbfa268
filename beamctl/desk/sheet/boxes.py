"""The boxes in which the fields of a cue and of an act are typed or picked."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

from beamctl.desk.box import Box
from beamctl.desk.forms import UNSET, field_box, field_of, read, value_of
from beamctl.desk.link import Draft
from beamctl.desk.rows.sheetfields import TARGET, THEN
from beamctl.desk.rows.sheetwords import sentence, target_words
from beamctl.show.house import House
from beamctl.show.sheet import Act, Cue

TARGET_KEYS = ("seat", "spot", "point_m", "azimuth_deg", "elevation_deg")
NO_TARGET: dict[str, Any] = dict.fromkeys((*TARGET_KEYS, "via"))

Take = Callable[[Mapping[str, Any]], str]  # takes keys and values; returns a complaint or ""


def cue_box(key: str, cue: Cue, take: Take) -> Box:
    """Asks for a field of a cue; "then" stands for both keys of a follow-on."""
    if key != "then":
        title = f"{key.upper()} OF CUE {cue.ref}"
        return field_box(title, field_of(Cue, key), getattr(cue, key), lambda v: take({key: v}))
    now = UNSET if cue.then is None else f"{cue.then} {cue.then_at_s:g}"

    def use(text: str) -> str:
        try:
            return take(read_follow_on(text)) if text not in ("", now) else ""
        except ValueError as error:
            return str(error)

    about = f"Now {now}. {UNSET} takes it away."
    return Box(f"WHAT FOLLOWS CUE {cue.ref} BY ITSELF", about, THEN, use=use)


def act_box(key: str, cue: Cue, number: int, draft: Draft, take: Take) -> Box:
    """Asks for a field of an act; "target" stands for the keys of which an act has one."""
    act = cue.act[number]
    title = f"{key.upper()} OF ACT {number + 1} OF CUE {cue.ref}"
    if key == "target":
        return _target_box(title, act, draft.show.house, take)

    def then(value: Any) -> str:
        silent = key == "sound" and value is None  # what plays nothing repeats nothing
        return take({key: value, "loop": None} if silent else {key: value})

    names = names_for(key, draft)
    box = field_box(title, field_of(Act, key), value_of(act, key), then, names)
    return replace(box, text=f"{sentence(act)}. {box.text}")


def names_for(key: str, draft: Draft) -> tuple[str, ...]:
    """The names that a field may be given, as the show and its folder have them."""
    show = draft.show
    if key == "beam":
        return tuple(show.sheet.beam)
    if key == "via":
        return tuple(show.house.surface)
    return tuple(dict.fromkeys((*draft.files, *show.sounds))) if key == "sound" else ()


def missing_names(key: str, draft: Draft) -> str:
    """What to do where a field can be given no name at all; "" where it can."""
    if key == "sound" and not names_for(key, draft):
        return f"No sound file: put one into {draft.show.folder}/sounds"
    if key == "via" and not names_for(key, draft):
        return "No surface to bounce off: the House screen declares them"
    return ""


def read_target(text: str, house: House) -> dict[str, Any]:
    """Keys and values of a typed target; a seat or a spot needs no more than its name.

    ValueError says what was expected.
    """
    kind, _, rest = text.partition(" ")
    rest = rest.strip()
    if text == UNSET:
        return dict(NO_TARGET)
    if kind == "seat" or text in house.seats():
        return {**NO_TARGET, "seat": rest or text}
    if kind == "spot" or text in house.spot:
        return {**NO_TARGET, "spot": rest or text}
    if kind == "point":
        return {**NO_TARGET, "point_m": read(Act, "point_m", rest)}
    if kind == "angles" and len(angles := rest.replace(",", " ").split()) == 2:
        return {
            **NO_TARGET,
            "azimuth_deg": read(Act, "azimuth_deg", angles[0]),
            "elevation_deg": read(Act, "elevation_deg", angles[1]),
        }
    raise ValueError(f"{text}: expected {TARGET}")


def read_follow_on(text: str) -> dict[str, Any]:
    """Keys and values of a typed follow-on; ValueError says what was expected."""
    if text == UNSET:
        return {"then": None, "then_at_s": None}
    ref, _, seconds = text.partition(" ")
    if not seconds.strip():
        raise ValueError(f"{text}: expected {THEN}")
    return {"then": read(Cue, "then", ref), "then_at_s": read(Cue, "then_at_s", seconds)}


def _target_box(title: str, act: Act, house: House, take: Take) -> Box:
    now = target_words(act) or UNSET

    def use(text: str) -> str:
        if text in ("", now):
            return ""
        try:
            values = read_target(text, house)
        except ValueError as error:
            return str(error)
        if values["seat"] or values["spot"] or values["point_m"]:
            del values["via"]  # a bounce stays one: only the point is another
        return take(values)

    names = (*(f"spot {name}" for name in house.spot), *(f"seat {name}" for name in house.seats()))
    about = f"{sentence(act)}. Now {now}. {UNSET} takes it away."
    return Box(title, about, TARGET, use=use, choices=names)
