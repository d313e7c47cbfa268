"""What the engine asks of a place where samples go, and what a list of such places shows."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

Block = NDArray[np.float32]


class Sink(Protocol):
    """Takes blocks of samples at the pace of real time.

    name       as asked for
    rate_hz    samples a second
    channels   feeds
    route      how samples reach the device, in words
    late       times it ran dry
    latency_s  how far ahead of the device the writer runs
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
    def late(self) -> int: ...
    @property
    def latency_s(self) -> float: ...

    def write(self, block: Block) -> None:
        """Take (n, channels) float32, C-contiguous, full scale ±1; return once it is accepted.

        Raises DeviceError when the sink is gone.
        """
        ...

    def close(self) -> None:
        """Let go of the device or file, within 2 s; a second call does nothing.

        Raises DeviceError if something that should have been kept was not.
        """
        ...


@dataclass(frozen=True, slots=True)
class SinkInfo:
    """One output device, as PortAudio lists it."""

    name: str
    host_api: str
    channels: int
    default_rate_hz: float
