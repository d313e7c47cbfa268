"""rig.toml: the panels as they hang, and what feeds them."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, model_validator

from beamctl.show.fields import Model, Name, Vector


class Grid(Model):
    """Cells in columns and rows, counted from the upper left as seen from behind."""

    columns: int = Field(ge=1, le=64)
    rows: int = Field(ge=1, le=64)
    pitch_mm: float = Field(gt=1.0, le=100.0)


class Hexagon(Model):
    """Cells in rings around one; counted row by row from the top, left to right."""

    rings: int = Field(ge=0, le=16)
    pitch_mm: float = Field(gt=1.0, le=100.0)


class PanelSpec(Model):
    """One panel of rig.toml."""

    at_m: Vector
    pan_deg: float = Field(0.0, ge=-180.0, le=180.0)
    tilt_deg: float = Field(0.0, ge=-90.0, le=90.0)
    roll_deg: float = Field(0.0, ge=-180.0, le=180.0)
    carrier_hz: float = Field(40_000.0, ge=24_000.0, le=80_000.0)
    grid: Grid | None = None
    hex: Hexagon | None = None
    cells: str | None = None
    loom: Literal["each", "columns", "rows", "csv"] = "each"
    first_feed: int = Field(1, ge=1, le=1024)
    volts_at_full_scale: float = Field(gt=0.0, le=200.0)
    max_volts: float = Field(gt=0.0, le=200.0)
    level_db_30cm_10v: float = Field(ge=60.0, le=140.0)
    cell_mm: float = Field(gt=1.0, le=100.0)
    resonance_hz: float = Field(ge=20_000.0, le=100_000.0)
    q: float = Field(gt=0.0, le=200.0)
    measured: str = ""

    @model_validator(mode="after")
    def _one_shape(self) -> Self:
        shapes = [k for k in ("grid", "hex", "cells") if getattr(self, k) is not None]
        if len(shapes) != 1:
            raise ValueError("one of grid, hex or cells says where the cells are")
        if self.loom == "csv" and self.cells is None:
            raise ValueError('loom = "csv" needs cells = "FILE.csv" with a feed column')
        return self

    @property
    def full_drive(self) -> float:
        """Largest feed value in full scales: converter full scale or the cell's rating."""
        return min(1.0, self.max_volts / self.volts_at_full_scale)


class Rig(Model):
    """rig.toml."""

    format: Literal[1]
    rate_hz: int = Field(192_000, ge=88_200, le=768_000, multiple_of=4)
    quantum: int = Field(256, ge=16, le=4096)
    ring_ms: float | None = Field(None, ge=4.0, le=500.0)  # None: 12 real-time, 32 ordinary
    panel: dict[Name, PanelSpec] = Field(min_length=1)
