"""Real processes of the program for tests: the host, the tools, and what they leave behind."""

from __future__ import annotations

import json
import os
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from beamctl.host import offline
from beamctl.host.journal import read_journal
from beamctl.host.link import Link
from beamctl.host.offline import Stream
from beamctl.show.records import Record
from beamctl.show.show import Show
from beamctl.snapshot import Snapshot

COMMAND = (sys.executable, "-m", "beamctl")
STARTS_S = 180.0  # a machine without compiled code makes it first
SOON_S = 30.0

Samples = NDArray[np.float32]


def wait_for(condition: Callable[[], bool], what: str, timeout_s: float = SOON_S) -> None:
    """Return once the condition holds; fail the test, naming `what`, if it never does."""
    until = time.monotonic() + timeout_s
    while not condition():
        if time.monotonic() > until:
            pytest.fail(f"waited {timeout_s:g} s for {what}")
        time.sleep(0.02)


def need(tool: str) -> None:
    """Skip the test where `tool` is not installed; fail it there under CI=true."""
    if shutil.which(tool) is None:
        reason = f"{tool} is not installed"
        if os.environ.get("CI") == "true":
            pytest.fail(reason)
        pytest.skip(reason)


def beamctl(*arguments: str | Path) -> subprocess.CompletedProcess[str]:
    """Run one command to its end."""
    return subprocess.run(
        [*COMMAND, *map(str, arguments)],
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        timeout=STARTS_S,
    )


@dataclass
class Running:
    """A host process and a line to it."""

    process: subprocess.Popen[str]
    link: Link
    journal: Path

    def snapshot(self) -> Snapshot:
        """What a desk would see now."""
        return self.link.snapshot()

    def act(self, name: str, /, **arguments: object) -> None:
        """Ask for an action, which must not be refused."""
        answer = self.link.act(name, **arguments)
        assert answer.done, f"{name}: {answer.text}"

    def open(self) -> None:
        """The two acts that open the output, and a wait until its gate has risen."""
        self.act("ready")
        self.act("confirm")
        assert self.snapshot().output == "OPEN"
        self.pass_by(0.05)

    def pass_by(self, seconds: float) -> None:
        """Wait until the engine has rendered so much more."""
        engine = self.snapshot().engine
        goal = engine.rendered + seconds * engine.rate_hz
        wait_for(lambda: self.snapshot().engine.rendered >= goal, f"{seconds} s of samples")

    def stop(self) -> int:
        """End the host as `host --stop` does; its exit code."""
        self.link.stop_host()
        self.link.close()
        return self.process.wait(SOON_S)

    def wait(self) -> int:
        """Exit code of a host that was told to end already."""
        self.link.close()
        return self.process.wait(SOON_S)


@contextmanager
def host(
    show: Path, sink: str, journal: Path, env: dict[str, str] | None = None
) -> Iterator[Running]:
    """A host of `show` whose sink is open and whose guard sees; gone when the block is left."""
    process = subprocess.Popen(
        [*COMMAND, "host", str(show), "--sink", sink, "--journal", str(journal)],
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.STDOUT,
        text=True,
        env=env,
    )
    running = Running(process, Link(show), journal)
    try:
        wait_for(lambda: _has_opened(running), "the host to open its sink", STARTS_S)
        yield running
    finally:
        running.link.close()
        if process.poll() is None:
            process.send_signal(signal.SIGTERM)
            try:
                process.wait(SOON_S)
            except subprocess.TimeoutExpired:
                process.kill()
        process.communicate()


def _has_opened(running: Running) -> bool:
    if running.process.poll() is not None:
        pytest.fail(f"the host ended: {running.process.communicate()[0]}")
    try:
        found = running.snapshot()
        return found.output == "SHUT" and found.guard.state != "BLIND"
    except (OSError, EOFError):
        return False


def stop_host(show: Path) -> None:
    """End whatever host runs `show`, and wait until its line is gone."""
    link = Link(show)
    try:
        link.stop_host()
    except (OSError, EOFError):
        return
    finally:
        link.close()
    wait_for(lambda: not answers(show), "the host to end")


def answers(show: Path) -> bool:
    """True while a host of `show` is there."""
    link = Link(show)
    try:
        link.snapshot()
    except (OSError, EOFError):
        return False
    finally:
        link.close()
    return True


def records_of(journal: Path) -> list[Record]:
    """The records of a journal; none while it is not there yet."""
    return list(read_journal(journal)[1]) if journal.exists() else []


def told(journal: Path, what: str) -> list[Record]:
    """The records of one kind."""
    return [record for record in records_of(journal) if record.what == what]


def fired(journal: Path) -> list[str]:
    """Cues in the order of their GOs."""
    return [record.cue for record in told(journal, "go")]


def outputs(journal: Path) -> list[str]:
    """The output states that were entered, in order."""
    return [str(record.args["to"]) for record in told(journal, "output")]


def streams_of(journal: Path) -> tuple[Show, list[Stream]]:
    """The show of a journal, and what each of its engines sent: one, unless one died."""
    streams = offline.recall(journal)
    assert len(streams) == 1, "an engine died meanwhile"
    return streams[0].show, streams


def rendered(_show: Show, streams: list[Stream]) -> Samples:
    """The feeds of a stream, (samples, feeds), rendered in this process."""
    blocks: list[Samples] = []
    offline.replay(streams, lambda block: blocks.append(block.copy()), lambda *_: None)
    return np.concatenate(blocks)


def replayed(journal: Path) -> str:
    """The SHA-256 that `beamctl replay` prints, which must exit with 0 and find them equal."""
    done = beamctl("replay", journal)
    assert done.returncode == 0, done.stdout + done.stderr
    assert done.stdout.count("the same samples") == len(done.stdout.splitlines()) == 1, done.stdout
    return done.stdout.split()[-1]


def last_hash(journal: Path) -> str:
    """The SHA-256 of what left, which the journal ends with."""
    last = json.loads(journal.read_text().splitlines()[-1])
    assert last["what"] == "left"
    return str(last["args"]["left"])
