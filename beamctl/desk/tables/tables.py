"""The tables of the show's files as a screen lists them: what each says, and where it stands."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Annotated, Any

import pydantic

from beamctl.acoustics.exposure import TABLES
from beamctl.desk.forms import Field, fields, is_written, value_of, written
from beamctl.show.checks import GUARD, HOUSE, RIG
from beamctl.show.edits import Edit, Place, Set
from beamctl.show.fields import Model
from beamctl.show.limits import Role
from beamctl.show.show import Show

WIRE = "wire.toml"
ALLOW: Place = ("allow",)
SHAPES = ("grid", "hex", "cells")  # a panel has one of them

Names = Mapping[str, Sequence[str]]


@dataclass(frozen=True, slots=True)
class Line:
    """One key of a table and what stands there; `given` when the file names it.

    choices  names to pick from, where there are such
    """

    key: str
    field: Field
    now: Any
    given: bool = True
    choices: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Table:
    """One table; `named` when it may be given another name or be taken away.

    title  as it is called on the screen, and the name by which a cursor keeps to it
    """

    title: str
    file: str
    place: Place
    lines: tuple[Line, ...]
    named: bool = False


class Allowed(Model):
    """What a peer of the wire may do."""

    roles: Annotated[tuple[Role, ...], pydantic.Field(min_length=1, strict=False)]


def house_tables(show: Show) -> tuple[Table, ...]:
    """Air, spots, blocks, surfaces."""
    house = show.house
    air = Table("air", HOUSE, ("air",), _lines(house.air))
    kinds: dict[str, Mapping[str, pydantic.BaseModel]] = {
        "spot": house.spot,
        "block": house.block,
        "surface": house.surface,
    }
    return air, *(
        _named(kind, name, table, HOUSE) for kind, of in kinds.items() for name, table in of.items()
    )


def rig_tables(show: Show) -> tuple[Table, ...]:
    """The panels, then what holds for all of them."""
    panels = [_named("panel", name, panel, RIG) for name, panel in show.rig.panel.items()]
    return *panels, Table("rates", RIG, (), _lines(show.rig))


def cap_tables(show: Show) -> tuple[Table, ...]:
    """What the venue allows."""
    names = {"seats_table": tuple(TABLES), "crew_table": tuple(TABLES)}
    return (Table("caps", GUARD, (), _lines(show.guard, names)),)


def wire_tables(show: Show) -> tuple[Table, ...]:
    """The settings of the wire, and who may speak."""
    (roles,) = fields(Allowed)
    allowed = tuple(Line(peer, roles, may) for peer, may in show.wire.allow.items())
    return Table("wire", WIRE, (), _lines(show.wire)), Table("allow", WIRE, ALLOW, allowed)


def change(table: Table, line: Line, value: Any) -> Edit:
    """The edit that puts `value` at a line; None takes the key away."""
    now = "--" if value is None else written(value)
    steps = [Set(table.file, table.place, line.key, value)]
    if line.key in SHAPES and value is not None:
        others = (one for one in table.lines if one.key in SHAPES and one.key != line.key)
        steps += [Set(table.file, table.place, o.key, None) for o in others if o.now is not None]
    return Edit(f"{table.title} {line.key} {now}", tuple(steps))


def _named(kind: str, name: str, table: pydantic.BaseModel, file: str) -> Table:
    return Table(f"{kind} {name}", file, (kind, name), _lines(table), named=True)


def _lines(table: pydantic.BaseModel, names: Names | None = None) -> tuple[Line, ...]:
    return tuple(
        Line(
            field.key,
            field,
            value_of(table, field.key),
            is_written(table, field.key),
            tuple((names or {}).get(field.key, ())),
        )
        for field in fields(type(table))
    )
