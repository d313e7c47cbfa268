"""Keys and values as TOML text: what an edit writes into a section, and where in it.

A new key stands where its model has it among the others. A comment stays when its key goes; only
comments inside a value that is replaced go with it.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import tomlkit
from tomlkit.exceptions import ConvertError

from beamctl.errors import ShowError
from beamctl.files.locate import Pair, pairs

Order = Sequence[str]  # keys of a table as its model has them


def written(value: Any) -> str:
    """A value on one line; ShowError for what TOML has no form of."""
    if isinstance(value, Mapping):
        return f"{{ {', '.join(_lines(value))} }}" if value else "{}"
    if isinstance(value, list | tuple):
        return f"[{', '.join(map(written, value))}]"
    try:
        text = str(tomlkit.item(value).as_string())
        text.encode()
    except (ConvertError, UnicodeEncodeError):
        raise ShowError(
            f"{value!a:.60} cannot be written", "expected a number, a text, a list or a table"
        ) from None
    return text


def written_keys(keys: Sequence[str]) -> str:
    """Keys as a header has them; those that are no plain words in quotes."""
    return ".".join(tomlkit.key(key).as_string() for key in keys)


def body(table: Mapping[str, Any], order: Order, eol: str) -> str:
    """The lines of a table, its keys in the order of its model; None is no value."""
    there = {key: value for key, value in table.items() if value is not None}
    ranked = {key: there[key] for key in sorted(there, key=lambda key: rank(key, order))}
    return "".join(line + eol for line in _lines(ranked))


def with_value(text: str, key: str, value: Any, order: Order, eol: str) -> str:
    """The lines of a section where `key` has the value; None takes the key away."""
    old = [pair for pair in pairs(text) if pair.keys[0] == key]
    if len(old) == 1 and old[0].keys == (key,) and value is not None:
        return text[: old[0].value] + written(value) + text[old[0].stop :]
    for pair in reversed(old):  # key.inner = … stands on several lines
        text = _without(text, pair)
    return text if value is None else _with_new(text, key, value, order, eol)


def _lines(table: Mapping[str, Any]) -> list[str]:
    return [f"{written_keys([key])} = {written(value)}" for key, value in table.items()]


def rank(key: str, order: Order) -> int:
    """The place of a key among the others of its table; unknown ones come last."""
    return order.index(key) if key in order else len(order)


def _without(text: str, pair: Pair) -> str:
    """The text without the line or lines of a pair; its comment keeps the place."""
    start, end = text.rfind("\n", 0, pair.start) + 1, text.find("\n", pair.stop) + 1 or len(text)
    return text[:start] + text[pair.stop : end].lstrip() + text[end:]


def _with_new(text: str, key: str, value: Any, order: Order, eol: str) -> str:
    """The text with a key that it had not, after the last of those that come before it."""
    own = rank(key, order)
    earlier = [pair for pair in pairs(text) if rank(pair.keys[0], order) <= own]
    at, indent = 0, ""
    if earlier:
        above = max(earlier, key=lambda pair: (rank(pair.keys[0], order), pair.start))
        at = text.find("\n", above.stop) + 1 or len(text)
        indent = text[text.rfind("\n", 0, above.start) + 1 : above.start]
    head = text[:at] + eol if at and not text[:at].endswith("\n") else text[:at]
    return head + indent + "".join(_lines({key: value})) + eol + text[at:]
