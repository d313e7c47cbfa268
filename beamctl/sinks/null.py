"""A sink without a device: keeps time, keeps no samples."""

from __future__ import annotations

import time
from collections.abc import Callable

from beamctl.errors import DeviceError
from beamctl.sinks.sink import Block


class NullSink:
    """Accepts each block when a device running from the first write would have room for it.

    Sample k is due at (first write + k / rate), so rounding in sleeps never adds up. Whoever comes
    more than the ring behind has let the device run dry: that counts as late, and the schedule
    moves by what was missed, as it would behind a real device.
    """

    route = "clock"

    def __init__(
        self,
        rate_hz: int,
        channels: int,
        ring_ms: float,
        name: str = "null",
        clock: Callable[[], float] = time.monotonic,
        sleep: Callable[[float], None] = time.sleep,
    ) -> None:
        self.name = name
        self.rate_hz = rate_hz
        self.channels = channels
        self.latency_s = ring_ms / 1000.0
        self.late = 0
        self._clock = clock
        self._sleep = sleep
        self._start_s: float | None = None
        self._written = 0
        self._closed = False

    def write(self, block: Block) -> None:
        """Take (n, channels); return when it is due. Raises DeviceError once closed."""
        now_s = self._clock()
        if self._start_s is None:
            self._start_s = now_s
        due_s = self._start_s + self._written / self.rate_hz
        dry_s = now_s - due_s - self.latency_s
        if dry_s > 0.0:
            self.late += 1
            self._start_s += dry_s
        while now_s < due_s and not self._closed:
            self._sleep(due_s - now_s)
            now_s = self._clock()
        if self._closed:
            raise DeviceError(f"the sink {self.name} is closed", "open it again")
        self._written += len(block)

    def close(self) -> None:
        """Refuse further blocks."""
        self._closed = True
