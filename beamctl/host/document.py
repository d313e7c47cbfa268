"""The show as a document: the texts it is read from.

A host keeps the document of what it plays in a file of its own, from which its other processes read
the show, whatever becomes of the folder. Sounds and measurements stay in the folder.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping
from contextlib import suppress
from dataclasses import asdict, dataclass, replace
from pathlib import Path

from beamctl.errors import DeviceError, ShowError
from beamctl.files.folder import Unreadable, read_bytes, read_text, text_of
from beamctl.files.reader import WIRE, load_show
from beamctl.show.checks import GUARD, HOUSE, RIG, SHEET
from beamctl.show.house import AirSpec
from beamctl.show.rig import Rig
from beamctl.show.show import Show

FILES = (SHEET, RIG, HOUSE, GUARD, WIRE)
Readings = Mapping[str, float]  # of the air, by the keys of house.toml


@dataclass(frozen=True, slots=True)
class Document:
    """What a show is read from: file of the folder → text, TOML and the cell lists of the rig."""

    folder: str
    texts: Mapping[str, str]

    @classmethod
    def of(cls, folder: Path) -> Document:
        """That of a folder as it is now; what gives no text is left out, for the reader to tell."""
        return cls(str(folder.absolute()), _read(folder, FILES))

    def load(self, air: Readings | None = None) -> Show:
        """Its show; `air` stands in place of the house's. ShowError, listing what is wrong."""
        return in_air(load_show(self.folder, self.texts), air)

    def with_lists(self, rig: Rig) -> Document:
        """The same with the cell lists that a rig names, as they are in the folder now."""
        named = {panel.cells for panel in rig.panel.values() if panel.cells}
        missing = sorted(named - self.texts.keys())
        return replace(self, texts={**self.texts, **_read(Path(self.folder), missing)})

    def store(self, path: Path) -> None:
        """Put it into a file, whole or not at all; DeviceError when there is no room."""
        part = path.with_name(f"{path.name}.part")
        try:
            part.write_text(json.dumps(asdict(self)), encoding="utf-8")
            part.replace(path)
        except OSError as error:
            what = f"{path.parent}: {error.strerror}"
            raise DeviceError(what, "free some memory, then try again") from error


@dataclass(frozen=True, slots=True)
class Loaded:
    """A show that can be played, and what it came of.

    digests  SHA-256 in hex of every file that it is played from, by its name in the folder
    air      readings that it has in place of the house's, None for the house's own
    """

    show: Show
    digests: Mapping[str, str]
    air: Readings | None = None

    def breathing(self, air: Readings | None) -> Loaded:
        """The same in other air, or as it is for None."""
        return self if air is None else replace(self, show=in_air(self.show, air), air=air)


def stored(path: Path) -> Document:
    """The document in a file."""
    return Document(**json.loads(path.read_text(encoding="utf-8")))


def stored_show(path: Path, seal: str, air: Readings | None) -> Show:
    """The show of the document in a file; ShowError when it is not the one of that seal."""
    show = stored(path).load(air)
    if show.seal != seal:
        what = "a measurement or cell list changed on disk since the host started"
        raise ShowError(what, "end the host and start it again to take the change")
    return show


def in_air(show: Show, air: Readings | None) -> Show:
    """The show with readings, where there are any, in place of its house's air."""
    if air is None:
        return show
    return replace(show, house=show.house.model_copy(update={"air": AirSpec(**air)}))


def on_disk(folder: Path, names: Iterable[str] = FILES) -> dict[str, str]:
    """SHA-256 in hex of texts as the folder has them now, by name; none of what is not there."""
    found = {}
    for name in names:
        with suppress(Unreadable):
            _, found[name] = read_text(folder, name)
    return found


def _read(folder: Path, names: Iterable[str]) -> dict[str, str]:
    """Texts that stand for their files to the byte; none of what gives no text."""
    found = {}
    for name in names:
        with suppress(Unreadable):
            data = read_bytes(folder, name)
            text_of(data)
            found[name] = data.decode()
    return found
