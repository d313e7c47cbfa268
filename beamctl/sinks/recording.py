"""The `file:PATH` sink: real time to the writer, a file for later."""

from __future__ import annotations

import queue
import threading
from pathlib import Path

from beamctl.errors import DeviceError
from beamctl.sinks.null import NullSink
from beamctl.sinks.rf64 import Rf64Writer
from beamctl.sinks.sink import Block

QUEUE_S = 1.0  # how long the disk may stall before the recording fails
CLOSE_S = 1.8


class RecordingSink:
    """Paces as the null sink does; a thread of its own writes, so a slow disk stalls nobody.

    A block is never left out: when the queue is full, `write` raises DeviceError, and what was
    written stays under PATH.part.
    """

    route = "clock, to file"

    def __init__(
        self, path: Path, rate_hz: int, channels: int, ring_ms: float, quantum: int
    ) -> None:
        self.name = f"file:{path}"
        self.rate_hz = rate_hz
        self.channels = channels
        self._pace = NullSink(rate_hz, channels, ring_ms, self.name)
        self.latency_s = self._pace.latency_s
        self._file = Rf64Writer(path, rate_hz, channels)
        self._blocks: queue.Queue[Block] = queue.Queue(max(2, round(QUEUE_S * rate_hz / quantum)))
        self._ended = threading.Event()
        self._closed = False
        self._failure: DeviceError | None = None
        self._thread = threading.Thread(target=self._drain, name="recording", daemon=True)
        self._thread.start()

    @property
    def late(self) -> int:
        """Times the writer fell more than the ring behind."""
        return self._pace.late

    def write(self, block: Block) -> None:
        """Queue (n, channels) for the file; return when it is due. Raises DeviceError."""
        self._pace.write(block)
        if self._failure is None:
            try:
                self._blocks.put_nowait(block.copy())  # the caller uses its block again
            except queue.Full:
                self._failure = DeviceError(
                    f"the disk is more than {QUEUE_S:g} s behind with {self._file.path}",
                    f"choose a faster disk; {self._file.part} holds what was written",
                )
        if self._failure is not None:
            raise self._failure

    def close(self) -> None:
        """Complete the file. Raises DeviceError, once, if it does not hold every block."""
        if self._closed:
            return
        self._closed = True
        self._pace.close()
        self._ended.set()
        self._thread.join(CLOSE_S)
        if self._thread.is_alive():
            raise DeviceError(
                f"the disk is still behind with {self._file.path}",
                f"wait for {self._file.part} to take its name before leaving",
            )
        if self._failure is not None:
            raise self._failure

    def _drain(self) -> None:
        try:
            while not (self._ended.is_set() and self._blocks.empty()):
                try:
                    block = self._blocks.get(timeout=0.05)
                except queue.Empty:
                    continue
                self._file.write(block)
            if self._failure is None:
                self._file.close()
            else:
                self._file.abandon()
        except DeviceError as error:
            self._failure = error
            self._file.abandon()
