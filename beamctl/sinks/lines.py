"""Two ways for samples to reach a PortAudio stream: the compiled callback, or blocking writes."""

from __future__ import annotations

from typing import Any, Protocol

from beamctl.sinks.ring import Ring
from beamctl.sinks.sink import Block


class Line(Protocol):
    """What the device sink needs of either way."""

    @property
    def route(self) -> str: ...
    @property
    def room(self) -> int:
        """Frames that may be pushed now without waiting."""
        ...

    @property
    def pulse(self) -> int:
        """A number that changes as long as the device takes samples."""
        ...

    @property
    def late(self) -> int: ...
    @property
    def latency_s(self) -> float: ...
    @property
    def stream(self) -> Any: ...

    def push(self, block: Block) -> None: ...


class CallbackLine:
    """A ring that the compiled callback empties."""

    route = "compiled callback"

    def __init__(self, stream: Any, ring: Ring, rate_hz: int) -> None:
        self.stream = stream
        self.ring = ring
        self.latency_s = ring.frames / rate_hz

    @property
    def room(self) -> int:
        return self.ring.room

    @property
    def pulse(self) -> int:
        return self.ring.callbacks

    @property
    def late(self) -> int:
        return self.ring.empty

    def push(self, block: Block) -> None:
        self.ring.push(block)


class BlockingLine:
    """PortAudio's own buffer, where the compiled callback is never called."""

    route = "blocking writes"

    def __init__(self, stream: Any) -> None:
        self.stream = stream
        self.latency_s = float(stream.latency)
        self.late = 0
        self._written = 0

    @property
    def room(self) -> int:
        return int(self.stream.write_available)

    @property
    def pulse(self) -> int:
        return self._written + self.room

    def push(self, block: Block) -> None:
        self.late += bool(self.stream.write(block))
        self._written += len(block)
