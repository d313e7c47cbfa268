"""What a designer does to a sheet, as edits: cues and acts written, copied, split, moved, counted.

Pure functions of the sheet as it stands. Acts are numbered from 0 in the order of the file, in
labels from 1. ValueError says in one line why a deed cannot be done.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from itertools import pairwise
from typing import Any

from beamctl.show.checks import SHEET
from beamctl.show.edits import Drop, Edit, Move, Put, Rename, Set, Step
from beamctl.show.numbering import between, counted
from beamctl.show.order import natural_key
from beamctl.show.sheet import Act, Cue, Sheet

ActPlace = tuple[str, int]  # reference of its cue, number in it


def free_ref(sheet: Sheet, after: str) -> str:
    """A reference for a cue that comes to stand after cue `after`, "" for the first place."""
    refs = _refs(sheet)
    at = _position(sheet, after) + 1 if after else 0
    return between(after, refs[at] if at < len(refs) else "", refs)


# -- cues ---------------------------------------------------------------------------------------


def new_cue(sheet: Sheet, after: str, title: str) -> Edit:
    """A cue without acts after cue `after`."""
    ref = free_ref(sheet, after)
    return Edit(f"new cue {ref}", (Put(SHEET, ("cue", ref), {"title": title}, after),))


def copy_cue(sheet: Sheet, ref: str, after: str) -> Edit:
    """Cue `ref` once more, after cue `after`."""
    new = free_ref(sheet, after)
    put = Put(SHEET, ("cue", new), _table(_cue(sheet, ref)) | {"ref": new}, after)
    return Edit(f"copy cue {ref} as {new}", (put,))


def split_cue(sheet: Sheet, ref: str, number: int) -> Edit:
    """Two cues of one: its acts from `number` on become a cue of their own, which begins at 0 s.

    What followed on from the cue follows on from the new one.
    """
    cue, new = _cue(sheet, ref), free_ref(sheet, ref)
    if not 0 < number < len(cue.act):
        raise ValueError("a split leaves an act on either side: choose another act")
    first_s = min(act.at_s for act in cue.act[number:])
    table = _table(cue) | {"ref": new, "act": [_earlier(act, first_s) for act in cue.act[number:]]}
    steps: list[Step] = [_drop(ref, k) for k in reversed(range(number, len(cue.act)))]
    if cue.then_at_s is not None:
        table["then_at_s"] = max(0.0, round(cue.then_at_s - first_s, 6))
        steps += _no_follow_on(ref)
    put = Put(SHEET, ("cue", new), table, ref)
    return Edit(f"split cue {ref} into {ref} and {new}", (*steps, put))


def delete_cues(sheet: Sheet, refs: Collection[str]) -> Edit:
    """Cues taken away; cues that they would have followed are followed by none."""
    gone = _chosen(sheet, refs)
    orphans = [cue.ref for cue in sheet.cue if cue.then in gone and cue.ref not in gone]
    steps = [step for ref in orphans for step in _no_follow_on(ref)]
    drops = [Drop(SHEET, ("cue", ref)) for ref in gone]
    return Edit(f"delete {_named(gone)}", (*steps, *drops))


def move_cues(sheet: Sheet, refs: Collection[str], after: str) -> Edit:
    """Cues set down after cue `after`, in their order; where one is out of order it is renumbered.

    `after` may be one of them: they come together then, where it stands.
    """
    moved, all_refs = _chosen(sheet, refs), _refs(sheet)
    ahead = all_refs[: _position(sheet, after) + 1] if after else []
    ahead = [ref for ref in ahead if ref not in moved]
    behind = next((ref for ref in all_refs[len(ahead) :] if ref not in (*moved, *ahead)), "")
    steps: list[Step] = []
    said = []
    place = first = ahead[-1] if ahead else ""
    for ref in moved:
        new = ref if _fits(place, ref, behind) else between(place, behind, all_refs)
        steps.append(Move(SHEET, ("cue", ref), place))
        if new != ref:
            steps.append(Rename(SHEET, ("cue", ref), new))
        said.append(ref if new == ref else f"{ref} as {new}")
        place, all_refs = new, [*all_refs, new]
    where = f"after {first}" if first else "to the top"
    return Edit(f"move {_named(said)} {where}", tuple(steps))


def renumber(sheet: Sheet, refs: Collection[str], start: str, step: str) -> Edit:
    """Cues counted anew from `start` on, `step` apart, in an order that holds; all, or none."""
    old = _chosen(sheet, refs)
    new = dict(zip(old, counted(start, step, len(old)), strict=True))
    taken = {natural_key(ref): ref for ref in _refs(sheet) if ref not in new}
    for ref in new.values():
        if other := taken.get(natural_key(ref)):
            raise ValueError(f"{other} is another cue's number: choose another start or step")
    for (one, a), (two, b) in pairwise((ref, new.get(ref, ref)) for ref in _refs(sheet)):
        if (one in new or two in new) and natural_key(a) > natural_key(b):
            raise ValueError(f"{b} would stand after {a}: choose another start or step")
    steps = _renames({ref: to for ref, to in new.items() if ref != to}, _refs(sheet))
    return Edit(f"renumber {_named(old)} from {start} by {step}", steps)


# -- acts ---------------------------------------------------------------------------------------


def put_act(sheet: Sheet, ref: str, number: int, table: Mapping[str, Any]) -> Edit:
    """A new act of cue `ref`, which gets the `number`."""
    _cue(sheet, ref)
    put = Put(SHEET, ("cue", ref, "act", number), dict(table))
    return Edit(f"new act {number + 1} in cue {ref}", (put,))


def copy_act(sheet: Sheet, ref: str, number: int) -> Edit:
    """An act once more, after itself."""
    put = Put(SHEET, ("cue", ref, "act", number + 1), _table(_act(sheet, ref, number)))
    return Edit(f"copy act {number + 1} of cue {ref}", (put,))


def delete_acts(sheet: Sheet, acts: Collection[ActPlace]) -> Edit:
    """Acts taken away."""
    gone = _in_order(sheet, acts)
    return Edit(f"delete {_named_acts(gone)}", tuple(_drop(*act) for act in reversed(gone)))


def move_acts(sheet: Sheet, acts: Collection[ActPlace], ref: str, number: int) -> Edit:
    """Acts of any cues set down in cue `ref`, before its act `number` (or after its last)."""
    _cue(sheet, ref)
    moved = _in_order(sheet, acts)
    at = number - sum(1 for act in moved if act[0] == ref and act[1] < number)
    drops = [_drop(*act) for act in reversed(moved)]
    puts = [
        Put(SHEET, ("cue", ref, "act", at + i), _table(_act(sheet, *act)))
        for i, act in enumerate(moved)
    ]
    return Edit(f"move {_named_acts(moved)} to act {at + 1} of cue {ref}", (*drops, *puts))


# -- of the sheet -------------------------------------------------------------------------------


def _refs(sheet: Sheet) -> list[str]:
    return [cue.ref for cue in sheet.cue]


def _position(sheet: Sheet, ref: str) -> int:
    try:
        return sheet.position(ref)
    except KeyError:
        raise ValueError(f"no cue {ref} in the sheet") from None


def _cue(sheet: Sheet, ref: str) -> Cue:
    return sheet.cue[_position(sheet, ref)]


def _act(sheet: Sheet, ref: str, number: int) -> Act:
    cue = _cue(sheet, ref)
    if not 0 <= number < len(cue.act):
        raise ValueError(f"cue {ref} has no act {number + 1}")
    return cue.act[number]


def _chosen(sheet: Sheet, refs: Collection[str]) -> list[str]:
    """Those of the references that the sheet has, in its order."""
    chosen = [ref for ref in _refs(sheet) if ref in refs]
    if not chosen:
        raise ValueError("no such cue in the sheet")
    return chosen


def _in_order(sheet: Sheet, acts: Collection[ActPlace]) -> list[ActPlace]:
    for act in acts:
        _act(sheet, *act)
    if not acts:
        raise ValueError("no act is chosen")
    return sorted(acts, key=lambda act: (_position(sheet, act[0]), act[1]))


# -- steps and words ----------------------------------------------------------------------------


def _table(model: Cue | Act) -> dict[str, Any]:
    """What is written of a cue or an act, as TOML has it."""
    return model.model_dump(mode="json", exclude_unset=True)


def _earlier(act: Act, by_s: float) -> dict[str, Any]:
    at_s = round(act.at_s - by_s, 6)
    table = {key: value for key, value in _table(act).items() if key != "at_s"}
    return {"at_s": at_s, **table} if at_s else table


def _drop(ref: str, number: int) -> Drop:
    return Drop(SHEET, ("cue", ref, "act", number))


def _no_follow_on(ref: str) -> list[Step]:
    return [Set(SHEET, ("cue", ref), key, None) for key in ("then", "then_at_s")]


def _fits(low: str, ref: str, high: str) -> bool:
    key = natural_key(ref)
    return (not low or natural_key(low) < key) and (not high or key < natural_key(high))


def _renames(new: Mapping[str, str], refs: Collection[str]) -> tuple[Step, ...]:
    """Steps that give cues other numbers, each one only when nobody bears it any more."""
    steps: list[Step] = []
    waiting, borne = dict(new), {*refs}

    def give(ref: str, name: str) -> None:
        steps.append(Rename(SHEET, ("cue", ref), name))
        borne.discard(ref)
        borne.add(name)

    while waiting:
        for ref in (*waiting, *reversed([*waiting])):
            if ref in waiting and waiting[ref] not in borne:
                give(ref, waiting.pop(ref))
        if blocked := next(iter(waiting), ""):  # round in a circle: one steps aside
            aside = between(max(borne, key=natural_key), "", borne)
            give(blocked, aside)
            waiting[aside] = waiting.pop(blocked)
    return tuple(steps)


def _named(refs: list[str]) -> str:
    if len(refs) == 1:
        return f"cue {refs[0]}"
    if len(refs) > 4:
        return f"{len(refs)} cues, {refs[0]} to {refs[-1]}"
    return f"cues {', '.join(refs[:-1])} and {refs[-1]}"


def _named_acts(acts: list[ActPlace]) -> str:
    if len(acts) > 1:
        return f"{len(acts)} acts"
    ((ref, number),) = acts
    return f"act {number + 1} of cue {ref}"
