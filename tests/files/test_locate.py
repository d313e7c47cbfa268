"""Lines of keys, against texts whose writer kept count."""

from __future__ import annotations

import random
import tomllib
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from support.tomlwriter import Place, Writer

from beamctl.files.locate import locate


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
