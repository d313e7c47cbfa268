"""Edits of a show as data: what to change, in words of the files, whoever asks for it.

A place is a list of keys: () the top of a file, ("air",), ("panel", "prow"), ("beam", "whisper"),
("cue", "12.5") by its reference, ("cue", "12.5", "act", 2) by its number from 0. Tables are plain
data as TOML has it. All steps of one edit are taken, or none; one edit is one step of undo.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

Place = tuple[str | int, ...]
BEGUN = "format = 1\n"  # a file that an edit needs and the folder has not


@dataclass(frozen=True, slots=True)
class Set:
    """Give `key` of a table the `value`; None takes the key away."""

    file: str
    place: Place
    key: str
    value: Any


@dataclass(frozen=True, slots=True)
class Put:
    """Add a table at `place`.

    A cue comes after cue `after` ("" for the first place of the sheet), an act gets the number that
    `place` ends with, and any other table comes after the last of its kind.
    """

    file: str
    place: Place
    table: dict[str, Any] = field(default_factory=dict)
    after: str = ""


@dataclass(frozen=True, slots=True)
class Drop:
    """Take the table at `place` away, with its comments."""

    file: str
    place: Place


@dataclass(frozen=True, slots=True)
class Move:
    """Move a cue to stand after cue `after` ("" for the first place), its comments with it."""

    file: str
    place: Place
    after: str = ""


@dataclass(frozen=True, slots=True)
class Rename:
    """Give a cue or a named table another name, and follow it wherever the show names it."""

    file: str
    place: Place
    name: str


Step = Set | Put | Drop | Move | Rename
KINDS: dict[str, type[Step]] = {
    kind.__name__.lower(): kind for kind in (Set, Put, Drop, Move, Rename)
}


@dataclass(frozen=True, slots=True)
class Edit:
    """One deed of a designer; `label` says it in words, as undo will: "split cue 12"."""

    label: str
    steps: tuple[Step, ...]
