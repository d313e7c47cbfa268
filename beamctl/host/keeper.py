"""Keeps one engine process: starts it, watches it, ends it when it stalls, and starts the next.

A dead engine is replaced at once; three deaths within a minute stop that. A sink that is lost is
looked for every two seconds by a small process of its own, since PortAudio cannot look again in
one that has lost a device.
"""

from __future__ import annotations

import contextlib
import json
import os
import subprocess
import sys
import time
from collections import deque
from multiprocessing.connection import Connection
from pathlib import Path
from typing import Any

from beamctl.engine import layout as at
from beamctl.engine.buffers import SEGMENT
from beamctl.engine.outlet import Outlet
from beamctl.host.child import Post, start_child
from beamctl.host.document import Loaded
from beamctl.host.engine_process import Task, engine_main
from beamctl.host.link import encode
from beamctl.host.places import memory_folder, state_folder
from beamctl.host.priority import be_ordinary
from beamctl.host.status import Status

STALL_S = 0.12  # without a beat of the render thread: then the process is killed …
STARVED_S = 0.5  # … but later where it would run, and only gets no turn
DEATHS, DEATHS_S = 3, 60.0
LOOK_S = 2.0


class Keeper:
    """The engine of one host; what it says, and that it went, is posted to the host's loop."""

    def __init__(self, document: Path, loaded: Loaded, sink: str, start: int, post: Post) -> None:
        """`document` is the path of what it plays, `start` the number of the first frame."""
        self._document, self._loaded = str(document), loaded
        self._sink, self._start, self._post = sink, start, post
        self.outlet_path = document.with_suffix(".outlet")
        self._status_path = document.with_suffix(".status")
        self.status = Status.create(self._status_path)
        self.outlet: Outlet | None = None
        self.ready: dict[str, Any] = {}
        self._deaths: deque[float] = deque(maxlen=DEATHS)
        self._look_at: float | None = None
        self._looking: subprocess.Popen[bytes] | None = None
        self._process: Any = None
        self._line: Connection | None = None
        self._generation = 0

    # -- one engine ------------------------------------------------------------------------------

    def start(self) -> None:
        """Start an engine whose first frame follows the last one's."""
        if self.outlet is not None:
            self._start = -(-self.outlet.count(at.WRITTEN) // SEGMENT) * SEGMENT
        task = Task(
            self._document,
            self._loaded.show.seal,
            self._loaded.air,
            self._sink,
            self._start,
            str(self.outlet_path),
            str(self._status_path),
            str(state_folder() / "engine.log"),
        )
        self._generation += 1
        self.ready = {}
        self._process, self._line = start_child(engine_main, task, self._generation, self._post)

    def is_ours(self, message: dict[str, Any]) -> bool:
        """False for the last words of an engine that was replaced."""
        return bool(message["generation"] == self._generation)

    def opened(self, ready: dict[str, Any]) -> int:
        """The engine's sink is open: join its memory; returns the number of its first frame."""
        self.ready = ready
        self.outlet = Outlet.attach(self.outlet_path)
        self._look_at = None
        return self.outlet.start

    def send(self, message: dict[str, Any]) -> bool:
        """Send to the engine; False when it is not there."""
        try:
            assert self._line is not None
            self._line.send_bytes(encode(message))
        except (OSError, AssertionError):
            return False
        return True

    @property
    def pid(self) -> int:
        """Process number of the engine."""
        return int(self._process.pid)

    # -- watching --------------------------------------------------------------------------------

    def watch(self) -> bool:
        """Kill an engine that stalls; True when it was killed now."""
        if not self.ready or not self._process.is_alive():
            return False
        silent_s = (time.monotonic_ns() - self.status["beat_ns"]) * 1e-9
        if silent_s < STALL_S or (silent_s < STARVED_S and _starved(self.pid)):
            return False
        self._process.kill()
        self.ready = {}
        return True

    def died(self) -> bool:
        """Count a death and start the next engine; False when there were too many."""
        self.ready = {}
        self.status.meters[:] = 0.0  # what it sent is over
        now = time.monotonic()
        self._deaths.append(now)
        if len(self._deaths) == DEATHS and now - self._deaths[0] < DEATHS_S:
            return False
        self.start()
        return True

    def look_for_sink(self) -> None:
        """From now on look for the lost sink, until it is there and an engine is started for it."""
        self.ready = {}
        self.status.meters[:] = 0.0
        self._look_at = time.monotonic() + LOOK_S

    @property
    def looking(self) -> bool:
        """True while a lost sink is looked for."""
        return self._look_at is not None or self._looking is not None

    def look(self) -> list[str] | None:
        """Once a look is over: the sinks there are. The lost one among them starts an engine."""
        now = time.monotonic()
        if self._looking is not None:
            if self._looking.poll() is None:
                return None
            assert self._looking.stdout is not None
            names = _names(self._looking.stdout.read())
            self._looking = None
            if self._sink in names:
                self._look_at = None
                self.start()
            return names
        if self._look_at is not None and now >= self._look_at:
            self._look_at = now + LOOK_S
            command = [sys.executable, "-m", "beamctl", "sinks", "--json"]
            self._looking = subprocess.Popen(
                command,
                stdout=subprocess.PIPE,
                stderr=subprocess.DEVNULL,
                stdin=subprocess.DEVNULL,
                preexec_fn=be_ordinary if os.name == "posix" else None,
            )
        return None

    # -- the end ---------------------------------------------------------------------------------

    def alive(self) -> bool:
        """True while the engine's process runs."""
        return bool(self._process is not None and self._process.is_alive())

    def end(self, wait_s: float) -> None:
        """Wait for the engine to end by itself, then make it."""
        if self._process is not None:
            self._process.join(wait_s)
            if self._process.is_alive():
                self._process.kill()
                self._process.join(wait_s)
        if self._looking is not None:
            self._looking.kill()
        for path in (self.outlet_path, self._status_path):
            with contextlib.suppress(OSError):
                path.unlink(missing_ok=True)
        with contextlib.suppress(OSError):  # other hosts may still use it
            memory_folder().rmdir()


def _starved(pid: int) -> bool:
    """True when the process waits for nothing but a processor; False where that cannot be seen."""
    try:
        return Path(f"/proc/{pid}/stat").read_bytes().rpartition(b")")[2].split()[0] == b"R"
    except (OSError, IndexError):
        return False


def _names(listing: bytes) -> list[str]:
    try:
        rows = json.loads(listing)
    except ValueError:
        return []
    return [name for r in rows for name in (r["name"], f"{r['host_api']}: {r['name']}")]
