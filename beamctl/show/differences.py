"""What differs between two states of a show's files, in words: for looking back before saving.

A line is a mark and a text: "+" what is new, "-" what is gone, "~" what changed, "old -> new".
Acts are numbered from 1, as they are spoken of.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from difflib import SequenceMatcher
from itertools import zip_longest
from typing import Any

from pydantic import BaseModel

from beamctl.show.order import natural_key
from beamctl.show.sheet import Act, Cue, Sheet

Line = tuple[str, str]


def differences(before: BaseModel, after: BaseModel) -> tuple[Line, ...]:
    """Lines for two models of one kind; a sheet is compared cue by cue."""
    if isinstance(before, Sheet) and isinstance(after, Sheet):
        return tuple(_sheets(before, after))
    return tuple(_values("", before, after))


def edited_cues(before: Sheet, after: Sheet) -> tuple[str, ...]:
    """References of the cues of `after` that are new, changed or moved, in its order."""
    old = {cue.ref: cue for cue in before.cue}
    moved = _moved(list(old), [cue.ref for cue in after.cue])
    return tuple(c.ref for c in after.cue if c.ref in moved or old.get(c.ref) != c)


# -- sheets -------------------------------------------------------------------------------------


def _sheets(before: Sheet, after: Sheet) -> Iterator[Line]:
    yield from _values("title", before.title, after.title)
    yield from _values("beam", before.beam, after.beam)
    old, new = ({cue.ref: cue for cue in sheet.cue} for sheet in (before, after))
    now = _renumbered(old, new)  # old reference → new one, of cues that are in both
    moved = _moved(list(old), list(new))
    lines = {ref: [("-", _title(cue))] for ref, cue in old.items() if ref not in now}
    was = {to: ref for ref, to in now.items()}
    place = ""
    for ref, cue in new.items():
        if ref not in was:
            many = f"{len(cue.act)} act{'s' * (len(cue.act) != 1)}"
            lines.setdefault(ref, []).append(("+", f"{_title(cue)}, {many}"))
        else:
            where = f"after {place}" if place else "at the top"
            told = [("~", f"cue {was[ref]} is now {ref}")] * (ref != was[ref])
            told += [("~", f"cue {ref} moved, stands {where}")] * (ref in moved)
            lines.setdefault(ref, []).extend([*told, *_cues(old[was[ref]], cue, now)])
        place = ref
    for ref in sorted(lines, key=natural_key):
        yield from lines[ref]


def _renumbered(old: Mapping[str, Cue], new: Mapping[str, Cue]) -> dict[str, str]:
    """Old reference → new one: the same, or that of a new cue in the very words of a lost one."""
    now = {ref: ref for ref in old if ref in new}
    free = {
        (c.title, c.note, c.act): ref for ref, c in reversed(list(new.items())) if ref not in old
    }
    for ref, cue in old.items():
        if ref not in now and (to := free.pop((cue.title, cue.note, cue.act), "")):
            now[ref] = to
    return now


def _moved(before: Sequence[str], after: Sequence[str]) -> set[str]:
    """References that are in both, but out of the order that most of them keep."""
    both = {*before} & {*after}
    a, b = [ref for ref in before if ref in both], [ref for ref in after if ref in both]
    if a == b:
        return set()
    kept = SequenceMatcher(None, a, b, autojunk=False).get_matching_blocks()
    return both.difference(*(a[block.a : block.a + block.size] for block in kept))


def _cues(before: Cue, after: Cue, now: Mapping[str, str]) -> Iterator[Line]:
    what = f"cue {after.ref}"
    yield from _values(f"{what} title", before.title, after.title)
    yield from _values(f"{what} note", before.note, after.note)
    yield from _values(f"{what} then", now.get(before.then or "", before.then), after.then)
    yield from _values(f"{what} then_at_s", before.then_at_s, after.then_at_s)
    matched = SequenceMatcher(None, before.act, after.act, autojunk=False)
    for kind, a, a_end, b, b_end in matched.get_opcodes():
        if kind == "equal":
            continue
        gone = enumerate(before.act[a:a_end], start=a + 1)
        come = enumerate(after.act[b:b_end], start=b + 1)
        for old, new in zip_longest(gone, come):
            yield from _acts(what, old, new)


def _acts(what: str, old: tuple[int, Act] | None, new: tuple[int, Act] | None) -> Iterator[Line]:
    """One act that came, went or changed, with its number."""
    if old and new:
        yield from _values(f"{what} act {new[0]}", old[1], new[1])
        return
    for mark, one in (("-", old), ("+", new)):
        if one:
            yield mark, f"{what} act {one[0]}: {_said(one[1])}"


def _title(cue: Cue) -> str:
    return f'cue {cue.ref} "{cue.title}"'


# -- any model ----------------------------------------------------------------------------------


def _values(what: str, before: Any, after: Any) -> Iterator[Line]:
    """Lines for one value, or for all that differs inside it."""
    if before == after:
        return
    if isinstance(before, BaseModel) and type(before) is type(after):
        before, after = _fields(before), _fields(after)
    if not isinstance(before, Mapping) or not isinstance(after, Mapping):
        yield "~", f"{what} {_said(before)} -> {_said(after)}"
        return
    for key in {**before, **after}:
        name = f"{what} {key}".strip()
        if key not in after:
            yield "-", name
        elif key not in before:
            yield "+", name
        else:
            yield from _values(name, before[key], after[key])


def _fields(model: BaseModel) -> dict[str, Any]:
    """The fields of a model by the names that the file has."""
    fields = type(model).model_fields
    return {info.alias or key: getattr(model, key) for key, info in fields.items()}


def _said(value: Any) -> str:
    """A value in few words; of a table only what is written."""
    if isinstance(value, BaseModel):
        named = (key for key in type(value).model_fields if key in value.model_fields_set)
        return ", ".join(f"{key} {_said(getattr(value, key))}" for key in named)
    if value is None:
        return "none"
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, float):
        return f"{value:g}"
    if isinstance(value, tuple | list):
        return f"[{', '.join(map(_said, value))}]"
    return str(value)
