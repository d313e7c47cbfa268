"""Problems: what is wrong in a show folder, where, and what was expected instead."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import zip_longest
from typing import Any, Literal

from beamctl.files.locate import Key, Node

Severity = Literal["error", "warning"]
AXES = "xyz"


@dataclass(frozen=True, slots=True)
class Problem:
    """One problem. `line` is None for a file as a whole; `key` is the place in words."""

    file: str
    line: int | None
    key: str
    what: str
    severity: Severity = "error"

    def __str__(self) -> str:
        place = self.file if self.line is None else f"{self.file}:{self.line}"
        colon = f" {self.key}: " if self.key else ": "
        return place + colon + self.what


@dataclass(frozen=True, slots=True)
class Source:
    """A parsed TOML text: its name in the folder, its data, and the lines of its keys."""

    file: str
    data: dict[str, Any]
    tree: Node

    def problem(self, location: Sequence[Key], what: str, severity: Severity = "error") -> Problem:
        """The problem at `location`, with its line and its name in words."""
        key = self.words(location)
        return Problem(self.file, self.tree.line_of(location), key, what, severity)

    def words(self, location: Sequence[Key]) -> str:
        """A location as it is spoken of: "cue 12.5 act 1 depth", counting from 1."""
        words: list[str] = []
        value: Any = self.data
        for key, node in zip_longest(location, self.tree.path(location)[1:]):
            name = key if node is None else node.name
            value = _inside(value, key)
            if isinstance(name, str):
                words.append(name)
            elif words[-1:] == ["cue"] and isinstance(_inside(value, "ref"), str):
                words.append(value["ref"][:20])
            elif words[-1:] == ["cue"]:
                words.append(f"#{name + 1}")
            elif words[-1].endswith("_m") and name < len(AXES):
                words.append(AXES[name])
            else:
                words.append(str(name + 1))
        return " ".join(words)


def shown(value: object) -> str:
    """A TOML value as a message shows it, never longer than a line."""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, int) and value.bit_length() > 64:
        return "an enormous number"  # more digits than Python agrees to print
    if isinstance(value, str):
        return f'"{value if len(value) <= 40 else value[:39] + "…"}"'
    if isinstance(value, dict):
        return "a table" if value else "an empty table"
    if isinstance(value, list):
        return f"a list of {len(value)}" if value else "an empty list"
    return str(value)


def _inside(value: Any, key: Key) -> Any:
    if isinstance(value, dict):
        return value.get(key)
    if isinstance(value, list) and isinstance(key, int) and 0 <= key < len(value):
        return value[key]
    return None
