"""Edits of a show, made in its texts: comments, order and every other line stay as they are.

Nothing is judged here but the form of an edit: what it makes of a show is for `read_show` to say,
of the texts that come out.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from beamctl.errors import ShowError
from beamctl.files.sections import Section
from beamctl.files.tree import ACT, CUE, WITH_NAMES, Tree, kind_of
from beamctl.files.writing import body, with_value, written_keys
from beamctl.show.checks import SHEET
from beamctl.show.edits import BEGUN, Drop, Edit, Move, Place, Put, Rename, Set

NAMED_BY = {  # kind of a table → where the sheet names it: the kind of table, and its key
    "cue": ("cue", "then"),
    "beam": ("act", "beam"),
    "panel": ("beam", "panel"),
    "spot": ("act", "spot"),
    "surface": ("act", "via"),
}


def edited(texts: Mapping[str, str], edit: Edit) -> dict[str, str]:
    """The texts of a show after an edit, by file; ShowError when one of its steps cannot be taken.

    texts  what the reader has accepted; a file that is missing is begun when a step needs it
    """
    trees: dict[str, Tree] = {}

    def tree(file: str) -> Tree:
        if file not in trees:
            trees[file] = Tree(file, texts.get(file, BEGUN))
        return trees[file]

    for step in edit.steps:
        match step:
            case Set():
                _set(tree(step.file), step)
            case Put():
                _put(tree(step.file), step)
            case Drop():
                _drop(tree(step.file), step.place)
            case Move():
                _move(tree(step.file), step)
            case Rename():
                _rename(tree(step.file), step)
                if SHEET in texts:
                    _follow(tree(SHEET), step)
    after = {file: tree.parts.text for file, tree in trees.items()}
    return {**texts, **{f: text for f, text in after.items() if text != texts.get(f, BEGUN)}}


def _set(tree: Tree, step: Set) -> None:
    if len(step.place) == 1 and not tree.span(step.place):
        if step.value is None:
            return
        _put(tree, Put(step.file, step.place))  # a table such as [air] may be missing
    found = tree.find(step.place)
    section = tree.all[found[0]]
    keys = (*section.keys, step.key)  # the value may be a table with a header
    inner = [i for i in found[1:] if tree.all[i].keys[: len(keys)] == keys]
    old = section.data.get(step.key)
    if type(old) is type(step.value) and old == step.value and not inner:
        return
    order, eol = tree.order(step.place), tree.parts.eol
    text = with_value(section.body, step.key, step.value, order, eol)
    tree.all[found[0]] = replace(section, body=text)
    _remove(tree, inner)


def _put(tree: Tree, step: Put) -> None:
    taken = tree.span(step.place)
    if taken and tree.kind(step.place) != "act":
        name = " ".join(map(str, step.place)) or "the top"
        raise ShowError(f"{tree.file}: {name} is there already", "give it another name")
    at = tree.room(step.place, step.after)
    first, *rest = _made(tree, step.place, step.table)
    tree.all[at:at] = [replace(first, before=tree.gap(step.place)), *rest]


def _made(tree: Tree, place: Place, table: Mapping[str, Any]) -> list[Section]:
    """The sections of a new table; the acts of a cue get their own."""
    kind, order, eol = tree.kind(place), tree.order(place), tree.parts.eol
    if kind not in ACT:
        keys = tuple(map(str, place))
        head = f"[{written_keys(keys)}]{eol}"
        return [Section(head=head, body=body(table, order, eol), keys=keys)]
    if kind == "act":
        return [_many(ACT, body(table, order, eol), eol)]
    own = {**table, "ref": place[1]}
    acts = own.pop("act", ())
    inner = tree.order((*place, "act", 0))
    rest = [_many(ACT, body(act, inner, eol), eol) for act in acts]
    return [_many(CUE, body(own, order, eol), eol), *rest]


def _many(keys: tuple[str, ...], text: str, eol: str) -> Section:
    return Section(head=f"[[{'.'.join(keys)}]]{eol}", body=text, keys=keys, many=True)


def _drop(tree: Tree, place: Place) -> None:
    if not place:
        raise ShowError(f"{tree.file}: the top of a file stays", "take its keys away one by one")
    _remove(tree, tree.find(place))


def _remove(tree: Tree, found: list[int]) -> None:
    for i in sorted(found, reverse=True):
        del tree.all[i]


def _move(tree: Tree, step: Move) -> None:
    found = tree.find(step.place)
    if tree.kind(step.place) != "cue":
        raise ShowError(f"{tree.file}: only a cue can be moved")
    if step.place == ("cue", step.after):
        return
    block = [tree.all[i] for i in found]
    _remove(tree, found)
    at = tree.room(step.place, step.after)
    tree.all[at:at] = block


def _rename(tree: Tree, step: Rename) -> None:
    found = tree.find(step.place)
    kind = tree.kind(step.place)
    if kind not in WITH_NAMES:
        raise ShowError(f"{tree.file}: only a cue or a table with a name can be renamed")
    if step.place[1] == step.name:
        return
    if tree.span((kind, step.name)):
        raise ShowError(f'{tree.file}: there is a {kind} "{step.name}"', "choose another name")
    if kind == "cue":
        _give(tree, found[0], "ref", step.name)
        return
    for i in found:
        keys = (kind, step.name, *tree.all[i].keys[2:])
        tree.all[i] = tree.all[i].renamed(keys, written_keys(keys))


def _follow(sheet: Tree, step: Rename) -> None:
    """Give the new name wherever the sheet says the old one."""
    old = step.place[1]
    kind, key = NAMED_BY.get(str(step.place[0]), ("", ""))
    for i, section in enumerate(sheet.all) if kind else ():
        if section.data.get(key) == old and kind_of(section.keys) == kind:
            _give(sheet, i, key, step.name)


def _give(tree: Tree, index: int, key: str, value: str) -> None:
    """Put another value in place of the one that a section has."""
    section = tree.all[index]
    tree.all[index] = replace(section, body=with_value(section.body, key, value, (), ""))
