"""The guard's process: reads what enters the ring, grants what may leave, and says how it stands.

It shares nothing with the engine but the outlet's memory, and with the host only a line. Time goes
by samples; the wall clock is only watched for jumps, since the evening's record is timed by it. Any
error ends the process: without it no lease is renewed, and the gate shuts.

From the host:  {"attach": path}, {"clear": true}, {"stop": true}
To the host:    {"progress": [what, done, of]}, {"looked": 0, "barred": {...}, "cues": [...]},
                {"ready": true} once it sees samples, {"reading": {...}} and {"levels": [...]}
                several times a second, {"trip": reason}, {"blind": reason} before it ends
"""

from __future__ import annotations

import contextlib
import gc
import json
import queue
import sys
import threading
import time
from multiprocessing.connection import Connection
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from threadpoolctl import threadpool_limits

from beamctl.engine import layout as at
from beamctl.engine.outlet import Outlet
from beamctl.errors import BeamctlError
from beamctl.guard.watch import Watch
from beamctl.host.barring import barred, cue_levels, rows_of
from beamctl.host.child import take_waiting
from beamctl.host.document import Readings, stored_show
from beamctl.host.priority import GUARD_PRIORITY, ask_for_real_time, be_ordinary
from beamctl.host.quiet import send_native_chatter_to
from beamctl.show.standing import GUARDED

LEASE_S = 0.15
POLL_S = 0.0015
CLOCK_JUMP_S = 2.0
RESERVE = (400, 4_000)  # bytes of a block, small enough for an interpreter to find room in them
BLOCKS = 500
READING_S, LEVELS_S = 0.05, 0.2


class GuardTask(NamedTuple):
    """What one guard process is to do."""

    document: str  # path of the document it guards
    seal: str  # of guard, rig and house as the host read them
    air: Readings | None  # in place of the house's
    dose: list[list[float]]  # what an earlier guard had counted: over the window, since doors
    check: bool  # look through every cue first
    log: str


def guard_main(connection: Connection, task: GuardTask) -> None:
    """Entry point of the process; returns when the host said stop, or went away."""
    send_native_chatter_to(Path(task.log))
    sys.setswitchinterval(0.0005)
    threadpool_limits(1)  # its matrix products are small, and the other cores are not its own
    be_ordinary()  # working out the field is in nobody's way
    reserve = [bytearray(size) for _ in range(BLOCKS) for size in RESERVE]
    try:
        Guard(connection, task).run()
    except BeamctlError as error:
        _tell(connection, {"blind": error.what})
    except (EOFError, OSError):
        pass
    except BaseException as error:
        reserve.clear()  # room to say why, should it be for want of memory
        _tell(connection, {"blind": f"{type(error).__name__}: {error}".rstrip(": ")})
        raise


def _tell(connection: Connection, message: dict[str, Any]) -> None:
    with contextlib.suppress(OSError):
        connection.send_bytes(json.dumps(message).encode())


class Guard:
    """One watch over one outlet at a time."""

    def __init__(self, connection: Connection, task: GuardTask) -> None:
        self._connection = connection
        self._inbox: queue.SimpleQueue[dict[str, Any]] = queue.SimpleQueue()
        self._due = dict.fromkeys(("progress", "reading", "levels"), 0.0)
        show = stored_show(Path(task.document), task.seal, task.air)
        if task.check:
            found = cue_levels(show, self._progress)
            _tell(connection, {"looked": 0, "barred": barred(found), "cues": rows_of(found)})
        rate_hz, self._quantum = show.rig.rate_hz, show.rig.quantum
        self._lease_n = round(LEASE_S * rate_hz)
        ring_s = (show.rig.ring_ms or 32.0) / 1000.0
        self._watch = Watch(show, round(ring_s * rate_hz))
        if task.dose:
            self._watch.dose.carry_on(np.array(task.dose))
        self._outlet: Outlet | None = None
        self._step, self._before = np.zeros((2, self._watch.step_n, show.channels), np.float32)
        self._taken = self._filled = self._left = 0
        self._granted: list[float] | None = None
        self._trip = ""
        self._sees = False
        self._clock_s = time.time() - time.monotonic()
        ask_for_real_time(GUARD_PRIORITY)
        gc.collect()
        gc.freeze()
        gc.disable()

    def run(self) -> None:
        """Watch until told to stop."""
        threading.Thread(target=self._listen, daemon=True).start()
        while self._take_messages():
            if self._outlet is not None:
                self._follow(self._outlet)
            self._watch_clock()
            self._say()  # a trip is told before the lease ends by it
            if self._outlet is not None:
                self._grant(self._outlet)
            time.sleep(POLL_S)
        if self._outlet is not None:
            self._outlet.grant(0)

    # -- the host --------------------------------------------------------------------------------

    def _progress(self, what: str, done: int, of: int) -> None:
        """Say how far it is; EOFError when nobody wants it any more."""
        take_waiting(self._connection, self._inbox)
        now = time.monotonic()
        if now >= self._due["progress"]:
            self._due["progress"] = now + READING_S
            _tell(self._connection, {"progress": [what, done, of]})

    def _listen(self) -> None:
        try:
            while True:
                self._inbox.put(json.loads(self._connection.recv_bytes()))
        except (EOFError, OSError):
            self._inbox.put({"stop": True})

    def _take_messages(self) -> bool:
        """Do what the host asked; False when it is time to stop."""
        while True:
            try:
                message = self._inbox.get_nowait()
            except queue.Empty:
                return True
            if "attach" in message:
                self._attach(Outlet.attach(Path(message["attach"])))
            elif message.get("clear"):
                self._watch.clear()
                self._trip = ""
            elif message.get("stop"):
                return False

    def _attach(self, outlet: Outlet) -> None:
        """Follow a stream from a chunk on that is not written over before it is read."""
        self._outlet = outlet
        self._granted = None
        self._watch.begin()
        start = outlet.count(at.READ) + outlet.frames // 4
        self._taken = self._left = -(-start // at.CHUNK) * at.CHUNK
        self._filled = 0

    # -- the stream ------------------------------------------------------------------------------

    def _follow(self, outlet: Outlet) -> None:
        """Collect what entered the ring, a step at a time, and settle the steps that have left.

        What was written over before it could be read counts as what was read before it.
        """
        step_n = self._watch.step_n
        if outlet.count(at.WRITTEN) - self._taken > outlet.frames + self._lease_n:
            self._attach(outlet)  # nothing can have sounded to the end of that
        while (n := min(outlet.count(at.WRITTEN) - self._taken, step_n - self._filled)) > 0:
            part = slice(self._filled, self._filled + n)
            self._step[part] = outlet.frames_at(self._taken, n)
            kept_from = outlet.count(at.WRITTEN) + self._quantum - outlet.frames
            if self._taken < min(kept_from, outlet.count(at.READ)):
                if self._granted is None:
                    self._attach(outlet)
                    return
                self._step[part] = self._before[part]
            self._taken, self._filled = self._taken + n, self._filled + n
            if self._filled == step_n:
                self._granted = [float(c) for c in self._watch.take(self._step)]
                self._step, self._before, self._filled = self._before, self._step, 0
                self._grant(outlet)
        whole = self._taken - self._filled
        while self._left + step_n <= min(whole, outlet.count(at.READ)):
            self._watch.left(outlet.gains_left(self._left, step_n))
            self._left += step_n

    def _grant(self, outlet: Outlet) -> None:
        """Renew the lease; not after a trip, and not before a step was read."""
        if self._watch.trip:
            if outlet.count(at.LEASE_UNTIL):
                outlet.grant(0)
            return
        if self._granted is None:
            return
        same = self._granted == outlet.granted(outlet.count(at.GRANTS))
        outlet.grant(outlet.count(at.READ) + self._lease_n, None if same else self._granted)
        if not self._sees:
            self._sees = True
            _tell(self._connection, {"ready": True})

    def _watch_clock(self) -> None:
        jumped_s = time.time() - time.monotonic() - self._clock_s
        if abs(jumped_s) > CLOCK_JUMP_S:
            self._clock_s += jumped_s
            self._watch.trip = self._watch.trip or (
                f"the clock jumped by {jumped_s:+.0f} s: the evening's record cannot be timed"
            )

    # -- what it says ----------------------------------------------------------------------------

    def _say(self) -> None:
        if self._watch.trip and not self._trip:
            self._trip = self._watch.trip
            _tell(self._connection, {"trip": self._trip})
        now = time.monotonic()
        for what, every_s in (("reading", READING_S), ("levels", LEVELS_S)):
            if now >= self._due[what]:
                self._due[what] = now + every_s
                _tell(self._connection, {what: getattr(self, f"_{what}")()})

    def _reading(self) -> dict[str, Any]:
        """How it stands and what is held; see `snapshot.GuardView`."""
        return {"state": self._watch.state, "held_db": self._watch.held_db()}

    def _levels(self) -> list[list[float | None]]:
        """Per listener: level, band, cap, dose and dose since doors."""
        level_db, band, cap_db = self._watch.levels()
        dose = self._watch.dose
        return [
            [
                round(float(level), 2) if np.isfinite(level) else None,
                GUARDED[int(b)].nominal_hz,
                round(float(cap), 2),
                round(float(percent), 3),
                round(float(doors), 3),
            ]
            for level, b, cap, percent, doors in zip(
                level_db, band, cap_db, dose.percent, dose.since_doors, strict=True
            )
        ]
