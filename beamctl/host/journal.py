"""The journal: one line per record, appended as it happens, readable up to the last whole line.

The first line says what was played: show, cues, texts and digests of its files, versions. The rest
are the records exactly as the engine took them. `texts` says the same of another show that the next
stream is played from. `left` closes a stream: how many samples went to the sink, and their SHA-256,
which `replay` must reproduce.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any, TextIO

from beamctl import __version__
from beamctl.errors import DeviceError, ShowError
from beamctl.host.document import Document, Loaded, Readings
from beamctl.show.records import Record

LAYOUT = 1


@dataclass(frozen=True, slots=True)
class Played:
    """What streams were played from: document, air, and the digests of all its files."""

    document: Document
    air: Readings | None
    digests: dict[str, str]

    @classmethod
    def of(cls, row: Mapping[str, Any], folder: str) -> Played:
        """From a journal's first line, or the args of a `texts` record."""
        return cls(Document(folder, row.get("texts", {})), row.get("air"), row["digests"])


class Journal:
    """Appends records to one file; a full disk is told by `problem`, and never stops a show."""

    def __init__(self, path: Path, loaded: Loaded, document: Document, sink: str) -> None:
        self.path = path
        self.problem = ""
        show = loaded.show
        header = {
            "beamctl": __version__,
            "journal": LAYOUT,
            "began": datetime.now(UTC).isoformat(timespec="milliseconds"),
            "title": show.sheet.title,
            "folder": show.folder,
            "cues": {cue.ref: cue.title for cue in show.sheet.cue},
            "sink": sink,
            **texts(loaded, document),
        }
        try:
            self._file: TextIO = path.open("x", encoding="utf-8")
        except OSError as error:
            raise DeviceError(
                f"journal {path}: {error.strerror}", "name another place with --journal"
            ) from error
        self._line(json.dumps(header, ensure_ascii=False))

    def write(self, records: Iterable[Record]) -> None:
        """Append records."""
        for record in records:
            self._line(record.to_json())

    def close(self) -> None:
        """Let go of the file."""
        self._file.close()

    def _line(self, text: str) -> None:
        try:
            self._file.write(text + "\n")
            self._file.flush()
        except OSError as error:
            self.problem = f"journal {self.path.name}: {error.strerror}"


def texts(loaded: Loaded, document: Document) -> dict[str, Any]:
    """What a journal keeps of a show that the next stream is played from."""
    show = loaded.show
    told = {"rate_hz": show.rig.rate_hz, "channels": show.channels, "texts": document.texts}
    return told | {"air": loaded.air, "digests": loaded.digests}


def clock(sample: int) -> Record:
    """What time it is now, at `sample`, for who reads the journal later."""
    utc = datetime.now(UTC).isoformat(timespec="milliseconds")
    return Record(sample, "clock", args={"utc": utc})


def read_journal(path: Path) -> tuple[Played, Iterator[Record]]:
    """What a journal was begun with, and its records; a last line cut short is passed over.

    ShowError when the file is no journal.
    """
    try:
        lines = path.read_bytes().split(b"\n")
        if lines[-1] == b"":
            del lines[-1]
        first: dict[str, Any] = json.loads(lines[0])
        if first["journal"] != LAYOUT:
            raise ValueError(first["journal"])
        played = Played.of(first, first["folder"])
    except OSError as error:
        raise ShowError(f"{path}: {error.strerror}", "name a journal that exists") from error
    except (ValueError, LookupError, TypeError) as error:
        raise ShowError(
            f"{path}: not a journal",
            "journals end in .jsonl; `beamctl host` names the one it writes",
        ) from error
    return played, _records(path, lines[1:])


def _records(path: Path, lines: list[bytes]) -> Iterator[Record]:
    for number, line in enumerate(lines, start=2):
        try:
            yield Record.from_json(line.decode())
        except ValueError as error:
            if number == len(lines) + 1:
                return
            raise ShowError(
                f"{path}:{number}: not a record", "the journal is damaged before its end"
            ) from error
