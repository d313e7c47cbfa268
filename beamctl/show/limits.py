"""guard.toml and wire.toml: what the venue allows, and who on the network may speak."""

from __future__ import annotations

import ipaddress
from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from beamctl.show.fields import Model, Text

Table = Literal["irpa-1984-public", "irpa-1984-workers", "health-canada-1991"]
Role = Literal["read", "trigger", "aim", "hush"]


class Signed(Model):
    """The venue's name under guard, rig and house."""

    by: Text
    on: Text
    digest: Text


class Guard(Model):
    """guard.toml."""

    format: Literal[1]
    seats_table: Table = "irpa-1984-public"
    crew_table: Table = "irpa-1984-workers"
    seats_db: float = Field(100.0, ge=0.0, le=115.0)
    crew_db: float = Field(110.0, ge=0.0, le=115.0)
    averaging_s: float = Field(1.0, gt=0.0, le=3600.0)
    dose_window_s: float = Field(3600.0, gt=0.0, le=86_400.0)
    uncalibrated_margin_db: float = Field(10.0, ge=0.0, le=40.0)
    signed: Signed | None = None


class Wire(Model):
    """wire.toml."""

    format: Literal[1]
    listen: str = Field("127.0.0.1:61740", pattern=r"^.+:[0-9]{1,5}$")
    rate_per_s: float = Field(50.0, gt=0.0, le=10_000.0)
    heartbeat_s: float = Field(1.0, ge=0.1, le=60.0)
    strict_standby: bool = False
    allow: dict[str, Annotated[tuple[Role, ...], Field(strict=False)]] = {}

    @model_validator(mode="after")
    def _addresses(self) -> Self:
        for address in self.allow:
            ipaddress.ip_network(address, strict=False)
        return self
