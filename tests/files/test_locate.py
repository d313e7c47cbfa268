"""Lines of keys, against texts whose writer kept count."""

from __future__ import annotations

import random
import tomllib
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from beamctl.files.locate import Key, locate

Place = tuple[Key, ...]
SCALARS = [
    "1", "-2.5", "true", '"a # b"', "'c \\'", '"q \\" ]"', "1979-05-27 07:32:00", '""', "''",
    '"""x"""', '"""\nx = 1\n[no]\n"""', "'''\ny = \"\"\"\n'''", '"""a\\"" ""b"""""', "nan",
]  # fmt: skip


class Writer:
    """Writes a random TOML text and the line of every key in it."""

    def __init__(self, rng: random.Random) -> None:
        self.rng = rng
        self.text = ""
        self.lines: dict[Place, int] = {}
        self.names = 0

    def document(self) -> None:
        self.table((), depth=0)

    def table(self, place: Place, depth: int) -> None:
        for _ in range(self.rng.randint(0, 3)):
            self.blank()
            self.pair(place, depth=0)
            self.text += self.rng.choice(["\n", "  # [x]\n", "\n\n"])
        if depth < 3:
            for _ in range(self.rng.randint(0, 2)):
                self.rng.choice([self.header, self.array_of_tables])(place, depth)

    def header(self, place: Place, depth: int) -> None:
        name, written = self.key()
        self.blank()
        self.mark((*place, name))
        self.text += f"[{self.dotted(place)}{written}] # c\n"
        self.table((*place, name), depth + 1)

    def array_of_tables(self, place: Place, depth: int) -> None:
        name, written = self.key()
        for index in range(self.rng.randint(1, 3)):
            self.blank()
            if index == 0:
                self.mark((*place, name))
            self.mark((*place, name, index))
            self.text += f"[[ {self.dotted(place)}{written} ]]\n"
            self.table((*place, name, index), depth + 1)

    def pair(self, place: Place, depth: int) -> None:
        for turn in range(self.rng.choice([1, 1, 1, 2, 3])):
            name, written = self.key()
            self.text += ("." if turn else "") + written
            place = (*place, name)
            self.mark(place)
        self.text += self.rng.choice([" = ", "=", "\t=\t"])
        self.value(place, depth)

    def value(self, place: Place, depth: int) -> None:
        kind = self.rng.choice(["scalar", "array", "inline"]) if depth < 3 else "scalar"
        if kind == "scalar":
            self.text += self.rng.choice(SCALARS)
        elif kind == "array":
            self.text += "["
            for index in range(self.rng.randint(0, 3)):
                self.text += self.rng.choice(["", " ", "\n  ", " # , ]\n"])
                self.mark((*place, index))
                self.value((*place, index), depth + 1)
                self.text += self.rng.choice([",", " ,", "\n,"])
            self.text += "]"
        else:
            self.text += "{"
            for index in range(self.rng.randint(0, 2)):
                self.text += ", " if index else ""
                self.pair(place, depth + 1)
            self.text += "}"

    def key(self) -> tuple[str, str]:
        self.names += 1
        name = f"k{self.names}"
        forms = [(name, name), (f"{name}.]#", f'"{name}.]#"'), (f'{name} "', f"'{name} \"'")]
        return self.rng.choice([*forms, (f"{name}é", f'"{name}\\u00e9"')])

    def dotted(self, place: Place) -> str:
        quoted = [name.replace('"', '\\"') for name in place if isinstance(name, str)]
        return "".join(f'"{name}".' for name in quoted)

    def mark(self, place: Place) -> None:
        self.lines[place] = self.text.count("\n") + 1

    def blank(self) -> None:
        self.text += self.rng.choice(["", "", "\n", "# key = 1\n", "   "])


def places(data: Any, place: Place = ()) -> list[Place]:
    """Every place of parsed data."""
    if not isinstance(data, dict | list):
        return [place]
    inner = data.items() if isinstance(data, dict) else enumerate(data)
    return [place] * bool(place) + [p for key, value in inner for p in places(value, (*place, key))]


@given(st.integers(0, 2**32))
@settings(max_examples=300, deadline=None)
def test_every_key_is_found_on_its_line(seed: int) -> None:
    writer = Writer(random.Random(seed))
    writer.document()
    tree = locate(writer.text)
    assert set(writer.lines) == set(places(tomllib.loads(writer.text)))
    found = {place: tree.line_of(place) for place in writer.lines}
    assert found == writer.lines
    assert all(len(tree.path(place)) == len(place) + 1 for place in writer.lines)


SHEET = """format = 1

[beam.whisper]
panel = "prow"  # the 'big' one
[[cue]]
ref = "1"
[[cue.act]]
beam = "whisper"
[[cue.act]]
beam = "whisper"
at_s = 2.0
"""


@pytest.mark.parametrize(
    ("place", "line"),
    [
        ((), 1),
        (("format",), 1),
        (("nothing",), 1),
        (("beam", "whisper", "panel"), 4),
        (("beam", "whisper", "reach"), 3),
        (("cue", 0), 5),
        (("cue", 0, "act", 1, "at_s"), 11),
        (("cue", 0, "act", 1, "depth"), 9),
        (("cue", 0, "act", 1, "at_s", "constrained-float"), 11),
        (("cue", 7, "ref"), 5),
    ],
)
def test_an_unwritten_key_has_the_line_of_its_table(place: Place, line: int) -> None:
    assert locate(SHEET).line_of(place) == line


def test_a_table_may_come_after_its_own_subtable() -> None:
    tree = locate("[a.b]\nc = 1\n[a]\nd = 2\n")
    assert (tree.line_of(("a",)), tree.line_of(("a", "b"))) == (3, 1)


def test_windows_line_ends_count_as_one() -> None:
    assert locate("a = 1\r\nb = [\r\n 1,\r\n 2]\r\nc = 3\r\n").line_of(("b", 1)) == 4
