"""References for cues: free ones between two neighbours, and whole runs counted anew."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterator
from decimal import Decimal
from fractions import Fraction
from itertools import count, takewhile

from beamctl.show.order import natural_key

_PLAIN = re.compile(r"[0-9]{1,9}(\.[0-9]{1,9})?")
_PARTS = re.compile(r"([0-9.]*)([A-Za-z]*)")


def between(low: str, high: str, taken: Collection[str]) -> str:
    """A reference that counts after `low`, before `high`, and as none of those `taken`.

    "" stands for no bound; a `high` that does not count after `low` bounds nothing. ValueError when
    there is no room.
    """
    least = natural_key(low) if low else None
    most = natural_key(high) if high else None
    if least and most and most <= least:
        high, most = "", None
    keys = {natural_key(ref) for ref in taken}
    for ref in _candidates(low, high):
        key = natural_key(ref)
        if (not least or least < key) and (not most or key < most) and key not in keys:
            return ref
    raise ValueError(f"no number is free between {low or 'the top'} and {high}: renumber first")


def counted(start: str, step: str, many: int) -> list[str]:
    """`many` references from `start` on, `step` apart; ValueError when one is no plain number."""
    for text in (start, step):
        if not _PLAIN.fullmatch(text):
            raise ValueError(f'"{text}", expected a number such as 10 or 0.5')
    if not Decimal(step):
        raise ValueError("a step of 0 would give every cue the same number")
    return [_written(Decimal(start) + i * Decimal(step)) for i in range(many)]


def _written(number: Decimal) -> str:
    text = f"{number:f}"
    return text.rstrip("0").rstrip(".") if "." in text else text


def _candidates(low: str, high: str) -> Iterator[str]:
    """What may do, the plainest first: whole numbers, then decimals, then letters."""
    (a, letters), (b, _) = _parts(low or "0"), _parts(high)
    if not high:
        yield from (str(n) for n in count(int(a[0]) + 1))
    yield str((int(a[0]) + int(b[0])) // 2)
    pairs = takewhile(lambda pair: pair[0] == pair[1], zip(a, b, strict=False))
    same = max(1, len(list(pairs)))
    low_decimal = a[same] if same < len(a) else ""
    high_decimal = b[same] if a[0] == b[0] and same < len(b) else None
    stem = ".".join(a[:same])
    yield from (f"{stem}.{digits}" for digits in _decimals(low_decimal, high_decimal))
    if letters and letters[-1] not in "Zz":
        yield f"{low[:-1]}{chr(ord(letters[-1]) + 1)}"
    if low:
        yield f"{low}M"


def _parts(ref: str) -> tuple[list[str], str]:
    """Whole number and decimals, and the letters behind them."""
    match = _PARTS.fullmatch(ref)
    return (match[1].split("."), match[2]) if match else ([], "")


def _decimals(low: str, high: str | None) -> Iterator[str]:
    """The fewest digits of a decimal about half-way from `low` to `high`; None is 1."""
    a = Fraction(int(low or 0), 10 ** len(low))
    b = Fraction(int(high), 10 ** len(high)) if high is not None else Fraction(1)
    for digits in range(1, max(len(low), len(high or "")) + 2):
        half = int((a + b) / 2 * 10**digits)
        if a < Fraction(half, 10**digits) < b:
            yield f"{half:0{digits}}"
            return
