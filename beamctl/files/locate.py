"""Where in a TOML text each key stands: a tree of lines that has the shape of the parsed data.

For text that `tomllib` accepts: it finds keys, it does not check them. The standard parser keeps
no positions, and an error without its line is no help in a long sheet. Nor can a text be edited
without them: for that, the places of headers and of the pairs below them are told as offsets.
"""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

Key = str | int
_GAP = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_KEY = re.compile(r"[ \t]*(\"(?:[^\"\\\n]|\\.)*\"|'[^'\n]*'|[A-Za-z0-9_-]+)[ \t]*")
_STRING = re.compile(
    r'"""(?:[^\\]|\\.)*?"{3,5}' r"|'''.*?'{3,5}" r'|"(?:[^"\\\n]|\\.)*"' r"|'[^'\n]*'", re.DOTALL
)
_PLAIN = re.compile(r"[^,\]}#\r\n]+")


@dataclass(slots=True, eq=False)
class Node:
    """A key, a table or an element of an array: its 1-based line and what it holds."""

    line: int
    name: Key  # as written; elements of arrays count from 0
    below: dict[Key, Node] = field(default_factory=dict)

    def child(self, name: Key, line: int) -> Node:
        """The node `name` of this one, made at `line` when it is new."""
        return self.below.setdefault(name, Node(line, name))

    def path(self, location: Sequence[Key]) -> list[Node]:
        """The nodes from this one along `location`, as far as it is written down."""
        nodes = [self]
        for name in location:
            if name not in nodes[-1].below:
                break
            nodes.append(nodes[-1].below[name])
        return nodes

    def line_of(self, location: Sequence[Key]) -> int:
        """Line of `location` (keys and indices), else of the nearest table around it."""
        return self.path(location)[-1].line


class Header(NamedTuple):
    """[a.b] or [[a.b]] at text[start:stop]; what comes before it ends at `since`."""

    since: int
    start: int
    stop: int
    keys: tuple[str, ...]
    many: bool


class Pair(NamedTuple):
    """`key = value` that starts at `start`; its value is text[value:stop]."""

    start: int
    value: int
    stop: int
    keys: tuple[str, ...]


def locate(text: str) -> Node:
    """The tree of lines of a TOML text; RecursionError when values nest too deeply."""
    return _Scanner(text).document()


def headers(text: str) -> tuple[list[Header], int]:
    """Every header of a TOML text, and the offset where its last header or pair ends."""
    scanner = _Scanner(text)
    scanner.document()
    return scanner.headers, scanner.done


def pairs(text: str) -> list[Pair]:
    """Every pair of a TOML text, those within values left out."""
    scanner = _Scanner(text)
    scanner.document()
    return scanner.pairs


class _Scanner:
    def __init__(self, text: str) -> None:
        self.text = text
        self.at = 0
        self.done = 0
        self.starts = [0, *(m.end() for m in re.finditer("\n", text))]
        self.headers: list[Header] = []
        self.pairs: list[Pair] = []

    @property
    def line(self) -> int:
        return bisect_right(self.starts, self.at)

    def document(self) -> Node:
        root = table = Node(1, "")
        self.skip(_GAP)
        while self.at < len(self.text):
            if self.take("["):
                table = self.header(root)
            else:
                self.pairs.append(self.pair(table))
            self.done = self.at
            self.skip(_GAP)
        return root

    def header(self, root: Node) -> Node:
        """[a.b] or [[a.b]]: the table that the keys below it belong to."""
        start, line, many = self.at - 1, self.line, self.take("[")
        *outer, last = self.keys()
        self.at += 2 if many else 1
        self.headers.append(Header(self.done, start, self.at, (*outer, last), many))
        table = root
        for name in outer:
            table = _newest(table.child(name, line))
        table = table.child(last, line)
        if many:
            return table.child(len(table.below), line)
        table.line = line  # a table may come after tables within it
        return table

    def pair(self, table: Node) -> Pair:
        """One `key = value` of a table."""
        start, line = self.at, self.line
        keys = self.keys()
        for name in keys:
            table = table.child(name, line)
        self.at += 1  # the equals sign
        self.skip(_GAP)
        value = self.at
        self.value(table)
        stop = value + len(self.text[value : self.at].rstrip())
        return Pair(start, value, stop, tuple(keys))

    def value(self, node: Node) -> None:
        if self.take("["):
            while not self.closed("]"):
                self.value(node.child(len(node.below), self.line))
        elif self.take("{"):
            while not self.closed("}"):
                self.pair(node)
        elif not self.skip(_STRING) and not self.skip(_PLAIN):
            raise tomllib.TOMLDecodeError(f"Missing value (at line {self.line}, column 1)")

    def closed(self, bracket: str) -> bool:
        """Passes gaps and a comma; True when the array or inline table ends here."""
        self.skip(_GAP)
        if self.take(","):
            self.skip(_GAP)
        return self.take(bracket) or self.at >= len(self.text)

    def keys(self) -> list[str]:
        """A dotted key."""
        names = []
        while match := _KEY.match(self.text, self.at):
            self.at = match.end()
            names.append(_unquoted(match[1]))
            if not self.take("."):
                break
        return names

    def take(self, mark: str) -> bool:
        found = self.text.startswith(mark, self.at)
        self.at += len(mark) * found
        return found

    def skip(self, pattern: re.Pattern[str]) -> bool:
        match = pattern.match(self.text, self.at)
        if match is None:
            return False
        self.at = match.end()
        return True


def _newest(node: Node) -> Node:
    """The table itself, or the last one of an array of tables."""
    last = len(node.below) - 1
    return node.below.get(last, node)


def _unquoted(key: str) -> str:
    if key[0] == '"':
        return str(tomllib.loads(f"key = {key}")["key"])
    return key.strip("'") if key[0] == "'" else key
