"""What the desk needs of the host, whatever carries it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Protocol

from beamctl.show.edits import Edit
from beamctl.show.show import Show
from beamctl.snapshot import Answer, CueLevel, SeatLevel, SheetView, Snapshot


@dataclass(frozen=True, slots=True, eq=False)
class Draft:
    """The show as edited; what it was read from, and what stands on disk.

    One draft is only equal to itself: what was drawn from it is drawn anew when another comes.

    texts    file → TOML text as edited
    saved    the same as it was saved last
    files    sound files that the folder has, whether or not the sheet names them
    remarks  warnings of the reader, as `beamctl inspect` prints them
    """

    version: int
    show: Show
    texts: Mapping[str, str]
    saved: Mapping[str, str]
    files: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()


class HostLink(Protocol):
    """The way to one host. Every call comes from one and the same thread.

    A call returns within some tens of milliseconds, or raises OSError (ConnectionError is one) or
    EOFError when the host cannot be reached. The next call after that tries anew.
    """

    def sheet(self) -> SheetView:
        """The sheet as text."""
        ...

    def snapshot(self) -> Snapshot:
        """Everything now."""
        ...

    def levels(self) -> tuple[SeatLevel, ...]:
        """Every seat and crew point now; empty while the guard has measured none."""
        ...

    def draft(self) -> Draft:
        """The show as edited."""
        ...

    def cue_levels(self) -> tuple[CueLevel, ...]:
        """What was found when the cues were looked at last."""
        ...

    def log(self, most: int) -> tuple[str, ...]:
        """The newest lines of the journal in words, oldest first, at most `most` of them."""
        ...

    def act(self, name: str, /, **arguments: object) -> Answer:
        """Ask for the action `name` of the registry; `arguments` are the fields of its event."""
        ...

    def edit(self, edit: Edit) -> Answer:
        """Change the show; the answer says what is wrong with it when it is refused."""
        ...

    def history(self, what: str) -> Answer:
        """`what` is "undo", "redo" or "save"."""
        ...

    def twin(self) -> HostLink:
        """Another line to the same host, for a thread of its own."""
        ...

    def close(self) -> None:
        """Let go of the host; changes no sound."""
        ...
