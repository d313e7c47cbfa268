"""Blows to the processes of a running show, and what its output must be around them."""

from __future__ import annotations

import contextlib
import os
import pty
import select
import signal
import subprocess
import termios
import threading
import time
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import NamedTuple

import numpy as np
import soundfile
from support.ears import AUDIBLE, MS, Caught, Heard
from support.running import COMMAND, SOON_S, STARTS_S, Running, told, wait_for
from support.smallshow import CELL, GUARD, HOUSE, RATE_HZ

from beamctl.engine import layout as at
from beamctl.engine.chain import Chain
from beamctl.engine.outlet import Outlet
from beamctl.host.loading import prepare_sounds
from beamctl.host.offline import Stream
from beamctl.host.places import memory_folder, show_key, state_folder
from beamctl.show.records import Record
from beamctl.show.show import Show

RAMP = 20 * MS
TITLE = "a loop that travels"

SHEET = f"""format = 1
title = "Blows"
[beam.drone]
panel = "square"
[[cue]]
ref = "1"
title = "{TITLE}"
[[cue.act]]
beam = "drone"
sound = "noise.wav"
loop = true
seat = "A1"
law = "ssb"
trim_db = -12.0
over_s = 0.05
[[cue.act]]
at_s = 0.1
beam = "drone"
seat = "A4"
over_s = 60.0
"""

RIG = f"""format = 1
rate_hz = {RATE_HZ}
ring_ms = 32.0
[panel.square]
at_m = [0.0, 0.0, 3.0]
tilt_deg = -17.0
grid = {{ columns = 4, rows = 2, pitch_mm = 10.0 }}
{CELL}"""


def write_loop_show(folder: Path) -> Path:
    """Eight feeds, one cue: a loop of noise under a beam that travels, so that no frame recurs."""
    (folder / "sounds").mkdir(parents=True)
    for name, text in {"sheet": SHEET, "rig": RIG, "house": HOUSE, "guard": GUARD}.items():
        (folder / f"{name}.toml").write_text(text)
    noise = np.random.default_rng(7).normal(0.0, 0.1, 60_007)  # 50 005 5/6 periods of the carrier
    soundfile.write(folder / "sounds/noise.wav", noise, 48_000)
    return folder


class Blow(NamedTuple):
    """When a blow fell: the frame that the final stage was to send next, and the time."""

    frame: int
    at_s: float

    def since_ms(self) -> float:
        """Time since the blow."""
        return 1000.0 * (time.monotonic() - self.at_s)


# -- processes --------------------------------------------------------------------------------


def strike(outlet: Outlet, pid: int, how: signal.Signals) -> Blow:
    """Send `how` to a process at once after the final stage let a block of an open output out."""
    before, until_s = outlet.count(at.SOUNDED), time.monotonic() + SOON_S
    while outlet.count(at.SOUNDED) == before or outlet.gate_gain < 1.0:
        assert time.monotonic() < until_s, "nothing sounds, so a blow would show nothing"
        time.sleep(0.0002)
    blow = Blow(outlet.count(at.READ), time.monotonic())
    os.kill(pid, how)
    assert outlet.count(at.GATE) == 1
    return blow


@contextmanager
def going_on(pid: int) -> Iterator[None]:
    """A stopped process goes on when the block is left, whatever became of the test."""
    try:
        yield
    finally:
        os.kill(pid, signal.SIGCONT)


def children_of(running: Running, log: str) -> list[int]:
    """Process numbers of those children of a host that write to this log."""
    host = running.process.pid
    found = []
    for child in Path(f"/proc/{host}/task/{host}/children").read_text().split():
        with contextlib.suppress(OSError):  # it may end meanwhile
            if Path(f"/proc/{child}/fd/1").readlink().name == log:
                found.append(int(child))
    return found


def engines_of(running: Running) -> list[int]:
    """Process numbers of the engines of a host."""
    return children_of(running, "engine.log")


def engine_of(running: Running) -> int:
    """Process number of its one engine."""
    (found,) = engines_of(running)
    return found


def guard_of(running: Running) -> int:
    """Process number of the guard of a host."""
    (found,) = children_of(running, "guard.log")
    return found


class Watched:
    """A process that is not ours, whose end is noticed at once."""

    def __init__(self, pid: int) -> None:
        self.pid = pid
        self._handle = os.pidfd_open(pid)

    def renders_no_more(self) -> bool:
        """True once its main thread is dead; others may still be dying."""
        try:
            state = Path(f"/proc/{self.pid}/stat").read_bytes().rpartition(b")")[2].split()[0]
        except OSError:
            return True
        return state in (b"Z", b"X")

    def ended(self, timeout_s: float = SOON_S) -> bool:
        """True once all of the process is dead."""
        poll = select.poll()
        poll.register(self._handle, select.POLLIN)
        return bool(poll.poll(1000.0 * timeout_s))

    def close(self) -> None:
        """Watch no more."""
        os.close(self._handle)


@contextmanager
def watched(pid: int) -> Iterator[Watched]:
    """The process of this number, watched."""
    process = Watched(pid)
    try:
        yield process
    finally:
        process.close()


class Desk:
    """A desk that has joined a host, on a terminal that is read, or that nobody ever reads."""

    def __init__(self, show: Path, frozen: bool) -> None:
        read = state_folder() / "cautioned" / show_key(show)  # the caution, some other day
        read.parent.mkdir(parents=True, exist_ok=True)
        read.touch()
        self._ours, theirs = pty.openpty()
        termios.tcsetwinsize(self._ours, (60, 200))
        self.process = subprocess.Popen(
            [*COMMAND, "desk", str(show)],
            stdin=theirs,
            stdout=theirs,
            stderr=theirs,
            start_new_session=True,
        )
        os.close(theirs)
        self.shown = bytearray()
        if not frozen:
            threading.Thread(target=self._read, daemon=True).start()

    def is_blocked(self) -> bool:
        """True when a thread of the desk waits for its terminal to take what it writes."""
        for thread in Path(f"/proc/{self.process.pid}/task").iterdir():
            with contextlib.suppress(OSError):  # it may end meanwhile
                where = (thread / "wchan").read_text()
                if "tty" in where or where == "wait_woken":
                    return True
        return False

    def end(self) -> None:
        """Kill what is left of it."""
        self.process.kill()
        self.process.wait(SOON_S)
        os.close(self._ours)

    def _read(self) -> None:
        try:
            while block := os.read(self._ours, 65_536):
                self.shown += block
        except OSError:  # nobody holds the other end any more
            return


@contextmanager
def desk(show: Path, frozen: bool = False) -> Iterator[Desk]:
    """A desk that shows the sheet, or one whose terminal nobody ever reads."""
    found = Desk(show, frozen)
    try:
        if not frozen:
            wait_for(lambda: TITLE.encode() in found.shown, "the desk to show the sheet", STARTS_S)
        yield found
    finally:
        found.end()


# -- a show that plays ------------------------------------------------------------------------


class Stage:
    """A show on a host, and an eye on the final stage of its engine."""

    def __init__(self, running: Running, folder: Path) -> None:
        self.running = running
        self._path = memory_folder() / f"{show_key(folder)}.outlet"
        self.join()

    def join(self) -> None:
        """Look at the engine that runs now, once the guard does too."""
        self.outlet = Outlet.attach(self._path)
        lease = self.outlet.memory[at.LEASE_UNTIL :]
        wait_for(lambda: lease[0] > self.outlet.count(at.READ), "the guard's lease", STARTS_S)

    def play(self) -> None:
        """Open the output and fire the cue, until both its acts are under way and written down."""
        self.running.open()
        self.running.act("go", ref="1")
        journal = self.running.journal
        wait_for(lambda: len(told(journal, "aim")) == 2, "the travel in the journal")
        self.running.pass_by(0.1)
        self.outlet.events()  # the host has written these

    def final_records(self) -> list[Record]:
        """What the final stage did since the cue was played, as a host that lives writes it."""
        found = []
        args: dict[str, object]
        for event in self.outlet.events():
            if event.name == "dry":
                found.append(Record(event.sample, "dry", args={"n": event.value}))
            elif event.name == "granted":
                args = {"ceilings": self.outlet.granted(event.value)}
                found.append(Record(event.sample, "grant", args=args))
            else:
                args = {"open": int(event.name == "opened"), "n": event.value, "why": event.name}
                found.append(Record(event.sample, "gate", args=args))
        return found


def again(show: Show, records: Iterable[Record], start: int, until: int) -> Heard:
    """Frames `start` to `until` of a show under these records, through renderer and final stage."""
    chain = Chain(show, prepare_sounds(show, lambda *_: None), start)
    for record in records:
        chain.put(record)
    out = np.zeros((until - start, show.channels), np.float32)
    chain.render(out)
    return Heard(start, out)


class Judge:
    """Holds what was heard of one engine against the replay of what it was sent."""

    def __init__(self, show: Show, stream: Stream, until: int | None = None) -> None:
        """`until`: the frame that an engine came to which could not tell it itself."""
        if until is None:
            assert stream.left is not None
            until = int(stream.left.args["read"])
        self.start, self.until = stream.start, until
        self._gates = [r for r in stream.records if r.what == "gate"]
        self.expected = again(show, stream.records, self.start, until)
        unclosed = [r for r in stream.records if r.what != "gate" or r.args["open"]]
        self.asked = again(show, unclosed, self.start, until)

    def gates(self) -> list[tuple[str, int]]:
        """Why the gate moved, and when."""
        return [(str(r.args["why"]), r.sample) for r in self._gates]

    def same_and_no_louder(self, caught: Caught, tolerance: float, cut: bool = False) -> Heard:
        """What left is the replay, and nowhere above what the cue asked.

        Before the engine began, after it ended, and from a `cut` on, nothing sounds at all.
        """
        heard = caught(self.expected)
        begin = max(heard.first, self.start)
        end = heard.silent_from() if cut else min(heard.end, self.until)
        assert begin < end <= self.until
        assert not heard.between(heard.first, begin).any()
        assert not heard.between(end, heard.end).any()
        sent = heard.between(begin, end)
        expected, asked = (h.between(begin, end) for h in (self.expected, self.asked))
        np.testing.assert_allclose(sent, expected, rtol=0.0, atol=tolerance)
        assert (np.abs(sent) <= np.abs(asked) + tolerance).all()
        return heard

    def falls_by_the_ramp(self, heard: Heard, begin: int) -> None:
        """From `begin` on, for 20 ms, the output follows half a cosine down to nothing."""
        sent, full = (h.between(begin, begin + RAMP) for h in (heard, self.asked))
        assert (np.abs(full).max(axis=1) > AUDIBLE).mean() > 0.5
        fall = np.cos(0.5 * np.pi * np.arange(RAMP) / RAMP)[:, np.newaxis] ** 2
        np.testing.assert_allclose(sent, fall * full, rtol=0.0, atol=1e-5)
        assert not heard.between(begin + RAMP, begin + 2 * RAMP).any()
