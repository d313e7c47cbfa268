"""One loaded show, from the start of its engine and guard to their end: all on the host's loop.

A show that differs in more than its cues is another loaded show: this one ends, and what outlasts
it is handed over.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Iterable, Mapping
from dataclasses import replace
from pathlib import Path
from types import MappingProxyType
from typing import Any, NamedTuple

from beamctl.engine import layout as at
from beamctl.engine.buffers import SEGMENT
from beamctl.errors import BeamctlError, DeviceError, ShowError
from beamctl.guard.points import listeners
from beamctl.host import counters
from beamctl.host.batches import Batches
from beamctl.host.document import Loaded
from beamctl.host.finalstage import FinalStage
from beamctl.host.guarding import Guarding
from beamctl.host.journal import clock
from beamctl.host.keeper import Keeper
from beamctl.host.loading import news_in, wanted_sounds
from beamctl.host.looker import Looker
from beamctl.host.looking import Looking
from beamctl.host.picture import Picture
from beamctl.host.warden import Warden
from beamctl.show.checks import HOUSE
from beamctl.show.events import Event, StandBy
from beamctl.show.once import Once
from beamctl.show.player import Player
from beamctl.show.records import FINAL, Record
from beamctl.show.show import Show
from beamctl.show.states import Mode
from beamctl.snapshot import Snapshot

AHEAD_S = 0.025  # how far ahead of the engine acts are handed over
SLACK_QUANTA = 1  # between what the engine has reached and the sample an event is given
STOP_S = 10.0
KILL_S = 0.2


class Lines(NamedTuple):
    """What a loaded show has of its host."""

    post: Callable[[Callable[[], None]], None]  # has it done on the loop
    write: Callable[[Iterable[Record]], None]
    notice: Callable[[str], None]
    fail: Callable[[BeamctlError], None]  # no engine ever opened


class Handover(NamedTuple):
    """What one loaded show leaves to the next."""

    once: Once
    mode: Mode = "WRITE"
    sample: int = 0  # of its first frame
    standby: str = ""
    tripped: str = ""
    vouched: str = ""
    house: str = ""  # digest of the house.toml that was vouched for
    dose: Mapping[str, tuple[float, float]] = MappingProxyType({})  # of every seat there ever was
    opened: bool = False
    looks: int = 0


class Playing:
    """Its player, engine, guard, and what looks through its cues."""

    def __init__(
        self, document: Path, loaded: Loaded, sink: str, lines: Lines, before: Handover
    ) -> None:
        """`document` is the path of what `loaded` was read from; it follows every edit."""
        show = loaded.show
        self.loaded, self.sink, self._lines, self._before = loaded, sink, lines, before
        self.busy = "starting"
        self.looks = before.looks
        self.player = Player(show, mode=before.mode, once=before.once)
        self.player.locks.tripped = before.tripped
        if before.house == show.digests[HOUSE]:
            self.player.locks.vouched = before.vouched
        self.picture = Picture(show)
        self.looking = Looking()
        self._looker = Looker(document, loaded, self._on_loop(self._from_looker))
        self._batches = Batches(lines.write, self.player.moved)
        self._warden = Warden(
            document, loaded, self._on_loop(self._from_guard), self._dose_before()
        )
        self.guarding = Guarding(show, self._warden, self.player)
        start = -(-before.sample // SEGMENT) * SEGMENT
        self.keeper = Keeper(document, loaded, sink, start, self._on_loop(self._from_engine))
        self.stage = FinalStage(
            self.keeper, self.player, lines.write, lines.notice, self._lease_over
        )
        self._prepared = wanted_sounds(show)
        self._opened = before.opened
        self._left: dict[str, Any] | None = None
        self._gone = False  # the engine's line has ended, and all it said was heard
        self._unplayable = False  # what is in the folder is not the show that this host plays
        self._ends_by: float | None = None

    def start(self, who: str) -> None:
        """Start guard and engine; `who` read the air, "" for the house's own."""
        sample = self._before.sample
        self._lines.write(self.guarding.begins(sample, who))
        if self._before.standby in self.player.cues:
            self._lines.write(self.player.handle(StandBy("host", self._before.standby), sample))
        self._warden.start()
        self.keeper.start()

    # -- every turn of the loop ------------------------------------------------------------------

    def tick(self) -> None:
        """Watch all that runs, and hand over what is due."""
        if self._ends_by is not None:
            self.stage.live()
            return
        if self.keeper.watch():
            self._lines.notice("engine stalled and was ended")
        self._trip(self.guarding.tick(self.now()))
        if self.player.output in ("SHUT", "OPEN", "HUSHED", "TRIPPED"):
            self.stage.tell()
            self.stage.live()
            if not self._batches.open:  # what hangs on a GO waits until its sample is certain
                ahead = round(AHEAD_S * self.player.rate_hz)
                self._send(self.player.advance(self.now() + ahead))
        elif (names := self.keeper.look()) is not None and self.sink not in names:
            self._lines.notice(f"needed {self.sink}, offered {', '.join(names) or 'no device'}")

    def now(self) -> int:
        """The frame that the engine renders next."""
        outlet = self.keeper.outlet
        return self._before.sample if outlet is None else outlet.count(at.WRITTEN)

    def counters(self) -> dict[str, Any] | None:
        """A line of counters for the journal, while it may sound."""
        if (outlet := self.keeper.outlet) is None or self.player.output != "OPEN":
            return None
        return counters.of(outlet, self.keeper.status, self.stage.drift)

    # -- what is asked ---------------------------------------------------------------------------

    def handle(self, event: Event) -> list[Record]:
        """Do what an event asks; the records that answer it, and nothing else."""
        sample = self._stamp()
        self._send(self.player.advance(sample))
        records = self.player.handle(event, sample)
        if any(record.what == "clear" for record in records):
            self._warden.clear()
        self._send([r for r in records if r.what != "air"])  # whoever takes it up says so
        return records

    def news_in(self, show: Show) -> str:
        """What of an edited show only another engine and guard can take up; "" for nothing."""
        if self._unplayable:
            return "what could not be played"
        prepared = self._prepared if self.keeper.ready else wanted_sounds(self.loaded.show)
        return news_in(show, self.loaded.show, prepared)

    def adopt(
        self,
        loaded: Loaded,
        edited: Iterable[str],
        renamed: Mapping[str, str],
        doubts: Iterable[str],
    ) -> None:
        """Take up an edited sheet while it plays; the cues `doubts` wait until looked at anew."""
        self.loaded, self.picture.show = loaded, loaded.show
        sample = self._stamp()
        self._send(self.player.advance(sample))
        records = self.player.adopt(loaded.show, sample, tuple(edited), renamed)
        if doubts := tuple(doubts):
            self.looking.doubt(doubts, self._looker.ask())
        self._bar()
        self._send(records)

    @property
    def waits(self) -> str:
        """What is being worked out, in words."""
        return self._looker.words

    def snapshot(self) -> Snapshot:
        """What it shows of itself; the host adds the rest."""
        engine = counters.view(
            self.loaded.show, self.sink, self.keeper, self.stage.drift, self.busy
        )
        found = self.picture.snapshot(self.player, self.keeper.status, engine, self.guarding.view())
        return replace(found, looked=self.looks)

    # -- the guard -------------------------------------------------------------------------------

    def _from_guard(self, message: dict[str, Any]) -> None:
        if self._ends_by is not None:
            return
        if "looked" in message:
            self._looked(message)
        self._trip(self.guarding.hear(message, self.now()))

    def _from_looker(self, message: dict[str, Any]) -> None:
        if (found := self._looker.hear(message)) is not None:
            self._looked(found)

    def _looked(self, message: dict[str, Any]) -> None:
        if "failed" in message:
            why = f"could not be looked at: {message['failed']}"
            self.looking.take(message["looked"], dict.fromkeys(self.player.cues, why), [])
        else:
            self.looking.take(message["looked"], message["barred"], message["cues"])
        self.looks += 1
        self._bar()

    def _bar(self) -> None:
        barred = self.looking.barred
        self.player.barred = {ref: why for ref, why in barred.items() if ref in self.player.cues}

    def _trip(self, records: list[Record]) -> None:
        """Do what the guard made necessary: silence at once, and a notice."""
        for record in records:
            if record.what == "trip":
                self.stage.hush()
                self._lines.notice(f"TRIPPED, {record.args['reason']}")
        self._lines.write([record for record in records if record.what not in FINAL])

    def _lease_over(self, sample: int) -> None:
        why = f"the guard's lease ran out: {self._warden.blind or 'it stalled'}"
        self._trip(self.player.trip(why, sample, "lease-over"))

    # -- the engine ------------------------------------------------------------------------------

    def _from_engine(self, message: dict[str, Any]) -> None:
        if not self.keeper.is_ours(message):
            return
        if "batch" in message:
            self._batches.settle(message["batch"], message["moved"])
        elif "left" in message:
            self._left = message["left"]
        elif "gone" in message:
            self._gone = True
            if self._ends_by is None:
                self._engine_gone()
        elif self._ends_by is not None:
            return
        elif "progress" in message:
            what, done, of = message["progress"]
            self.busy = f"{what}, {done + 1} of {of}" if of > 1 else what
        elif "ready" in message:
            self._engine_ready(message["ready"])
        elif "lost" in message:
            self._sink_lost(message)

    def _engine_ready(self, ready: dict[str, Any]) -> None:
        self.busy, self._opened, self._left = "", True, None
        self._gone = False
        self._prepared = wanted_sounds(self.loaded.show)
        start = self.keeper.opened(ready)
        self.stage.begin()
        self._lines.write([Record(start, "stream", args=ready), clock(self.now())])
        self._warden.attach(str(self.keeper.outlet_path))
        self._send(self.player.sink("sink-open", self._stamp()))

    def _sink_lost(self, message: dict[str, Any]) -> None:
        what, do = message["lost"]
        if not self._opened:  # it never sounded: the command line tells, and ends
            self._lines.fail(DeviceError(what, do, message["code"]))
            return
        self._lines.notice(what)
        if message["code"] == ShowError.exit_code:
            self._unplayable = True
            self._lose(f"{what}: {do}")
            return
        self._lose("looking for the sink")
        self.keeper.look_for_sink()

    def _engine_gone(self) -> None:
        if self.keeper.looking or self._unplayable:
            return  # it said why before it went
        if not self._opened:
            self._lines.fail(DeviceError("the engine ended while it started", "its log tells why"))
            return
        self.stage.tell()
        self._lose("engine gone: starting another")
        self._lines.notice("engine gone; what looped comes back with * then Enter")
        if not self.keeper.died():
            self.busy = "engine gone three times in a minute"
            self._lines.notice(
                "three engines died in a minute: end the host and look for the cause"
            )

    def _lose(self, busy: str) -> None:
        self.busy = busy
        self._batches.forget()
        self._lines.write(self.player.sink("sink-lost", self.now()))

    # -- records ---------------------------------------------------------------------------------

    def _stamp(self) -> int:
        """The sample that an event is given."""
        return self.now() + SLACK_QUANTA * self.loaded.show.rig.quantum

    def _send(self, records: list[Record]) -> None:
        """Hand records to the engine; the gate is asked of the final stage directly."""
        for record in records:
            if record.what == "gate":
                self.stage.gate(record)
        self._batches.send([r for r in records if r.what not in FINAL], self.keeper.send)

    def _on_loop(self, take: Callable[[dict[str, Any]], None]) -> Callable[[dict[str, Any]], None]:
        return lambda message: self._lines.post(lambda: take(message))

    # -- the end ---------------------------------------------------------------------------------

    def end(self) -> None:
        """Have engine and guard end by themselves, the engine by its ramp; `over` says when."""
        if self._ends_by is None:
            self._ends_by = time.monotonic() + STOP_S
            self.busy = "ending"
            self._lines.write(self.player.sink("sink-close", self.now()))
            self.keeper.send({"stop": True})
            self._warden.stop()
            self._looker.end()

    @property
    def over(self) -> bool:
        """True once both have ended, or will not."""
        assert self._ends_by is not None
        gone = self._gone and not self.keeper.alive() and not self._warden.alive()
        return gone or time.monotonic() > self._ends_by

    def finish(self) -> Handover:
        """Write what left, and take all that was shared away; what is left to the next show."""
        self.stage.tell()
        self._batches.forget()
        if self._left is not None:
            self._lines.write([Record(self._left["written"], "left", args=self._left)])
        player, sample = self.player, self.now()
        left = Handover(
            once=player.once,
            mode=player.mode,
            sample=sample,
            standby=player.standby,
            tripped=player.locks.tripped,
            vouched=player.locks.vouched,
            house=self.loaded.show.digests[HOUSE],
            dose={**self._before.dose, **self.guarding.dose()},
            opened=self._opened,
            looks=self.looks,
        )
        self._warden.end(KILL_S)
        self.keeper.end(KILL_S)
        return left

    def _dose_before(self) -> list[list[float]]:
        counted, people = self._before.dose, listeners(self.loaded.show.house)
        if not counted:
            return []
        return [[counted.get(who.name, (0.0, 0.0))[k] for who in people] for k in (0, 1)]
