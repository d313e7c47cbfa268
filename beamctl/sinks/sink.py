"""What a place where samples go needs of the engine, and what the engine needs of it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from beamctl.errors import DeviceError

Block = NDArray[np.float32]


class Outlet(Protocol):
    """Where finished samples come from; it has silence for whoever asks too early or too late.

    memory     what the compiled callback is given a pointer to
    channels   feeds
    callbacks  how often it was asked for samples
    block      the most frames it was asked for at once
    frames     how many its ring holds
    """

    @property
    def memory(self) -> NDArray[np.int64]: ...
    @property
    def channels(self) -> int: ...
    @property
    def callbacks(self) -> int: ...
    @property
    def block(self) -> int: ...
    @property
    def frames(self) -> int: ...

    def pull(self, out: Block, now_ns: int) -> int:
        """Fill `out` (n, channels), C-contiguous, full scale ±1; asked at `now_ns`.

        Returns how many of the frames there were; what follows them is silence.
        """
        ...


class Sink(Protocol):
    """Pulls from an outlet at the pace of real time, from when it is opened until it is closed.

    name      as asked for; a recording that had to step aside tells its real place
    rate_hz   samples a second
    channels  feeds
    route     how samples leave: clock | clock, to file | compiled callback | blocking writes
    period    frames a pull, as far as is known
    trouble   why it pulls no more, when a thread of its own could not go on
    digest    SHA-256, hex, of all float32 bytes that left; None from a device
    """

    @property
    def name(self) -> str: ...
    @property
    def rate_hz(self) -> int: ...
    @property
    def channels(self) -> int: ...
    @property
    def route(self) -> str: ...
    @property
    def period(self) -> int: ...
    @property
    def trouble(self) -> DeviceError | None: ...
    @property
    def digest(self) -> str | None: ...

    def close(self) -> None:
        """Pull no more and let go of the device or file, within 2 s; a second call does nothing.

        Raises DeviceError, once, if something that should have been kept was not.
        """
        ...

    def abandon(self) -> None:
        """Let go without waiting, after a loss: whoever waits for a lost device may wait for ever.

        The process must exit soon, for only that ends what the device still holds of it.
        """
        ...


@dataclass(frozen=True, slots=True)
class SinkInfo:
    """One output device, as PortAudio lists it."""

    name: str
    host_api: str
    channels: int
    default_rate_hz: float
