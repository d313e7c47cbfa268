"""The line between a host and its desks: JSON messages over a local socket of this user alone."""

from __future__ import annotations

import contextlib
import dataclasses
import json
from multiprocessing.connection import Client, Connection
from pathlib import Path
from typing import Any

from beamctl.host.places import socket_address
from beamctl.snapshot import (
    Answer,
    BeamView,
    CueText,
    EngineView,
    GuardView,
    PanelView,
    SeatLevel,
    SheetView,
    Snapshot,
)


def encode(message: Any) -> bytes:
    """A message, or a dataclass, as bytes."""
    if dataclasses.is_dataclass(message) and not isinstance(message, type):
        message = dataclasses.asdict(message)
    return json.dumps(message, ensure_ascii=False).encode()


class Link:
    """A desk's end; every call asks the host and waits for its answer. Satisfies desk.HostLink."""

    def __init__(self, show: Path) -> None:
        self._show = show
        self._connection: Connection | None = None

    def sheet(self) -> SheetView:
        """The sheet as text."""
        row = self._ask({"do": "sheet"})
        cues = tuple(CueText(**cue) for cue in row.pop("cues"))
        return SheetView(cues=cues, **row)

    def snapshot(self) -> Snapshot:
        """Everything now."""
        return read_snapshot(self._ask({"do": "snapshot"}))

    def levels(self) -> tuple[SeatLevel, ...]:
        """Every seat and crew point, as the guard measured it last."""
        rows: Any = self._ask({"do": "levels"})
        return tuple(SeatLevel(**row | {"at_m": tuple(row["at_m"])}) for row in rows)

    def act(self, name: str, /, **arguments: object) -> Answer:
        """Ask for an action of the registry."""
        return Answer(**self._ask({"do": "act", "name": name, "arguments": arguments}))

    def stop_host(self) -> None:
        """Ask the host to close the sink and end; it may be gone before it answers."""
        with contextlib.suppress(EOFError, ConnectionError):
            self._ask({"do": "stop"})

    def close(self) -> None:
        """Let go of the host; changes no sound."""
        if self._connection is not None:
            self._connection.close()
            self._connection = None

    def _ask(self, message: dict[str, Any]) -> dict[str, Any]:
        try:
            if self._connection is None:
                self._connection = Client(socket_address(self._show))
            self._connection.send_bytes(encode(message))
            answer: dict[str, Any] = json.loads(self._connection.recv_bytes())
        except (OSError, EOFError):
            self.close()
            raise
        return answer


def read_snapshot(row: dict[str, Any]) -> Snapshot:
    """A snapshot from its JSON form."""
    beams = tuple(
        BeamView(
            **beam
            | {
                "aim_deg": tuple(beam["aim_deg"]),
                "peak_deg": beam["peak_deg"] and tuple(beam["peak_deg"]),
            }
        )
        for beam in row["beams"]
    )
    panels = tuple(PanelView(**panel) for panel in row["panels"])
    rest = {"beams": beams, "panels": panels, "engine": EngineView(**row["engine"])}
    rest |= {"guard": GuardView(**row["guard"]), "notices": tuple(row["notices"])}
    return Snapshot(**row | rest)
