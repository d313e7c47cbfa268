"""The line between a host and its desks: JSON messages over a local socket of this user alone."""

from __future__ import annotations

import contextlib
import dataclasses
import json
from multiprocessing.connection import Client, Connection
from pathlib import Path
from typing import Any

from beamctl.desk.link import Draft
from beamctl.files.reader import read_show
from beamctl.host.editrows import edit_row
from beamctl.host.places import socket_address
from beamctl.show.edits import Edit
from beamctl.snapshot import (
    AirView,
    Answer,
    BeamView,
    CueLevel,
    CueText,
    EditView,
    EngineView,
    GuardView,
    PanelView,
    SeatLevel,
    SheetView,
    Snapshot,
    WireView,
)


def encode(message: Any) -> bytes:
    """A message as bytes; dataclasses in it become tables."""
    return json.dumps(message, ensure_ascii=False, default=_table).encode()


def _table(one: Any) -> dict[str, Any]:
    return {field.name: getattr(one, field.name) for field in dataclasses.fields(one)}


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

    def draft(self) -> Draft:
        """The show as edited."""
        row = self._ask({"do": "draft"})
        if "texts" not in row:
            raise OSError(row["text"])
        show, problems = read_show(self._show, row["texts"])
        if show is None:  # it was readable when the host read it: a file of the folder is gone
            raise OSError(str(problems[0]))
        files, remarks = tuple(row["files"]), tuple(row["remarks"])
        return Draft(row["version"], show, row["texts"], row["saved"], files, remarks)

    def cue_levels(self) -> tuple[CueLevel, ...]:
        """What was found when the cues were looked at last."""
        rows: Any = self._ask({"do": "cue-levels"})
        return tuple(CueLevel(**row) for row in rows)

    def log(self, most: int) -> tuple[str, ...]:
        """The newest lines of the journal in words, oldest first."""
        lines: Any = self._ask({"do": "log", "most": most})
        return tuple(lines)

    def act(self, name: str, /, **arguments: object) -> Answer:
        """Ask for an action of the registry."""
        return Answer(**self._ask({"do": "act", "name": name, "arguments": arguments}))

    def edit(self, edit: Edit) -> Answer:
        """Change the show."""
        return Answer(**self._ask({"do": "edit", "edit": edit_row(edit)}))

    def history(self, what: str) -> Answer:
        """Have "undo", "redo" or "save" done."""
        return Answer(**self._ask({"do": "history", "what": what}))

    def twin(self) -> Link:
        """Another line to the same host, for a thread of its own."""
        return Link(self._show)

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
    edit = row["edit"]
    rest |= {"edit": EditView(**edit | {"edited": tuple(edit["edited"])})}
    rest |= {"air": AirView(**row["air"]), "wire": WireView(**row["wire"])}
    rest |= {"trying": tuple(row["trying"])}
    return Snapshot(**row | rest)
