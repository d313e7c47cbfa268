"""A TOML text as a flat list of sections that join to the same text byte for byte.

First comes what stands before any header, then a section for each header line. A section owns the
empty lines before it and the comment lines directly above its header. A comment with empty lines
around it is a section of its own, without a header: a divider stays when its neighbours go.
"""

from __future__ import annotations

import re
import tomllib
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

from beamctl.files.locate import headers

BYTE_MARK = "\ufeff"
_COMMENT = r"(?:[ \t]*#[^\n]*(?:\n|\Z))"
_EMPTY = r"(?:[ \t\r]*\n|[ \t\r]+\Z)"
_BETWEEN = re.compile(
    rf"(?P<own>(?:{_COMMENT}+(?={_EMPTY}))?)(?P<loose>(?:{_EMPTY}+{_COMMENT}+)*?)"
    rf"(?P<before>{_EMPTY}*)(?P<lead>{_COMMENT}*)\Z"
)


@dataclass(frozen=True)
class Section:
    """Empty lines, comment lines, the line of the header, and the lines of what it holds."""

    before: str = ""
    lead: str = ""
    head: str = ""
    body: str = ""
    keys: tuple[str, ...] = ()  # of the header
    many: bool = False  # [[cue]]

    @property
    def text(self) -> str:
        """The section as it is written."""
        return self.before + self.lead + self.head + self.body

    @cached_property
    def data(self) -> dict[str, Any]:
        """Its own keys and values, without those of the sections within it."""
        return tomllib.loads(self.body)

    def renamed(self, keys: tuple[str, ...], written: str) -> Section:
        """The section under other keys, `written` as a header has them."""
        (found,), _ = headers(self.head)
        brackets = 1 + self.many
        left, right = self.head[: found.start + brackets], self.head[found.stop - brackets :]
        return replace(self, head=left + written + right, keys=keys)


@dataclass
class Sections:
    """A text taken apart, to be changed in `all`; `tail` is the empty lines at its end."""

    all: list[Section]
    tail: str = ""
    mark: str = ""  # some editors put one before the text
    eol: str = "\n"

    @property
    def text(self) -> str:
        """The sections joined; each begins on a line of its own."""
        parts = [section.text for section in self.all if section.text]
        whole = [p if p.endswith("\n") else p + self.eol for p in parts[:-1]] + parts[-1:]
        return self.mark + "".join(whole) + self.tail


def sections(text: str) -> Sections:
    """The sections of a text that `tomllib` accepts."""
    mark = BYTE_MARK if text.startswith(BYTE_MARK) else ""
    text = text.removeprefix(mark)
    found, done = headers(text)
    ends = [*(header.since for header in found), done]
    starts = [*(text.rfind("\n", 0, header.start) + 1 for header in found), len(text)]
    made, section, begun = list[Section](), Section(), 0
    for header, end, start in zip([*found, None], ends, starts, strict=True):
        own, loose, before, lead = _between(text, _line_end(text, end), start)
        made.append(replace(section, body=text[begun : _line_end(text, end)] + own))
        if loose:
            made.append(Section(body=loose))
        if header:
            begun = _line_end(text, header.stop)
            section = Section(before, lead, text[start:begun], "", header.keys, header.many)
    if before and lead:
        made.append(Section(body=before + lead))
    elif lead:
        made[-1] = replace(made[-1], body=made[-1].body + lead)
    eol = "\r\n" if "\r\n" in text else "\n"
    return Sections(made, "" if lead else before, mark, eol)


def _between(text: str, bottom: int, start: int) -> tuple[str, str, str, str]:
    """Comments and empty lines after an item: its own, loose ones, and those of a next header."""
    found = _BETWEEN.fullmatch(text, bottom, start)
    assert found, "nothing else can stand there"
    own, loose, before, lead = found.groups()
    return own, loose, before, lead


def _line_end(text: str, at: int) -> int:
    """Where the line that an item ends in is over; the start of a text is no line."""
    return (text.find("\n", at) + 1 or len(text)) if at else 0
