"""The fields of the show's tables as a person reads and types them. Nothing here draws or asks.

What is typed becomes plain data, as TOML has it; the model of the file says whether it will do, and
what it expected when it will not.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from types import UnionType
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import BaseModel, ConfigDict, TypeAdapter, ValidationError
from pydantic.fields import FieldInfo

from beamctl.desk.box import Box
from beamctl.show.expected import Expected
from beamctl.show.rig import Grid, Hexagon

UNSET = "--"
ON_ONE_LINE = (Grid, Hexagon)  # tables short enough to be typed as one value

_NUMBER = re.compile(r"[-+]?(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?")
_AS_TYPED = (
    (" in quotes", ""),
    ('"', ""),
    (" that is not empty", ""),
    ("a list", "words"),
    ("3 numbers, in metres", "x across, y from the stage, z up, in metres"),
)

Then = Callable[[Any], str]  # takes a value; returns why it will not do, or ""


@dataclass(frozen=True, slots=True)
class Field:
    """One key of a table.

    expects   in words, for somebody who types it: "a number from 0 to 1, in metres"
    choices   the words that it takes; `closed` when it takes nothing else
    optional  it may be taken away; then `default` holds
    """

    model: type[BaseModel]
    key: str
    expects: str
    choices: tuple[str, ...] = ()
    closed: bool = False
    optional: bool = False
    default: Any = None


@cache
def fields(model: type[BaseModel]) -> tuple[Field, ...]:
    """The fields of a model that are typed as one value, in its own order; tables are left out."""
    expected = Expected(model)
    return tuple(
        _field(model, info.alias or name, info, expected)
        for name, info in model.model_fields.items()
        if all(_typed(kind) for kind in _kinds(info.annotation))
    )


def field_of(model: type[BaseModel], key: str) -> Field:
    """One field of a model; KeyError when it has none of that name."""
    for field in fields(model):
        if field.key == key:
            return field
    raise KeyError(key)


def value_of(table: BaseModel, key: str) -> Any:
    """What stands at `key` of a table that was read, or the default that holds instead."""
    return getattr(table, _name_of(type(table), key))


def is_written(table: BaseModel, key: str) -> bool:
    """Whether the file names `key`; else its default holds."""
    return _name_of(type(table), key) in table.model_fields_set


def written(value: Any) -> str:
    """`value` as a person types it: "0.7", "0 0 3", "A B C", "8 columns, 8 rows, 10 mm"."""
    if value is None or value == "":
        return UNSET
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int | float):
        return f"{value:.10g}"
    if isinstance(value, BaseModel | Mapping):
        return ", ".join(f"{written(v)} {k.rpartition('_')[2]}" for k, v in dict(value).items())
    if isinstance(value, Sequence) and not isinstance(value, str):
        texts = [written(one) for one in value]
        return (", " if any(" " in text for text in texts) else " ").join(texts)
    return str(value)


def read(model: type[BaseModel], key: str, text: str) -> Any:
    """Plain data of what was typed for `key` of a model; None takes an optional key away.

    ValueError says in one line what was expected.
    """
    field, text = field_of(model, key), text.strip()
    if text in ("", UNSET):
        if field.optional:
            return None
        raise ValueError(f"it cannot be left out: expected {field.expects}")
    adapter, said = _adapter(model, key), field.expects
    for guess in _guesses(text, field):
        try:
            return adapter.dump_python(adapter.validate_python(guess), mode="json", by_alias=True)
        except ValidationError as failure:
            said = _said(failure) or said
    raise ValueError(f"{text}: expected {said}")


def field_box(title: str, field: Field, now: Any, then: Then, choices: Sequence[str] = ()) -> Box:
    """A box that changes one field from `now`, and gives `then` what was read.

    `choices` are the names that it takes, where the caller knows them. A text to be reworked stands
    there already; what is left as it was changes nothing.
    """
    told, names = written(now), tuple(choices) or field.choices
    if names and field.optional and field.default is None:
        names = (*names, UNSET)
    strict = bool(choices) or field.closed
    fresh = bool(names) or told == UNSET or isinstance(now, int | float)
    typed = "" if fresh else told

    def use(text: str) -> str:
        if strict and not text:
            return "Nothing matches."
        if text in (typed, told):
            return ""
        try:
            value = read(field.model, field.key, text)
        except ValueError as error:
            return str(error)
        return then(value)

    away = f" {UNSET} leaves it out." if field.optional else ""
    return Box(
        title,
        f"Now {told}.{away}",
        "one of these" if choices else field.expects,
        use=use,
        choices=names,
        strict=strict,
        typed=typed,
        prefilled=not isinstance(now, str),
        picked=names.index(told) if told in names else None,
    )


def _field(model: type[BaseModel], key: str, info: FieldInfo, expected: Expected) -> Field:
    kinds = list(_kinds(info.annotation))
    words = [word for kind in kinds for word in _words(kind)]
    nested = next((kind for kind in kinds if kind in ON_ONE_LINE), None)
    return Field(
        model,
        key,
        _numbers(nested) if nested else _as_typed(expected.at((key,))),
        tuple(words),
        closed=all(_words(kind) for kind in kinds),
        optional=not info.is_required(),
        default=None if info.is_required() else info.get_default(),
    )


def _numbers(model: type[BaseModel]) -> str:
    return f"{len(model.model_fields)} numbers: {', '.join(model.model_fields)}"


def _as_typed(expects: str) -> str:
    for before, after in _AS_TYPED:
        expects = expects.replace(before, after)
    return expects


def _kinds(annotation: Any) -> Iterator[Any]:
    """What may stand at one key; None is left out, and so is what only narrows it down."""
    if get_origin(annotation) in (Union, UnionType):
        for option in get_args(annotation):
            yield from _kinds(option)
    elif get_origin(annotation) is Annotated:
        yield from _kinds(get_args(annotation)[0])
    elif annotation is not type(None):
        yield annotation


def _typed(kind: Any) -> bool:
    """False for tables, for lists of them, and for the number of the format."""
    if get_origin(kind) is tuple:
        return not any(_is_table(inner) for inner in get_args(kind))
    return not _is_table(kind) and get_origin(kind) is not dict and kind != Literal[1]


def _is_table(kind: Any) -> bool:
    return isinstance(kind, type) and issubclass(kind, BaseModel) and kind not in ON_ONE_LINE


def _words(kind: Any) -> tuple[str, ...]:
    if kind is bool:
        return ("true", "false")
    return get_args(kind) if get_origin(kind) is Literal else ()


def _name_of(model: type[BaseModel], key: str) -> str:
    return next((name for name, info in model.model_fields.items() if info.alias == key), key)


@cache
def _adapter(model: type[BaseModel], key: str) -> TypeAdapter[Any]:
    """Looks through one value as the model itself would."""
    info = model.model_fields[_name_of(model, key)]
    kind: Any = Annotated[info.annotation, *info.metadata] if info.metadata else info.annotation
    return TypeAdapter(kind, config=ConfigDict(strict=True, allow_inf_nan=False))


def _guesses(text: str, field: Field) -> Iterator[Any]:
    """What a text may stand for; the model takes the one that fits."""
    if text in ("true", "false"):
        yield text == "true"
    numbers = [_number(word) for word in _NUMBER.findall(text)]
    for kind in _kinds(field.model.model_fields[_name_of(field.model, field.key)].annotation):
        if kind in ON_ONE_LINE and len(numbers) == len(kind.model_fields):
            yield dict(zip(kind.model_fields, numbers, strict=True))
    words = text.split(",") if "," in text else text.split()
    words = [word.strip() for word in words if word.strip()]
    if all(_NUMBER.fullmatch(word) for word in words):
        yield from numbers[:1] if len(numbers) == 1 else [numbers]
    yield words
    yield text


def _number(word: str) -> int | float:
    return int(word) if word.lstrip("+-").isdigit() else float(word)


def _said(failure: ValidationError) -> str:
    """What the model's own rule expected, in its words; "" for the plain kinds."""
    errors = failure.errors(include_url=False)
    return next((str(e["ctx"]["error"]) for e in errors if e["type"] == "value_error"), "")
