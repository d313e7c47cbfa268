"""The `file:PATH` sink: real time to the engine, a file for later."""

from __future__ import annotations

import itertools
import queue
import threading
import time
from pathlib import Path

from beamctl.errors import DeviceError
from beamctl.sinks.null import CLOSE_S, ClockedSink
from beamctl.sinks.rf64 import Rf64Writer
from beamctl.sinks.sink import Block, Outlet

QUEUE_S = 1.0  # how much the queue holds, and how long it may stay full before the recording fails


class RecordingSink(ClockedSink):
    """Pulls as the null sink does; another thread writes, so that a slow disk stalls nobody.

    A block is never left out: when the disk falls too far behind or refuses, that is the sink's
    trouble, it pulls no more, and what was written stays under PATH.part. What was recorded before
    is never overwritten: take.wav steps aside to take.2.wav.
    """

    route = "clock, to file"

    def __init__(self, path: Path, rate_hz: int, outlet: Outlet, period: int) -> None:
        path = free_place(path)
        self._file = Rf64Writer(path, rate_hz, outlet.channels)
        self._blocks: queue.Queue[Block] = queue.Queue(max(2, round(QUEUE_S * rate_hz / period)))
        self._had_room_s = time.monotonic()
        self._closed = False
        self._last = threading.Event()
        super().__init__(f"file:{path}", rate_hz, outlet, period)
        self._writer = threading.Thread(target=self._drain, name="recording", daemon=True)
        self._writer.start()

    def keep(self, block: Block) -> None:
        """Queue a copy for the disk.

        A full queue is waited for: it is full at once when much is owed after a hold-up, and only
        when it stays so is the disk too slow.
        """
        now_s = time.monotonic()
        if not self._blocks.full():
            self._had_room_s = now_s
        try:
            self._blocks.put(block.copy(), timeout=max(0.0, self._had_room_s + QUEUE_S - now_s))
        except queue.Full:
            raise DeviceError(
                f"the disk is more than {QUEUE_S:g} s behind with {self._file.path}",
                f"choose a faster disk; {self._file.part} holds what was written",
            ) from None
        super().keep(block)

    def close(self) -> None:
        """Pull no more and complete the file. Raises DeviceError, once, if it lacks a block."""
        if self._closed:
            return
        self._closed = True
        until_s = time.monotonic() + CLOSE_S
        super().close()
        self._last.set()
        self._writer.join(max(0.0, until_s - time.monotonic()))
        if self._writer.is_alive():
            raise DeviceError(
                f"the disk is still behind with {self._file.path}",
                f"wait for {self._file.part} to take its name before leaving",
            )
        if self.trouble is not None:
            raise self.trouble

    def _drain(self) -> None:
        try:
            while not (self._last.is_set() and self._blocks.empty()):
                try:
                    block = self._blocks.get(timeout=0.05)
                except queue.Empty:
                    continue
                self._file.write(block)
            if self.trouble is None:
                self._file.close()
            else:
                self._file.abandon()
        except DeviceError as error:
            self.trouble = self.trouble or error
            self._file.abandon()


def free_place(path: Path) -> Path:
    """`path`, or its first free number where a recording, whole or not, lies there already."""
    numbered = (path.with_stem(f"{path.stem}.{n}") for n in itertools.count(2))
    return next(p for p in itertools.chain([path], numbered) if not _is_taken(p))


def _is_taken(path: Path) -> bool:
    return path.is_file() or Path(f"{path}.part").exists()
