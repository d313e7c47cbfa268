"""The host: one show, its player, its journal, its engine, and the desks that look on.

One loop owns all of it. Threads only carry: one per desk and one for the engine put messages into
the loop's queue, so that a desk that freezes or floods cannot touch the show.
"""

from __future__ import annotations

import contextlib
import json
import queue
import threading
import time
from collections import deque
from collections.abc import Iterable
from datetime import datetime
from multiprocessing import get_context
from multiprocessing.connection import Client, Connection, Listener
from pathlib import Path
from typing import Any

from beamctl.errors import DeviceError
from beamctl.files.reader import load_show
from beamctl.host.asking import event_of
from beamctl.host.engine_process import engine_main
from beamctl.host.journal import Journal
from beamctl.host.link import encode
from beamctl.host.offline import left
from beamctl.host.picture import Picture
from beamctl.host.places import new_journal, runtime_folder, show_key, socket_address, state_folder
from beamctl.host.status import Status
from beamctl.show.events import Event
from beamctl.show.player import Player
from beamctl.show.records import SOUNDING, Record
from beamctl.snapshot import Answer, EngineView

TICK_S = 0.004
AHEAD_S = 0.025  # how far ahead of the engine acts are handed over
SLACK_QUANTA = 1  # between what the engine has reached and the sample an event is given
SNAPSHOT_S = 0.04
STOP_S = 5.0
LONGEST_MESSAGE = 65_536


class Host:
    """Runs one show until it is asked to stop; `run` is the loop."""

    def __init__(self, folder: Path, sink: str, journal: Path | None = None) -> None:
        self.show = load_show(folder)
        self.address = socket_address(folder)
        _refuse_second(self.address, folder)
        now = datetime.now().astimezone()
        self.journal = Journal(journal or new_journal(self.show.sheet.title, now), self.show, sink)
        self._sink = sink
        self._player = Player(self.show)
        self._picture = Picture(self.show)
        self._notices: deque[str] = deque(maxlen=100)
        self._inbox: queue.SimpleQueue[tuple[str, dict[str, Any], Any]] = queue.SimpleQueue()
        self._batches: deque[tuple[int, list[Record], bool]] = deque()
        self._batch = 0
        self._busy = "starting"
        self._ready: dict[str, Any] = {}
        self._left: dict[str, Any] | None = None
        self._stopping = False
        self._failure: DeviceError | None = None
        self._snapshot: tuple[float, bytes] = (-1.0, b"")
        self._status = Status.create(runtime_folder() / f"{show_key(folder)}.status")
        self._listener = Listener(self.address)
        threading.Thread(target=self._accept, daemon=True).start()
        self._engine, self._line = self._start_engine()

    def run(self) -> int:
        """Serve until stopped; returns an exit code. DeviceError when the engine cannot start."""
        try:
            while not self._stopping:
                self._take(TICK_S)
                self._tick()
        finally:
            self._close()
        if self._failure is not None:
            raise self._failure
        return 0

    def stop(self) -> None:
        """End the loop at its next turn; may be called from a signal handler."""
        self._stopping = True

    # -- the engine ------------------------------------------------------------------------------

    def _start_engine(self) -> tuple[Any, Connection]:
        context = get_context("spawn")  # a fresh interpreter: no threads or locks inherited
        ours, theirs = context.Pipe()
        status = runtime_folder() / f"{show_key(Path(self.show.folder))}.status"
        log = state_folder() / "engine.log"
        arguments = (theirs, self.show.folder, self._sink, str(status), str(log))
        process = context.Process(target=engine_main, args=arguments, daemon=True)
        process.start()
        theirs.close()
        threading.Thread(target=self._hear, args=(ours,), daemon=True).start()
        return process, ours

    def _hear(self, line: Connection) -> None:
        try:
            while True:
                self._inbox.put(("engine", json.loads(line.recv_bytes()), None))
        except (EOFError, OSError):
            self._inbox.put(("engine", {"gone": True}, None))

    def _from_engine(self, message: dict[str, Any]) -> None:
        if "batch" in message:
            self._acknowledged(message["batch"], message["moved"])
        elif "progress" in message:
            what, done, of = message["progress"]
            self._busy = f"{what}, {done + 1} of {of}" if of > 1 else what
        elif "ready" in message:
            self._ready, self._busy = message["ready"], ""
            self._send(self._player.sink("sink-open", 0))
        elif "closing" in message:
            n = self.show.rig.rate_hz // 50
            self._write([Record(message["closing"], "gate", args={"open": 0, "n": n})])
        elif "left" in message:
            self._left = message
        elif "lost" in message:
            self._notices.append(" ".join(message["lost"]))
            self._lose()
            if not self._ready:  # it never sounded: nobody has to be kept from silence
                self._failure = DeviceError(*message["lost"])
                self.stop()
        elif "gone" in message and not self._stopping and self._left is None:
            if self._player.output != "LOST":
                self._notices.append("engine gone: nothing sounds; end the host and start it again")
            self._lose()

    def _lose(self) -> None:
        self._busy = "no sink"
        self._write(self._player.sink("sink-lost", self._now()))

    # -- records ---------------------------------------------------------------------------------

    def _now(self) -> int:
        return self._status["rendered"]

    def _send(self, records: list[Record]) -> None:
        """Hand a batch to the engine, and keep it for the journal until its samples are certain."""
        if not records:
            return
        sounding = [r for r in records if r.what in SOUNDING]
        self._batch += 1
        self._batches.append((self._batch, records, not sounding))
        if sounding:
            rows = [json.loads(r.to_json()) for r in sounding]
            try:
                self._line.send_bytes(encode({"batch": self._batch, "records": rows}))
            except OSError:
                self._batches.pop()
                return
        self._flush()

    def _acknowledged(self, batch: int, moved: int) -> None:
        self._batches = deque(
            (n, [r.later(moved) for r in records], True) if n == batch else (n, records, certain)
            for n, records, certain in self._batches
        )
        self._flush()

    def _flush(self) -> None:
        while self._batches and self._batches[0][2]:
            self._write(self._batches.popleft()[1])

    def _write(self, records: Iterable[Record]) -> None:
        self.journal.write(records)
        if self.journal.problem and self.journal.problem not in self._notices:
            self._notices.append(self.journal.problem)

    def _tick(self) -> None:
        if self._player.output in ("SHUT", "OPEN", "HUSHED"):
            ahead = round(AHEAD_S * self.show.rig.rate_hz)
            self._send(self._player.advance(self._now() + ahead))

    # -- desks -----------------------------------------------------------------------------------

    def _accept(self) -> None:
        while True:
            try:
                connection = self._listener.accept()
            except OSError:
                return
            threading.Thread(target=self._serve, args=(connection,), daemon=True).start()

    def _serve(self, connection: Connection) -> None:
        """One desk: pass its messages to the loop, one at a time, and its answers back."""
        answers: queue.SimpleQueue[bytes] = queue.SimpleQueue()
        try:
            while True:
                message = json.loads(connection.recv_bytes(LONGEST_MESSAGE))
                self._inbox.put(("desk", message, answers))
                connection.send_bytes(answers.get())
        except (EOFError, OSError, ValueError, RecursionError):
            connection.close()

    def _take(self, timeout_s: float) -> None:
        """Handle what waits in the queue, and wait at most `timeout_s` for the first of it."""
        try:
            source, message, answers = self._inbox.get(timeout=timeout_s)
            while True:
                if source == "engine":
                    self._from_engine(message)
                else:
                    answers.put(self._answer(message))
                source, message, answers = self._inbox.get_nowait()
        except queue.Empty:
            return

    def _answer(self, message: Any) -> bytes:
        do = message.get("do") if isinstance(message, dict) else None
        if do == "sheet":
            return encode(self._picture.sheet())
        if do == "snapshot":
            return self._current_snapshot()
        if do == "stop":
            self.stop()
            return encode(Answer(True))
        if do == "act" and (event := event_of(message)) is not None:
            return encode(self._handle(event))
        return encode(Answer(False, "bad-type", "the host knows no such request"))

    def _handle(self, event: Event) -> Answer:
        sample = self._now() + SLACK_QUANTA * self.show.rig.quantum
        records = self._player.handle(event, sample)
        if type(event).__name__ == "Acknowledge" and self._notices:
            self._notices.popleft()
        self._send(records)
        self._snapshot = (-1.0, b"")
        for record in records:
            if record.what == "refused":
                return Answer(False, record.args["reason"], record.args["text"])
        return Answer(True)

    def _current_snapshot(self) -> bytes:
        now = time.monotonic()
        if now - self._snapshot[0] > SNAPSHOT_S:
            picture = self._picture.snapshot(
                self._player, self._status, self._engine_view(), self._notices
            )
            self._snapshot = (now, encode(picture))
        return self._snapshot[1]

    def _engine_view(self) -> EngineView:
        rig, status = self.show.rig, self._status
        return EngineView(
            sink=self._sink,
            rate_hz=rig.rate_hz,
            feeds=self.show.channels,
            quantum=rig.quantum,
            ring_ms=rig.ring_ms,
            rendered=status["rendered"],
            late=status["late"],
            load_pct=status["load_ppm"] / 1e4,
            compile_s=self._ready.get("compile_s", 0.0),
            busy=self._busy,
            route=self._ready.get("route", ""),
        )

    # -- the end ---------------------------------------------------------------------------------

    def _close(self) -> None:
        """Let the engine go by its ramp, write what left, and take the socket away."""
        self._stopping = True
        with contextlib.suppress(OSError):
            self._line.send_bytes(encode({"stop": True}))
        until = time.monotonic() + STOP_S
        while self._left is None and self._engine.is_alive() and time.monotonic() < until:
            self._take(TICK_S)
        self._engine.join(STOP_S)
        self._take(0.0)
        self._write(self._player.sink("sink-close", self._now()))
        if self._left is not None:
            self._write([left(self._left["left"], self._left["sha256"])])
        self.journal.close()
        self._listener.close()


def _refuse_second(address: str, folder: Path) -> None:
    """DeviceError when a host runs this show already; a socket left by a dead one is removed."""
    try:
        Client(address).close()
    except (FileNotFoundError, ConnectionError):
        Path(address).unlink(missing_ok=True)
        return
    raise DeviceError(f"a host runs {folder} already", f"`beamctl desk {folder}` joins it")
