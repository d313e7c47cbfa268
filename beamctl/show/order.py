"""The order in which cue references are counted: "12", "12.5", "12.5A", "12A", "13".

A point counts as a decimal, as cues are inserted between others: "12.25" stands between "12.2" and
"12.3". Letters come after every decimal of their number.
"""

from __future__ import annotations

import re

_PARTS = re.compile(r"([0-9]+)((?:\.[0-9]+)*)([A-Za-z]*)")

OrderKey = tuple[int, str, tuple[tuple[int, str], ...]]


def natural_key(ref: str) -> OrderKey:
    """Sort key of a cue reference; ValueError when it is none. Case of letters does not count."""
    match = _PARTS.fullmatch(ref)
    if match is None:
        raise ValueError(f"{ref!r} is no cue reference")
    whole, decimals, letters = match.groups()
    digits = whole.lstrip("0")  # by length, then by digits: any number of them
    parts = [(1, part.rstrip("0")) for part in decimals.split(".")[1:]]
    return len(digits), digits, (*parts, *[(2, letters.upper())] * bool(letters))
