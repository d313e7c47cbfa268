"""guard.toml and wire.toml: what the venue allows, and who on the network may speak."""

from __future__ import annotations

import ipaddress
import re
from difflib import get_close_matches
from typing import Annotated, Literal

from pydantic import AfterValidator, Field

from beamctl.acoustics.exposure import TABLES
from beamctl.show.fields import Model, Text

Role = Literal["read", "trigger", "aim", "hush"]


def _check_table(name: str) -> str:
    if name not in TABLES:
        near = get_close_matches(name, TABLES, n=1)
        raise ValueError(f'"{near[0]}"' if near else f"a table, one of {', '.join(TABLES)}")
    return name


def _check_listen(text: str) -> str:
    address, _, port = text.rpartition(":")
    if not (address and re.fullmatch("[0-9]{1,5}", port) and 0 < int(port) < 65_536):
        raise ValueError('"ADDRESS:PORT" with a port from 1 to 65535')
    return text


def _check_network(text: str) -> str:
    try:
        ipaddress.ip_network(text, strict=False)
    except ValueError:
        raise ValueError('an address or a network such as "10.0.0.0/24"') from None
    return text


Table = Annotated[str, AfterValidator(_check_table)]
Listen = Annotated[str, AfterValidator(_check_listen)]
Network = Annotated[str, AfterValidator(_check_network)]


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
    listen: Listen = "127.0.0.1:61740"
    rate_per_s: float = Field(50.0, gt=0.0, le=10_000.0)
    heartbeat_s: float = Field(1.0, ge=0.1, le=60.0)
    strict_standby: bool = False
    allow: dict[Network, Annotated[tuple[Role, ...], Field(strict=False)]] = Field(
        default_factory=dict
    )
