"""The engine's process: renders records into the ring, and nothing else.

One thread takes messages from the host, the other (the process's main one) renders a quantum
whenever the ring has room. The sink empties the ring by itself, through the final stage. A batch of
records whose first sample is past already is moved on whole, and the host is told by how much; what
the journal keeps is what was rendered. When the host is gone the hush word is raised, and the
process ends once the gate is shut.

From the host:  {"batch": N, "records": [...]}, {"stop": true}
To the host:    {"progress": [what, done, of]}, {"ready": {...}}, {"batch": N, "moved": samples},
                {"lost": [what, do], "code": N}, {"left": {...}}
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
from typing import Any, NamedTuple

import numpy as np

from beamctl.engine import layout as at
from beamctl.engine.callback import ADDRESS
from beamctl.engine.chain import ramp_n, wires_of
from beamctl.engine.outlet import Outlet, ring_frames
from beamctl.engine.renderer import Renderer
from beamctl.errors import BeamctlError, DeviceError
from beamctl.host.child import take_waiting
from beamctl.host.document import Readings, stored_show
from beamctl.host.loading import prepare_sounds
from beamctl.host.priority import (
    RENDER_PRIORITY,
    ask_for_real_time,
    be_ordinary,
    ring_ms_for,
)
from beamctl.host.quiet import send_native_chatter_to
from beamctl.host.status import Status
from beamctl.host.warming import warm
from beamctl.show.records import Record
from beamctl.sinks.open import open_sink

METER_DECAY = 0.97  # of the peak meter, per quantum
LOST_S = 0.4  # a device that asks for nothing for so long is gone
SHUT_S = 0.5  # the longest wait for the gate to shut at the end


class Task(NamedTuple):
    """What one engine process is to do."""

    document: str  # path of the document it plays
    seal: str  # of guard, rig and house as the host read them
    air: Readings | None  # in place of the house's
    sink: str
    start: int  # number of its first frame, a multiple of 256
    outlet: str  # path of the shared memory
    status: str
    log: str


def engine_main(connection: Connection, task: Task) -> None:
    """Entry point of the process; returns when the host said stop, or went away."""
    send_native_chatter_to(Path(task.log))
    sys.setswitchinterval(0.0005)
    be_ordinary()  # loading and compiling are in nobody's way
    try:
        Engine(connection, task).run()
    except BeamctlError as error:
        with contextlib.suppress(OSError):
            _tell(connection, {"lost": [error.what, error.do], "code": error.exit_code})
    except (EOFError, OSError):
        pass


def _tell(connection: Connection, message: dict[str, Any]) -> None:
    connection.send_bytes(json.dumps(message).encode())


class Engine:
    """One renderer, one outlet, one sink, one line to the host."""

    def __init__(self, connection: Connection, task: Task) -> None:
        self._connection = connection
        self._inbox: queue.SimpleQueue[dict[str, Any]] = queue.SimpleQueue()
        self._status = Status.attach(Path(task.status))
        show = stored_show(Path(task.document), task.seal, task.air)
        sounds = prepare_sounds(show, self._progress)
        started = time.monotonic()
        self._progress("compiled code", 0, 1)
        warm(show)
        compile_s = time.monotonic() - started
        priority = ask_for_real_time(RENDER_PRIORITY)
        rig = show.rig
        ring_ms = ring_ms_for(rig.ring_ms, priority)
        self._start = task.start
        self._quantum = rig.quantum
        self._renderer = Renderer(show, sounds, task.start)
        self._block = np.zeros((rig.quantum, show.channels), np.float32)
        self._hash = hashlib.sha256()
        frames = ring_frames(ring_ms, rig.rate_hz, rig.quantum)
        self._outlet = Outlet.create(
            Path(task.outlet), frames, show.channels, wires_of(show), ramp_n(show), task.start
        )
        self._progress(f"sink {task.sink}", 0, 1)
        gc.collect()
        gc.freeze()
        gc.disable()
        self._sink = open_sink(task.sink, rig.rate_hz, self._outlet, ADDRESS, rig.quantum)
        self._pulse = (0, time.monotonic())
        self._status["beat_ns"] = time.monotonic_ns()
        ready = {
            "sink": self._sink.name,
            "route": self._sink.route,
            "priority": priority,
            "ring_ms": 1000.0 * self._outlet.frames / rig.rate_hz,
            "compile_s": compile_s,
        }
        _tell(connection, {"ready": ready})

    def run(self) -> None:
        """Render until told to stop, then shut the gate and let go of the sink."""
        threading.Thread(target=self._listen, daemon=True).start()
        lost = False
        try:
            while self._take_messages():
                self._render_or_wait()
            self._shut()
        except DeviceError:
            lost = True
            raise
        finally:
            if lost:
                self._sink.abandon()
            else:
                self._sink.close()
        left = {"entered": self._hash.hexdigest(), "left": self._sink.digest}
        frames = {"written": self._outlet.count(at.WRITTEN), "read": self._outlet.count(at.READ)}
        _tell(self._connection, {"left": left | frames})

    def _progress(self, what: str, done: int, of: int) -> None:
        """Say how far it is; EOFError when nobody wants it any more."""
        _tell(self._connection, {"progress": [what, done, of]})
        take_waiting(self._connection, self._inbox)

    def _listen(self) -> None:
        try:
            while True:
                self._inbox.put(json.loads(self._connection.recv_bytes()))
        except (EOFError, OSError):
            self._outlet.hush()  # at once, whatever the render thread is doing
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
            _tell(self._connection, {"batch": message["batch"], "moved": moved})

    def _render_or_wait(self) -> None:
        self._status["beat_ns"] = time.monotonic_ns()
        if self._outlet.room < self._quantum:
            self._watch_sink()
            time.sleep(self._quantum / self._renderer.rate_hz / 2.0)
            return
        began = time.perf_counter_ns()
        self._renderer.render(self._block)
        self._outlet.push(self._block)
        self._hash.update(self._block.data)
        self._meter(time.perf_counter_ns() - began)

    def _watch_sink(self) -> None:
        """DeviceError when the sink said so, or asks for nothing any more."""
        if self._sink.trouble is not None:
            raise self._sink.trouble
        calls, now = self._outlet.callbacks, time.monotonic()
        if calls != self._pulse[0]:
            self._pulse = (calls, now)
        elif now - self._pulse[1] > LOST_S:
            raise DeviceError(
                f"{self._sink.name} is lost: it asked for no sample for {1000 * LOST_S:.0f} ms",
                "check its cable, power and driver; the host opens it again when it is back",
            )

    def _meter(self, spent_ns: int) -> None:
        status, renderer = self._status, self._renderer
        for row, (peak, gain) in zip(status.meters, renderer.meter(self._block), strict=False):
            row[0] = max(peak, row[0] * METER_DECAY)
            row[1] = gain
        share = spent_ns * 1e-9 * renderer.rate_hz / self._quantum
        load = status["load_ppm"]
        status["load_ppm"] = round(load + 0.02 * (share * 1e6 - load))
        status["rendered"] = renderer.position

    def _shut(self) -> None:
        """Leave by the ramp, and by a quantum of zeros after it."""
        self._outlet.hush()
        until = time.monotonic() + SHUT_S
        while self._outlet.gate_gain > 0.0 and time.monotonic() < until:
            self._render_or_wait()
        zeros_to = self._outlet.count(at.READ) + self._quantum
        while self._outlet.count(at.READ) < zeros_to and time.monotonic() < until:
            self._render_or_wait()
