"""What a place in a show file expects, told from the schema of the model that reads it."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from difflib import get_close_matches
from typing import Any

from pydantic import BaseModel

Key = str | int

Schema = dict[str, Any]
UNITS = {
    "m": "metres", "mm": "millimetres", "hz": "hertz", "deg": "degrees", "db": "decibels",
    "s": "seconds", "ms": "milliseconds", "c": "degrees Celsius", "pct": "percent",
    "kpa": "kilopascals", "volts": "volts rms",
}  # fmt: skip
KINDS = {"string": "a text in quotes", "boolean": "true or false"}
A_NAME = "a name of up to 32 letters, digits, - and _, a letter first"


class Expected:
    """Answers for one model of a show file; locations are pydantic's error locations."""

    def __init__(self, model: type[BaseModel]) -> None:
        self.root: Schema = model.model_json_schema()

    def known(self, location: Sequence[Key]) -> tuple[Key, ...]:
        """The part of a location that is written in the file: without union tags and the like."""
        schema, depth = self.root, 0
        while depth < len(location) and (inner := self._step(schema, location[depth])):
            schema, depth = inner, depth + 1
        return tuple(location[:depth])

    def at(self, location: Sequence[Key]) -> str:
        """What is expected at a known location: "a number from 0 to 1"."""
        schema = self.root
        for key in location:
            schema = self._step(schema, key) or {}
        names = [key for key in location if isinstance(key, str)]
        texts = [self._describe(option, names) for option in self._options(schema)]
        return " or ".join(texts)

    def near(self, table: Sequence[Key], key: str) -> str:
        """What the unknown `key` of a table may have meant."""
        schema = self.root
        for name in table:
            schema = self._step(schema, name) or {}
        keys = [k for option in self._options(schema) for k in option.get("properties", ())]
        match = get_close_matches(key, keys, n=1)
        return f"did you mean {match[0]}?" if match else f"expected one of {', '.join(keys)}"

    def _options(self, schema: Schema) -> Iterator[Schema]:
        """The schemas that may stand at one place, references followed, null left out."""
        if reference := schema.get("$ref"):
            yield from self._options(self.root["$defs"][reference.rpartition("/")[2]])
        elif "anyOf" in schema:
            for option in schema["anyOf"]:
                yield from self._options(option)
        elif schema.get("type") != "null":
            yield schema

    def _step(self, schema: Schema, key: Key) -> Schema | None:
        for option in self._options(schema):
            if found := _member(option, key):
                return found
        return None

    def _describe(self, schema: Schema, names: Sequence[str]) -> str:
        kind = schema.get("type")
        if "const" in schema:
            return str(schema["const"])
        if "enum" in schema:
            return _either([f'"{choice}"' for choice in schema["enum"]])
        if kind in ("number", "integer"):
            return _number(schema, names[-1])
        if kind == "object":
            whole = "properties" in schema
            return "a table" if whole else f"a table such as [{'.'.join(names)}.NAME]"
        if kind == "array":
            return self._list(schema, names)
        if "pattern" in schema:
            return A_NAME
        most = f" of 1 to {schema['maxLength']} characters" if "maxLength" in schema else ""
        return KINDS.get(str(kind), "something else") + most

    def _list(self, schema: Schema, names: Sequence[str]) -> str:
        if "prefixItems" in schema:
            return f"{len(schema['prefixItems'])} numbers{_unit(names[-1])}"
        items = next(self._options(schema.get("items", {})))
        if items.get("type") == "object":
            return f"tables such as [[{'.'.join(names)}]]"
        least = " that is not empty" if schema.get("minItems") else ""
        return f"a list{least}, each {self._describe(items, names)}"


def _member(schema: Schema, key: Key) -> Schema | None:
    """Schema of a key of a table or of an element of a list."""
    if isinstance(key, int):
        fixed = schema.get("prefixItems", ())
        return fixed[key] if key < len(fixed) else schema.get("items")
    if key in schema.get("properties", {}):
        found: Schema = schema["properties"][key]
        return found
    free = [*schema.get("patternProperties", {}).values(), schema.get("additionalProperties")]
    return free[0] or None if key != "[key]" else None


def _number(schema: Schema, name: str) -> str:
    text = "a whole number" if schema["type"] == "integer" else "a number"
    low, high = schema.get("minimum"), schema.get("maximum")
    if (above := schema.get("exclusiveMinimum")) is not None:
        text += f" above {above:g}" + (f", up to {high:.10g}" if high is not None else "")
    elif low is not None and high is not None:
        text += f" from {low:.10g} to {high:.10g}"
    if step := schema.get("multipleOf"):
        text += f", a multiple of {step}"
    return text + _unit(name)


def _unit(name: str) -> str:
    """The unit in a key's name, as ", in metres"."""
    if name.endswith("_per_s"):
        return ", per second"
    words = reversed(name.split("_")[1:] if name[0] != "v" else name.split("_"))
    return next((f", in {UNITS[word]}" for word in words if word in UNITS), "")


def _either(choices: Sequence[str]) -> str:
    return choices[0] if len(choices) == 1 else f"{', '.join(choices[:-1])} or {choices[-1]}"
