"""The host: one show, its player, its journal, its engine, and the desks that look on.

One loop owns all of it. Threads only carry: one per desk and one for the engine put messages into
the loop's queue, so that a desk that freezes or floods cannot touch the show.
"""

from __future__ import annotations

import queue
import time
from collections import deque
from collections.abc import Callable, Iterable
from dataclasses import asdict
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from beamctl.engine import layout as at
from beamctl.engine.drift import Drift
from beamctl.errors import BeamctlError, DeviceError, ShowError
from beamctl.files.reader import load_show
from beamctl.host import counters
from beamctl.host.asking import event_of
from beamctl.host.batches import Batches
from beamctl.host.desks import Door
from beamctl.host.guarding import Guarding
from beamctl.host.journal import Journal
from beamctl.host.keeper import Keeper
from beamctl.host.link import encode
from beamctl.host.loading import changed_files
from beamctl.host.picture import Picture
from beamctl.host.places import new_journal, socket_address
from beamctl.host.priority import HOST_PRIORITY, ask_for_real_time
from beamctl.host.warden import Warden
from beamctl.show.events import Acknowledge, Event
from beamctl.show.player import Player
from beamctl.show.records import FINAL, Record
from beamctl.snapshot import Answer

TICK_S = 0.004
AHEAD_S = 0.025  # how far ahead of the engine acts are handed over
SLACK_QUANTA = 1  # between what the engine has reached and the sample an event is given
LEASE_S = 0.15
SNAPSHOT_S = 0.04
COUNTERS_S = 10.0
OPENS_S = 0.3
FILES_S = 1.0
STOP_S = 5.0


class Host:
    """Runs one show until it is asked to stop; `run` is the loop."""

    def __init__(self, folder: Path, sink: str, journal: Path | None = None) -> None:
        self.show = load_show(folder)
        ask_for_real_time(HOST_PRIORITY)
        self._inbox: queue.SimpleQueue[Callable[[], None]] = queue.SimpleQueue()
        self._door = Door(socket_address(folder), folder, self._from_desk)
        now = datetime.now().astimezone()
        self.journal = Journal(journal or new_journal(self.show.sheet.title, now), self.show, sink)
        self._sink = sink
        self._player = Player(self.show)
        self._picture = Picture(self.show)
        self._notices: deque[str] = deque(maxlen=100)
        self._batches = Batches(self._write, self._player.moved)
        self._warden = Warden(self.show, self._hear_guard)
        self._guarding = Guarding(self.show, self._warden, self._player)
        self._write(self._guarding.begins())
        self._drift = Drift(self.show.rig.rate_hz)
        self._busy = "starting"
        self._left: dict[str, Any] | None = None
        self._gone = False  # the engine's line has ended, and all it said was heard
        self._stopping = False
        self._failure: BeamctlError | None = None
        self._opened_once = False
        self._unplayable = False  # what is on disk is not the show that this host plays
        self._asked: int | None = None  # the frame by which the final stage must have opened
        self._snapshot: tuple[float, bytes] = (-1.0, b"")
        self._counted_at = time.monotonic()
        self._files_at, self._changed = 0.0, False
        self._keeper = Keeper(self.show, sink, self._hear)
        self._warden.start()
        self._keeper.start()

    def run(self) -> int:
        """Serve until stopped; returns an exit code. BeamctlError when the engine cannot start."""
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

    # -- the loop --------------------------------------------------------------------------------

    def _take(self, timeout_s: float) -> None:
        """Do what waits in the queue, and wait at most `timeout_s` for the first of it."""
        try:
            self._inbox.get(timeout=timeout_s)()
            while True:
                self._inbox.get_nowait()()
        except queue.Empty:
            return

    def _tick(self) -> None:
        if self._keeper.watch():
            self._notice("engine stalled and was ended")
        self._trip(self._guarding.tick(self._now()))
        self._look_at_files()
        self._count()
        if self._player.output in ("SHUT", "OPEN", "HUSHED", "TRIPPED"):
            self._tell_final_stage()
            self._live()
            if not self._batches.open:  # what hangs on a GO waits until its sample is certain
                ahead = round(AHEAD_S * self.show.rig.rate_hz)
                self._send(self._player.advance(self._now() + ahead))
        elif (names := self._keeper.look()) is not None and self._sink not in names:
            self._notice(f"needed {self._sink}, offered {', '.join(names) or 'no device'}")

    def _now(self) -> int:
        """The frame that the engine renders next."""
        outlet = self._keeper.outlet
        return 0 if outlet is None else outlet.count(at.WRITTEN)

    # -- the final stage -------------------------------------------------------------------------

    def _live(self) -> None:
        """Answer for what sounds: a host that stalls lets it end."""
        if (outlet := self._keeper.outlet) is not None:
            life = round(LEASE_S * self.show.rig.rate_hz)
            outlet.host_lives(outlet.count(at.READ) + life)
            self._drift.note(time.monotonic_ns(), outlet.count(at.LAST_READ))
            late = self._asked is not None and outlet.count(at.READ) > self._asked
            if late and self._player.output == "OPEN":  # no lease was there to open on
                self._asked = None
                self._write(self._player.sink("host-over", self._now()))
                self._notice("asked to open, the way out stayed shut; * then Enter asks again")

    def _tell_final_stage(self) -> None:
        """Put into the journal what the final stage did, and act on what nobody asked for."""
        outlet = self._keeper.outlet
        for event in outlet.events() if outlet is not None else ():
            if event.name == "granted" and outlet is not None:
                ceilings = {"ceilings": outlet.granted(event.value)}
                self._write([Record(event.sample, "grant", args=ceilings)])
            elif event.name in ("opened", "hushed", "lease-over", "host-over"):
                self._asked = None
                args = {"open": int(event.name == "opened"), "n": event.value, "why": event.name}
                self._write([Record(event.sample, "gate", args=args)])
            elif event.name == "short":
                self._write([Record(event.sample, "short", args={"seen": event.value})])
            elif event.name == "dry":
                self._write([Record(event.sample, "dry", args={"n": event.value})])
            else:
                self._write([Record(event.sample, "fault", args={event.name: event.value})])
                self._notice(f"{event.name} on feed {event.value}")
            if event.name == "host-over" and self._player.output == "OPEN":
                self._write(self._player.sink("host-over", event.sample))
                self._notice("the host stalled, and the output was hushed; * then Enter restores")
            if event.name == "lease-over" and self._player.output == "OPEN":
                why = self._warden.blind or "it stalled"
                self._trip(
                    self._player.trip(
                        f"the guard's lease ran out: {why}", event.sample, "lease-over"
                    )
                )

    # -- the guard -------------------------------------------------------------------------------

    def _hear_guard(self, message: dict[str, Any]) -> None:
        self._inbox.put(lambda: self._trip(self._guarding.hear(message, self._now())))

    def _trip(self, records: list[Record]) -> None:
        """Do what the guard made necessary: silence at once, and a notice."""
        for record in records:
            if record.what == "trip":
                if (outlet := self._keeper.outlet) is not None:
                    outlet.hush()
                self._notice(f"TRIPPED, {record.args['reason']}")
        self._write([record for record in records if record.what not in FINAL])

    def _look_at_files(self) -> None:
        """Say it when guard, rig or house change on disk: what runs keeps what it began with."""
        now = time.monotonic()
        if now - self._files_at > FILES_S and not self._changed:
            self._files_at = now
            if changed := changed_files(self.show):
                self._changed = True
                self._notice(f"{changed} changed on disk: this host keeps the caps it began with")

    # -- the engine ------------------------------------------------------------------------------

    def _hear(self, message: dict[str, Any]) -> None:
        self._inbox.put(lambda: self._from_engine(message))

    def _from_engine(self, message: dict[str, Any]) -> None:
        if not self._keeper.is_ours(message):
            return
        if "batch" in message:
            self._batches.settle(message["batch"], message["moved"])
        elif "progress" in message:
            what, done, of = message["progress"]
            self._busy = f"{what}, {done + 1} of {of}" if of > 1 else what
        elif "ready" in message:
            self._engine_ready(message["ready"])
        elif "left" in message:
            self._left = message["left"]
        elif "lost" in message:
            self._sink_lost(message)
        elif "gone" in message:
            self._gone = True
            if not self._stopping:
                self._engine_gone()

    def _engine_ready(self, ready: dict[str, Any]) -> None:
        self._busy, self._opened_once, self._left = "", True, None
        self._gone = False
        self._drift = Drift(self.show.rig.rate_hz)
        start = self._keeper.opened(ready)
        self._write([Record(start, "stream", args=ready)])
        self._warden.attach(str(self._keeper.outlet_path))
        self._tell_time()
        self._send(self._player.sink("sink-open", self._stamp()))

    def _sink_lost(self, message: dict[str, Any]) -> None:
        what, do = message["lost"]
        if not self._opened_once:  # it never sounded: the command line tells, and ends
            self._failure = DeviceError(what, do, message["code"])
            self.stop()
            return
        self._notice(what)
        if message["code"] == ShowError.exit_code:
            self._unplayable = True
            self._lose(f"{what}: {do}")
            return
        self._lose("looking for the sink")
        self._keeper.look_for_sink()

    def _engine_gone(self) -> None:
        if self._keeper.looking or self._unplayable:
            return  # it said why before it went
        if not self._opened_once:
            self._failure = DeviceError("the engine ended while it started", "its log tells why")
            self.stop()
            return
        self._tell_final_stage()
        self._lose("engine gone: starting another")
        self._notice("engine gone; what looped comes back with * then Enter")
        if not self._keeper.died():
            self._busy = "engine gone three times in a minute"
            self._notice("three engines died in a minute: end the host and look for the cause")

    def _lose(self, busy: str) -> None:
        self._busy = busy
        self._batches.forget()
        self._write(self._player.sink("sink-lost", self._now()))

    # -- records ---------------------------------------------------------------------------------

    def _stamp(self) -> int:
        """The sample that an event is given."""
        return self._now() + SLACK_QUANTA * self.show.rig.quantum

    def _send(self, records: list[Record]) -> None:
        """Hand records to the engine; the gate is asked of the final stage directly."""
        outlet = self._keeper.outlet
        for record in records:
            if record.what == "gate" and outlet is not None:
                if record.args["open"]:
                    outlet.ask_open(int(record.args["n"]))
                    wait = round(OPENS_S * self.show.rig.rate_hz)
                    self._asked = outlet.count(at.READ) + wait
                else:
                    outlet.hush()
                    self._asked = None
        self._batches.send([r for r in records if r.what not in FINAL], self._keeper.send)

    def _write(self, records: Iterable[Record]) -> None:
        self.journal.write(records)
        if self.journal.problem:
            self._notice(self.journal.problem)

    def _tell_time(self) -> None:
        """What time it is at the sample that is rendered next, for who reads the journal later."""
        utc = datetime.now(UTC).isoformat(timespec="milliseconds")
        self._write([Record(self._now(), "clock", args={"utc": utc})])

    def _count(self) -> None:
        """Time into the journal every now and then, and counters while it may sound."""
        now = time.monotonic()
        outlet = self._keeper.outlet
        if now - self._counted_at > COUNTERS_S:
            self._counted_at = now
            self._tell_time()
            if outlet is not None and self._player.output == "OPEN":
                args = counters.of(outlet, self._keeper.status, self._drift)
                self._write([Record(self._now(), "counters", args=args)])

    def _notice(self, text: str) -> None:
        if text not in self._notices:
            self._notices.append(text)

    # -- desks -----------------------------------------------------------------------------------

    def _from_desk(self, message: Any, answer: Callable[[bytes], None]) -> None:
        self._inbox.put(lambda: answer(self._answer(message)))

    def _answer(self, message: Any) -> bytes:
        do = message.get("do") if isinstance(message, dict) else None
        if do == "sheet":
            return encode(self._picture.sheet())
        if do == "levels":
            return encode([asdict(level) for level in self._guarding.levels()])
        if do == "snapshot":
            return self._current_snapshot()
        if do == "stop":
            self.stop()
            return encode(Answer(True))
        if do == "act" and (event := event_of(message)) is not None:
            return encode(self._handle(event))
        return encode(Answer(False, "bad-type", "the host knows no such request"))

    def _handle(self, event: Event) -> Answer:
        sample = self._stamp()
        self._send(self._player.advance(sample))  # so that the answer is to this event alone
        records = self._player.handle(event, sample)
        if any(record.what == "clear" for record in records):
            self._warden.clear()
        if isinstance(event, Acknowledge) and self._notices:
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
            keeper = self._keeper
            engine = counters.view(self.show, self._sink, keeper, self._drift, self._busy)
            picture = self._picture.snapshot(
                self._player, keeper.status, engine, self._guarding.view(), self._notices
            )
            self._snapshot = (now, encode(picture))
        return self._snapshot[1]

    # -- the end ---------------------------------------------------------------------------------

    def _close(self) -> None:
        """Let the engine go by its ramp, write what left, and take the socket away."""
        self._stopping = True
        self._keeper.send({"stop": True})
        until = time.monotonic() + STOP_S
        while self._left is None and not self._gone and time.monotonic() < until:
            self._live()
            self._take(TICK_S)
        self._take(0.0)
        self._tell_final_stage()
        self._batches.forget()
        self._write(self._player.sink("sink-close", self._now()))
        if self._left is not None:
            self._write([Record(self._left["written"], "left", args=self._left)])
        self._keeper.end(STOP_S)
        self._warden.end(STOP_S)
        self.journal.close()
        self._door.close()
