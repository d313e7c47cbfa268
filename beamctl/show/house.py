"""house.toml: the room. Axes: x across, y away from the stage, z up, metres."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from beamctl.show.fields import Model, Name, Text, Vector


class AirSpec(Model):
    """Air readings; the ranges are those of the formulas in acoustics/air.py."""

    temperature_c: float = Field(20.0, ge=0.0, le=30.0)
    humidity_pct: float = Field(50.0, ge=5.0, le=100.0)
    pressure_kpa: float = Field(101.325, ge=75.0, le=102.0)


class Spot(Model):
    """A named target."""

    at_m: Vector


class Block(Model):
    """Seats that share a row grid, an ear height and a cap class. Seat names are row + number."""

    class_: Literal["seats", "crew"] = Field(alias="class")
    first_m: Vector
    rows: Annotated[tuple[Text, ...], Field(min_length=1, max_length=200, strict=False)]
    row_step_m: Vector
    seats: int = Field(ge=1, le=500)
    seat_step_m: Vector

    @model_validator(mode="after")
    def _rows_differ(self) -> Self:
        if len(set(self.rows)) != len(self.rows):
            raise ValueError("every row of a block needs its own name")
        return self

    def seat_points(self) -> dict[str, tuple[float, float, float]]:
        """Ear position in metres (room axes) of every seat, by name ("B4")."""
        first, row, step = self.first_m, self.row_step_m, self.seat_step_m
        return {
            f"{name}{s + 1}": (
                first[0] + r * row[0] + s * step[0],
                first[1] + r * row[1] + s * step[1],
                first[2] + r * row[2] + s * step[2],
            )
            for r, name in enumerate(self.rows)
            for s in range(self.seats)
        }


class Surface(Model):
    """A flat rectangle that returns the carrier; `reflection` is a pressure ratio."""

    corner_m: Vector
    along_m: Vector
    up_m: Vector
    reflection: float = Field(ge=0.0, le=1.0)


class House(Model):
    """house.toml."""

    format: Literal[1]
    air: AirSpec = AirSpec()
    spot: dict[Name, Spot] = Field(default_factory=dict)
    block: dict[Name, Block] = Field(default_factory=dict)
    surface: dict[Name, Surface] = Field(default_factory=dict)

    def seats(self) -> dict[str, tuple[float, float, float]]:
        """Every seat of every block; on a repeated name the first block's seat is kept."""
        found: dict[str, tuple[float, float, float]] = {}
        for block in self.block.values():
            for name, point in block.seat_points().items():
                found.setdefault(name, point)
        return found
