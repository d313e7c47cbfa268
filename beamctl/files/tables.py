"""A TOML text to its model, telling every problem at once.

When a text has errors, what is wrong is cut out and the rest is read again: once to find what the
first errors hid, and so that the checks between files can still be made on all that is sound.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache
from typing import Any, Generic, TypeVar

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails

from beamctl.files.locate import Key, Node, locate
from beamctl.files.problems import Problem, Source, shown
from beamctl.show.expected import A_NAME, Expected

M = TypeVar("M", bound=BaseModel)
_PLACE = re.compile(r" \(at (?:line (\d+), column \d+|end of document)\)$")
MOST_POINTS = 500  # of a line: the time to read a dotted key goes with the square of its parts
_DIGITS = re.compile("[0-9_]{4000}")
OF_TABLE = ("missing", "value_error", "too_short")  # errors of a table, not of one of its keys
expected_by = cache(Expected)


@dataclass(frozen=True, slots=True)
class Table(Generic[M]):
    """A text read into its model; `cut` names the top-level tables that lost a table or more."""

    source: Source
    model: M
    cut: frozenset[str] = frozenset()


def read_table(
    file: str, text: str, model: type[M], report: Callable[[Problem], None]
) -> Table[M] | None:
    """The model of a text, or of what is sound in it; None when no model can be made of it."""
    for line, words in enumerate(text.split("\n"), start=1):
        if words.count(".") > MOST_POINTS:
            report(Problem(file, line, "", f"more than {MOST_POINTS} points in one line"))
            return None
    try:
        source = Source(file, tomllib.loads(text), locate(text))
        return _fit(source, model, report)
    except RecursionError:
        report(Problem(file, None, "", "values nest too deeply; a show needs four levels"))
    except tomllib.TOMLDecodeError as error:
        place = _PLACE.search(str(error))
        line = int(place[1]) if place and place[1] else text.count("\n") + 1
        report(Problem(file, line, "", f"not TOML: {_PLACE.sub('', str(error))}"))
    except ValueError:  # Python reads no number of more than 4,300 digits
        digits = _DIGITS.search(text)
        before = text[: digits.start()] if digits else ""
        report(Problem(file, before.count("\n") + 1, "", "a number of thousands of digits"))
    return None


def _fit(source: Source, model: type[M], report: Callable[[Problem], None]) -> Table[M] | None:
    expected = expected_by(model)
    torn: set[Node] = set()  # tables that lost something: what they report next is an echo
    cut: set[str] = set()
    while True:
        try:
            return Table(source, model.model_validate(source.data), frozenset(cut))
        except ValidationError as failure:
            errors = failure.errors(include_url=False)
        if wrong := [e for e in errors if e["loc"] == ("format",)]:
            errors = wrong  # another format: nothing else in the file can be judged
        faults = {f.place: f for f in (_Fault.of(e, source, expected) for e in errors)}
        for fault in faults.values():
            if fault.table not in torn:
                report(source.problem(fault.place, fault.what))
        torn |= {fault.holder for fault in faults.values()}
        cut |= {str(fault.place[0]) for fault in faults.values() if fault.whole}
        gone = {fault.victim for fault in faults.values()}
        if wrong or source.tree in gone:
            return None
        source = Source(source.file, _without(source.data, source.tree, gone), source.tree)


@dataclass(frozen=True, slots=True)
class _Fault:
    """One validation error: where and what it is, and what to cut to be rid of it."""

    place: tuple[Key, ...]
    what: str
    table: Node  # the table it speaks of
    victim: Node  # the key or table to cut
    holder: Node  # the table that loses it
    whole: bool  # a whole table goes

    @classmethod
    def of(cls, error: ErrorDetails, source: Source, expected: Expected) -> _Fault:
        kind, location = error["type"], error["loc"]
        place = location if kind == "extra_forbidden" else expected.known(location)
        if isinstance(error["input"], list) and isinstance(place[-1], int):
            place = place[:-1]  # an element too few: the list is the matter
        nodes = source.tree.path(place)
        values = _values(source.data, place[: len(nodes) - 1])
        of_table = isinstance(error["input"], dict) and kind in OF_TABLE
        at = len(nodes) - 1
        while at and not isinstance(values[at], dict) and isinstance(values[at - 1], list):
            at -= 1  # a list of numbers or texts goes as one
        holder = max((i for i in range(at) if isinstance(values[i], dict)), default=0)
        whole = at > 0 and (at == 1 or isinstance(values[at], dict))
        table = nodes[at if of_table else holder]
        what = _what(error, place, expected)
        return cls(place, what, table, nodes[at], nodes[holder], whole)


def _what(error: ErrorDetails, place: Sequence[Key], expected: Expected) -> str:
    """A validation error in the words of the show folder."""
    kind, value = error["type"], error["input"]
    if kind == "extra_forbidden":
        return f"unknown key, {expected.near(place[:-1], str(place[-1]))}"
    if kind == "value_error":
        said = str(error["ctx"]["error"])
        return said if isinstance(value, dict) else f"{shown(value)}, expected {said}"
    if error["loc"][-1] == "[key]":
        return f"expected {A_NAME}"
    if kind == "missing" and isinstance(value, dict):
        return f"missing, expected {expected.at(place)}"
    return f"{shown(value)}, expected {expected.at(place)}"


def _values(data: Any, place: Sequence[Key]) -> list[Any]:
    """The data along a location that is written, from the whole file inward."""
    values: list[Any] = [data]
    for key in place:
        values.append(values[-1][key])
    return values


def _without(data: Any, tree: Node, gone: set[Node]) -> Any:
    """The data without what the nodes in `gone` name; the tree is cut in step."""
    stay = {key: node for key, node in tree.below.items() if node not in gone}
    if isinstance(data, dict):
        tree.below = stay
        return {key: _without(data[key], node, gone) for key, node in stay.items()}
    if isinstance(data, list):
        tree.below = dict(enumerate(stay.values()))
        return [_without(data[int(key)], node, gone) for key, node in stay.items()]
    return data
