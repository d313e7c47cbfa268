"""The host: one show, its player, its journal, its engine, and the desks that look on.

One loop owns all of it. Threads only carry, and one reads what was edited: they put what is to be
done into the loop's queue, so that a desk that freezes or floods cannot touch the show.
"""

from __future__ import annotations

import gc
import queue
import sys
import time
from collections import deque
from collections.abc import Callable, Iterable
from dataclasses import asdict, replace
from datetime import datetime
from pathlib import Path
from typing import Any, NamedTuple

from beamctl.errors import BeamctlError
from beamctl.host.asking import event_of
from beamctl.host.desks import Answer as Send
from beamctl.host.desks import Door
from beamctl.host.document import Document, Loaded, Readings, on_disk, stored
from beamctl.host.draft_process import Saved
from beamctl.host.drafting import Candidate, Drafting
from beamctl.host.editrows import edit_of
from beamctl.host.journal import Journal, clock, texts
from beamctl.host.link import encode
from beamctl.host.loading import Hashes
from beamctl.host.logwords import Log
from beamctl.host.picture import sheet_view
from beamctl.host.places import memory_folder, new_journal, show_key, socket_address
from beamctl.host.playing import Handover, Lines, Playing
from beamctl.host.priority import HOST_PRIORITY, ask_for_real_time
from beamctl.host.remembered import remember_mode, remembered_mode
from beamctl.show.checks import GUARD, HOUSE, RIG
from beamctl.show.events import Acknowledge, Event
from beamctl.show.once import Once
from beamctl.show.records import Record
from beamctl.snapshot import AirView, Answer

TICK_S = 0.004
SWITCH_S = 0.0005  # how long another thread may keep the loop waiting
SNAPSHOT_S = 0.04
COUNTERS_S = 10.0
FILES_S = 1.0
CAPS = (GUARD, RIG, HOUSE)  # the files that the caps hang on
LOCKED = Answer(False, "locked", "the show is locked: unlock it first, by the typed word")


class Air(NamedTuple):
    """Readings of the air, by whom, and when on the monotonic clock."""

    who: str
    at_s: float
    readings: Readings


class Host:
    """Runs one show until it is asked to stop; `run` is the loop."""

    def __init__(self, folder: Path, sink: str, journal: Path | None = None) -> None:
        document = Document.of(folder)
        show = document.load()
        document, loaded = document.with_lists(show.rig), Loaded(show, Hashes().of(show))
        sys.setswitchinterval(SWITCH_S)
        ask_for_real_time(HOST_PRIORITY)
        self._folder, self._sink = folder, sink
        self._inbox: queue.SimpleQueue[Callable[[], None]] = queue.SimpleQueue()
        self._door = Door(socket_address(folder), folder, self._from_desk)
        path = journal or new_journal(show.sheet.title, datetime.now().astimezone())
        self.journal = Journal(path, loaded, document, sink)
        self._document = memory_folder() / f"{show_key(folder)}.show"
        document.store(self._document)
        self._log = Log()
        self._notices: deque[str] = deque(maxlen=100)
        self._stopping = False
        self._failure: BeamctlError | None = None
        self._snapshot: tuple[float, bytes] = (-1.0, b"")
        self._counted_at = time.monotonic()
        self._files_at, self._changed = 0.0, False
        self._air: Air | None = None
        self._next: Loaded | None = None  # what is played once what plays has ended
        self._draft = Drafting(
            self._document, show, on_disk(folder), self._inbox.put, self._take_up
        )
        self._lines = Lines(self._inbox.put, self._write, self._notice, self._fail)
        self._playing = Playing(self._document, loaded, sink, self._lines, self._first())
        self._playing.start("")
        gc.collect()
        gc.freeze()  # what is there by now stays, and the loop has no time to look through it

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
        self._playing.tick()
        if self._next is not None and self._playing.over:
            self._begin(self._next)
        self._look_at_files()
        self._count()

    def _look_at_files(self) -> None:
        """Say it when guard, rig or house change on disk: what runs keeps what it began with."""
        now = time.monotonic()
        if now - self._files_at > FILES_S and not self._changed:
            self._files_at = now
            found = on_disk(self._folder, CAPS)
            read = self._draft.digests
            changed = [name for name in CAPS if found.get(name) != read.get(name)]
            if changed:
                self._changed = True
                what = ", ".join(changed)
                self._notice(f"{what} changed on disk: this host keeps the caps it began with")

    def _count(self) -> None:
        """Time into the journal every now and then, and counters while it may sound."""
        now = time.monotonic()
        if now - self._counted_at > COUNTERS_S:
            self._counted_at = now
            sample = self._playing.now()
            self._write([clock(sample)])
            if (args := self._playing.counters()) is not None:
                self._write([Record(sample, "counters", args=args)])

    def _write(self, records: Iterable[Record]) -> None:
        records = tuple(records)
        self.journal.write(records)
        self._log.take(records)
        if self.journal.problem:
            self._notice(self.journal.problem)

    def _notice(self, text: str) -> None:
        if text not in self._notices:
            self._notices.append(text)

    def _fail(self, error: BeamctlError) -> None:
        self._failure = error
        self.stop()

    # -- edits -----------------------------------------------------------------------------------

    def _take_up(self, what: Candidate | Saved) -> Answer:
        """Take up what the draft proposes, or say why not."""
        self._snapshot = (-1.0, b"")
        if isinstance(what, Candidate):
            return self._try(what)
        self._changed = False
        args = {"version": what.version}
        self._write([Record(self._playing.now(), "save", who="desk", args=args)])
        return Answer(True)

    def _try(self, candidate: Candidate) -> Answer:
        """Take up an edited show: at once when only cues differ, else by another engine and guard.

        Refused in SHOW, and where something may sound that another engine would end.
        """
        playing, proposal = self._playing, candidate.proposal
        if playing.player.locked:
            return LOCKED
        air = self._air.readings if self._air else None
        loaded = Loaded(candidate.show, proposal.digests).breathing(air)
        news = playing.news_in(loaded.show)
        if news and playing.player.output == "OPEN":
            what = f"hush first: {news} is taken up only while nothing sounds"
            return Answer(False, "busy", what)
        self._draft.proposed.replace(self._document)
        if news or self._next is not None:
            self._end_for(loaded)
        else:
            playing.adopt(loaded, proposal.edited, proposal.renamed, proposal.doubts)
        args = {"label": proposal.label, "version": proposal.version, "mode": playing.player.mode}
        self._write([Record(playing.now(), "edit", who="desk", args=args)])
        return Answer(True)

    def _end_for(self, loaded: Loaded) -> None:
        """Have what plays end, and `loaded` begin after it."""
        self._next = loaded
        self._playing.end()

    def _begin(self, loaded: Loaded) -> None:
        self._next = None
        before = self._playing.finish()
        gc.collect()
        kept = texts(loaded, stored(self._document))
        self._write([Record(before.sample, "texts", args=kept)])
        self._playing = Playing(self._document, loaded, self._sink, self._lines, before)
        self._playing.start(self._air.who if self._air else "")

    def _first(self) -> Handover:
        """What the last host of this show left to this one: its mode."""
        mode = remembered_mode(self._folder)
        if mode != "WRITE":
            args = {"from": "WRITE", "to": mode, "name": ""}
            self._write([Record(0, "mode", who="the last host", args=args)])
        return Handover(Once(), mode)

    @property
    def _loaded(self) -> Loaded:
        """The newest show that was taken up."""
        return self._next or self._playing.loaded

    # -- desks -----------------------------------------------------------------------------------

    def _from_desk(self, message: Any, send: Send) -> None:
        """Have a desk answered; this is on the thread that serves it."""
        asked = message if isinstance(message, dict) else {}
        do, what = asked.get("do"), asked.get("what")
        if do == "history" and what in ("undo", "redo", "save"):
            do = what
        if do == "edit" and edit_of(asked.get("edit")) is None:
            do = None
        if do in ("edit", "undo", "redo", "save", "draft"):
            self._inbox.put(lambda: self._edit(do, asked.get("edit"), send))
        else:
            self._inbox.put(lambda: send(self._answer(do, asked)))

    def _edit(self, do: str, edit: Any, send: Send) -> None:
        if do in ("edit", "undo", "redo") and self._playing.player.locked:
            send(encode(LOCKED))
        else:
            self._draft.ask(do, send, edit)

    def _answer(self, do: object, message: dict[str, Any]) -> bytes:
        if do == "snapshot":
            return self._current_snapshot()
        if do == "sheet":
            return encode(sheet_view(self._loaded.show, self._draft.version))
        if do == "levels":
            return encode([asdict(level) for level in self._playing.guarding.levels()])
        if do == "cue-levels":
            return encode(self._playing.looking.cues)
        if do == "log" and isinstance(most := message.get("most"), int):
            return encode(self._log.newest(most))
        if do == "stop":
            self.stop()
            return encode(Answer(True))
        if do == "act" and (event := event_of(message)) is not None:
            return encode(self._handle(event))
        return encode(Answer(False, "bad-type", "the host knows no such request"))

    def _handle(self, event: Event) -> Answer:
        records = self._playing.handle(event)
        if isinstance(event, Acknowledge) and self._notices:
            self._notices.popleft()
        self._snapshot = (-1.0, b"")
        for record in records:
            if record.what == "refused":
                return Answer(False, record.args["reason"], record.args["text"])
            if record.what == "mode" and (why := remember_mode(self._folder, record.args["to"])):
                self._notice(why)
            if record.what == "air":
                self._air = Air(record.who, time.monotonic(), record.args)
                self._end_for(self._loaded.breathing(record.args))
        return Answer(True)

    def _current_snapshot(self) -> bytes:
        now = time.monotonic()
        if now - self._snapshot[0] > SNAPSHOT_S:
            waits = self._playing.waits
            if self._next is not None:
                waits = "engine and guard end, to start anew with what was edited"
            found = replace(
                self._playing.snapshot(),
                sheet_version=self._draft.version,
                notices=tuple(self._notices),
                edit=replace(self._draft.view, waits=waits),
                air=self._air_view(now),
            )
            self._snapshot = (now, encode(found))
        return self._snapshot[1]

    def _air_view(self, now_s: float) -> AirView:
        readings = self._loaded.show.house.air.model_dump()
        if self._air is None:
            return AirView(**readings)
        return AirView(**readings, source=self._air.who, age_s=now_s - self._air.at_s)

    # -- the end ---------------------------------------------------------------------------------

    def _close(self) -> None:
        """Let the engine go by its ramp, write what left, and take the socket away."""
        self._stopping = True
        self._playing.end()
        while not self._playing.over:
            self._take(TICK_S)
            self._playing.tick()
        self._take(0.0)
        self._draft.end()
        self._document.unlink(missing_ok=True)
        self._playing.finish()
        self.journal.close()
        self._door.close()
