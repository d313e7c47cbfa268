"""Sections: a text taken apart and joined again, byte for byte."""

from __future__ import annotations

import random
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from support.tomlwriter import Writer

from beamctl.files.sections import sections

SCENE = Path(__file__).parents[2] / "scenes" / "night-tram"
TEXT = '''\
# a show
format = 1
# of one file

# --- beams ---

# the first
[beam.a]  # small
panel = "prow"
text = """
[[cue]]
# no comment"""
# of a too
# and above b
[ beam . "b" ]
# nothing yet


# --- cues ---

[[cue]]
ref = "1"
list = [
  # [beam.c]
  "[[cue]]", 2,
] # end

# the last words

'''


def test_each_line_belongs_to_one_section() -> None:
    parts = sections(TEXT)
    assert [section.keys for section in parts.all] == [
        (), (), ("beam", "a"), ("beam", "b"), (), ("cue",), (),
    ]  # fmt: skip
    top, divider, a, b, _, cue, words = parts.all
    assert top.body == "# a show\nformat = 1\n# of one file\n"
    assert divider.body == "\n# --- beams ---\n"
    assert (a.before, a.lead, a.head) == ("\n", "# the first\n", "[beam.a]  # small\n")
    assert a.data["text"] == "[[cue]]\n# no comment"
    assert (b.before, b.lead, b.body) == ("", "# of a too\n# and above b\n", "# nothing yet\n")
    assert (cue.before, cue.lead, cue.many) == ("\n", "", True)
    assert cue.body.endswith("] # end\n")
    assert (words.body, parts.tail) == ("\n# the last words\n", "\n")


@pytest.mark.parametrize(
    "text", ["", "\n", "# a", "a = 1", "a = 1\n# b", "[a]", "\n[a]\n\n", " [a]"]
)
def test_the_smallest_texts(text: str) -> None:
    assert sections(text).text == text


@given(st.integers(0, 2**32), st.sampled_from(["", "\ufeff"]))
@settings(max_examples=200, deadline=None)
def test_the_sections_of_any_text_join_to_it(seed: int, mark: str) -> None:
    writer = Writer(random.Random(seed))
    writer.document()
    parts = sections(mark + writer.text)
    assert parts.text == mark + writer.text
    heads = [section.head for section in parts.all if section.head]
    assert len(heads) == len([line for line in writer.text.split("\n") if _is_header(line)])
    for section in parts.all:
        assert isinstance(section.data, dict), "a body can be read alone"


def _is_header(line: str) -> bool:
    return line.lstrip().startswith("[") and line.rstrip().endswith(("# c", "]]"))


@pytest.mark.parametrize("path", sorted(SCENE.glob("*.toml")), ids=lambda path: path.name)
def test_the_show_that_ships_joins_with_every_line_end(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    for whole in (text, text.replace("\n", "\r\n"), text.rstrip("\n"), text + "\n\n \n"):
        assert sections(whole).text == whole


def test_a_header_takes_another_name_and_keeps_its_comment() -> None:
    a, b = (section for section in sections(TEXT).all if section.keys[:1] == ("beam",))
    assert a.renamed(("beam", "c"), "beam.c").head == "[beam.c]  # small\n"
    assert b.renamed(("beam", "c"), "beam.c").head == "[beam.c]\n"
    cue = sections("[[ cue ]] # x\n").all[1]
    assert cue.renamed(("act",), "act").head == "[[act]] # x\n"
