"""What the desk needs of the host, whatever carries it."""

from __future__ import annotations

from typing import Protocol

from beamctl.snapshot import Answer, SeatLevel, SheetView, Snapshot


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

    def act(self, name: str, /, **arguments: object) -> Answer:
        """Ask for the action `name` of the registry; `arguments` are the fields of its event."""
        ...

    def close(self) -> None:
        """Let go of the host; changes no sound."""
        ...
