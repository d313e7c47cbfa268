"""The engine's process: renders records into the sink's pace, and nothing else.

Two threads: one takes messages from the host, the other renders and writes, one quantum at a time.
A batch of records whose first sample is past already is moved on whole, and the host is told by how
much; what the journal keeps is what was rendered. When the host is gone the gate closes, and the
process ends.

From the host:  {"batch": N, "records": [...]}, {"stop": true}
To the host:    {"progress": [what, done, of]}, {"ready": {...}}, {"batch": N, "moved": samples},
                {"lost": [what, do]}, {"left": samples, "sha256": hex}
"""

from __future__ import annotations

import contextlib
import gc
import hashlib
import json
import queue
import sys
import threading
import time
from multiprocessing.connection import Connection
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from beamctl.engine.renderer import Renderer
from beamctl.errors import BeamctlError, DeviceError
from beamctl.files.reader import load_show
from beamctl.host.loading import prepare_sounds
from beamctl.host.quiet import send_native_chatter_to
from beamctl.host.status import Status
from beamctl.host.warming import warm
from beamctl.show.beamstate import MIN_GLIDE_S
from beamctl.show.records import Record
from beamctl.sinks.open import open_sink
from beamctl.sinks.sink import Sink

METER_DECAY = 0.97  # of the peak meter, per quantum


def engine_main(
    connection: Connection, folder: str, sink_name: str, status_path: str, log: str
) -> None:
    """Entry point of the process; returns when the host said stop, or went away."""
    send_native_chatter_to(Path(log))
    sys.setswitchinterval(0.0005)
    try:
        Engine(connection, folder, sink_name, Status.attach(Path(status_path))).run()
    except BeamctlError as error:
        with contextlib.suppress(OSError):
            connection.send_bytes(json.dumps({"lost": [error.what, error.do]}).encode())


class Engine:
    """One renderer, one sink, one line to the host."""

    def __init__(self, connection: Connection, folder: str, sink_name: str, status: Status) -> None:
        self._connection = connection
        self._sending = threading.Lock()
        self._status = status
        self._inbox: queue.SimpleQueue[dict[str, Any]] = queue.SimpleQueue()
        show = load_show(Path(folder))
        sounds = prepare_sounds(show, self._progress)
        started = time.monotonic()
        self._progress("compiled code", 0, 1)
        warm(show)
        compile_s = time.monotonic() - started
        self._renderer = Renderer(show, sounds)
        self._quantum = show.rig.quantum
        self._block = np.zeros((self._quantum, show.channels), np.float32)
        self._hash = hashlib.sha256()
        self._progress(f"sink {sink_name}", 0, 1)
        self._sink: Sink = open_sink(
            sink_name, show.rig.rate_hz, show.channels, show.rig.ring_ms, self._quantum
        )
        ready = {"sink": self._sink.name, "route": self._sink.route, "compile_s": compile_s}
        self.tell({"ready": ready})

    def tell(self, message: dict[str, Any]) -> None:
        """Send one message to the host; a host that is gone is noticed elsewhere."""
        with self._sending, contextlib.suppress(OSError):
            self._connection.send_bytes(json.dumps(message).encode())

    def run(self) -> None:
        """Render until told to stop, then close the gate and the sink."""
        threading.Thread(target=self._listen, daemon=True).start()
        gc.collect()
        gc.freeze()
        try:
            while self._take_messages():
                self._render()
            self._close_gate()
        finally:
            self._sink.close()
        self.tell({"left": self._renderer.position, "sha256": self._hash.hexdigest()})

    def _progress(self, what: str, done: int, of: int) -> None:
        self.tell({"progress": [what, done, of]})

    def _listen(self) -> None:
        try:
            while True:
                self._inbox.put(json.loads(self._connection.recv_bytes()))
        except (EOFError, OSError):
            self._inbox.put({"stop": True})

    def _take_messages(self) -> bool:
        """Put every waiting batch; False when it is time to stop."""
        while True:
            try:
                message = self._inbox.get_nowait()
            except queue.Empty:
                return True
            if message.get("stop"):
                return False
            records = [Record(**row) for row in message["records"]]
            moved = max(0, self._renderer.position - min(r.sample for r in records))
            for record in records:
                self._renderer.put(record.later(moved))
            self.tell({"batch": message["batch"], "moved": moved})

    def _render(self) -> None:
        began = time.perf_counter_ns()
        self._renderer.render(self._block)
        self._hash.update(self._block.data)
        spent = time.perf_counter_ns() - began
        self._meter(self._block, spent)
        self._sink.write(self._block)

    def _meter(self, block: NDArray[np.float32], spent_ns: int) -> None:
        status, renderer = self._status, self._renderer
        for row, (peak, gain) in zip(status.meters, renderer.meter(block), strict=False):
            row[0] = max(peak, row[0] * METER_DECAY)
            row[1] = gain
        share = spent_ns * 1e-9 * renderer.rate_hz / len(block)
        load = status["load_ppm"]
        status["load_ppm"] = round(load + 0.02 * (share * 1e6 - load))
        status["late"] = self._sink.late
        status["beat_ns"] = time.monotonic_ns()
        status["rendered"] = renderer.position

    def _close_gate(self) -> None:
        """Leave by a ramp: the last samples that go out are zeros."""
        n = round(MIN_GLIDE_S * self._renderer.rate_hz)
        closing = Record(self._renderer.position, "gate", args={"open": 0, "n": n})
        self._renderer.put(closing)
        self.tell({"closing": closing.sample})
        try:
            for _ in range(n // self._quantum + 2):
                self._render()
        except DeviceError:
            return
