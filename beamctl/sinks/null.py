"""Sinks without a device: a thread that pulls by a clock."""

from __future__ import annotations

import hashlib
import itertools
import threading
import time
from collections.abc import Callable

import numpy as np

from beamctl.errors import DeviceError
from beamctl.sinks.sink import Block, Outlet

CLOSE_S = 1.8


class ClockedSink:
    """Pulls `period` frames at a time, from now on.

    Pull k is due at start + k · period / rate by `clock`, so that rounding in sleeps never adds up.
    After a hold-up it pulls what it owes, one period after the other: no frame is skipped or
    repeated. Silence for want of frames is not kept, so that sample k is frame k of the stream.
    """

    route = "clock"

    def __init__(
        self,
        name: str,
        rate_hz: int,
        outlet: Outlet,
        period: int,
        clock: Callable[[], float] = time.monotonic,
        sleep: Callable[[float], object] = time.sleep,
    ) -> None:
        self.name = name
        self.rate_hz = rate_hz
        self.channels = outlet.channels
        self.period = period
        self.trouble: DeviceError | None = None
        self._outlet = outlet
        self._clock = clock
        self._sleep = sleep
        self._hash = hashlib.sha256()
        self._ended = threading.Event()
        self._thread = threading.Thread(target=self._run, name=name, daemon=True)
        self._thread.start()

    @property
    def digest(self) -> str:
        """SHA-256 of every byte that was pulled so far, hex; final once closed."""
        return self._hash.hexdigest()

    def keep(self, block: Block) -> None:
        """Have (n, channels) leave; the block is used again. Raises DeviceError to end it."""
        self._hash.update(block.data)

    def close(self) -> None:
        """Pull no more."""
        self._ended.set()
        self._thread.join(CLOSE_S)

    def abandon(self) -> None:
        """Pull no more, and wait for nothing."""
        self._ended.set()

    def _run(self) -> None:
        block = np.zeros((self.period, self.channels), np.float32)
        start_s = self._clock()
        try:
            for k in itertools.count():
                self._wait_until(start_s + k * self.period / self.rate_hz)
                if self._ended.is_set() or self.trouble is not None:
                    return
                # the time of the system, whatever the clock: a device's drift shows against it
                taken = self._outlet.pull(block, time.monotonic_ns())
                self.keep(block[:taken])
        except DeviceError as error:
            self.trouble = self.trouble or error

    def _wait_until(self, due_s: float) -> None:
        while (wait_s := due_s - self._clock()) > 0.0 and not self._ended.is_set():
            self._sleep(wait_s)


class NullSink(ClockedSink):
    """Keeps time, and of the samples only their digest."""

    def __init__(
        self,
        rate_hz: int,
        outlet: Outlet,
        period: int,
        clock: Callable[[], float] = time.monotonic,
        sleep: Callable[[float], object] = time.sleep,
    ) -> None:
        super().__init__("null", rate_hz, outlet, period, clock, sleep)
