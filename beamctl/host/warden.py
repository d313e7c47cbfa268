"""Keeps the guard process: starts it, tells it what to watch, and knows when it sees nothing.

A dead guard is replaced at once, so that a trip can be cleared; three deaths within a minute stop
that. One that stalls is ended after two seconds. Neither opens anything: the lease is gone by then.
"""

from __future__ import annotations

import time
from collections import deque
from multiprocessing.connection import Connection
from pathlib import Path
from typing import Any

from beamctl.host.child import Post, start_child
from beamctl.host.document import Loaded
from beamctl.host.guard_process import GuardTask, guard_main
from beamctl.host.link import encode
from beamctl.host.places import state_folder
from beamctl.host.priority import ordinarily

STALE_S = 0.5  # without a reading it is blind, the lease long over …
STALLED_S = 2.0  # … and then it is ended
DEATHS, DEATHS_S = 3, 60.0


class Warden:
    """The guard of one host; what it says, and that it went, is posted to the host's loop."""

    def __init__(self, document: Path, loaded: Loaded, post: Post, dose: list[list[float]]) -> None:
        """`document` is the path of what it guards; `dose` is what was counted, see GuardTask."""
        self._document, self._loaded, self._post = str(document), loaded, post
        self._dose = dose
        self.reading: dict[str, Any] = {}
        self.levels: list[list[Any]] = []
        self._why = "starting"
        self._read_at = self._watched_at = time.monotonic()
        self._ready = self._checked = self._missing = False
        self._outlet = ""
        self._deaths: deque[float] = deque(maxlen=DEATHS)
        self._process: Any = None
        self._line: Connection | None = None
        self._generation = 0

    def start(self) -> None:
        """Start a guard; it watches nothing before `attach`."""
        log = str(state_folder() / "guard.log")
        check = not self._checked
        if self.levels:
            self._dose = [[row[column] for row in self.levels] for column in (3, 4)]
        seal, air = self._loaded.show.seal, self._loaded.air
        task = GuardTask(self._document, seal, air, self._dose, check, log)
        self._generation += 1
        self._ready = False
        self._process, self._line = start_child(
            guard_main, task, self._generation, self._post, ordinarily()
        )
        if self._outlet:
            self.attach(self._outlet)

    def attach(self, outlet: str) -> None:
        """Watch the stream whose memory is at `outlet`."""
        self._outlet = outlet
        self._send({"attach": outlet})

    def clear(self) -> None:
        """Its trip was cleared."""
        self._send({"clear": True})

    @property
    def blind(self) -> str:
        """Why it sees nothing now, "" while it does."""
        if not self._ready:
            return self._why
        if time.monotonic() - self._read_at > STALE_S:
            return "it stalls"
        return ""

    @property
    def pid(self) -> int:
        """Process number of the guard."""
        return int(self._process.pid)

    def hear(self, message: dict[str, Any]) -> str:
        """Take a message in; returns why it tripped, when it says so now."""
        if message["generation"] != self._generation:
            return ""
        if "ready" in message:
            self._ready = True
        elif "looked" in message:
            self._checked = True
        elif "progress" in message:
            what, done, of = message["progress"]
            self._why = f"looking through the cues: {what}, {done} of {of}"
        elif "levels" in message:
            self.levels = message["levels"]
        elif "reading" in message:
            self.reading = message["reading"]
        elif "blind" in message:
            return self._blinded(message["blind"])
        elif "gone" in message:
            return self._gone()
        self._read_at = time.monotonic()
        return str(message.get("trip", ""))

    def watch(self) -> None:
        """Replace a guard that is gone, and end one that stalls.

        Where the host itself stalled, the guard's readings only wait.
        """
        if self._missing:
            self._missing, self._why = False, f"{self._why}; starting again"
            self.start()
        now = time.monotonic()
        if now - self._watched_at > STALE_S / 2:
            self._read_at = now
        self._watched_at = now
        if self._ready and now - self._read_at > STALLED_S:
            self._blinded("it stalled, and was ended")
            self._process.kill()

    def alive(self) -> bool:
        """True while the guard's process runs."""
        return bool(self._process is not None and self._process.is_alive())

    def stop(self) -> None:
        """Have the guard end; nothing it still says counts."""
        self._generation += 1
        self._blinded("starting anew")
        self._missing = False
        self._send({"stop": True})

    def end(self, wait_s: float) -> None:
        """Wait for the guard to end by itself, then make it."""
        if self._process is not None:
            self._process.join(wait_s)
            if self._process.is_alive():
                self._process.kill()
                self._process.join(wait_s)

    # -- inside ----------------------------------------------------------------------------------

    def _blinded(self, why: str) -> str:
        """It sees nothing any more; returns why, when it did so far."""
        saw, self._ready, self._why = self._ready, False, why
        return why if saw else ""

    def _gone(self) -> str:
        """The process ended; returns why, if news. Another is started once that was dealt with."""
        news = self._blinded("the guard died") if self._ready else ""
        now = time.monotonic()
        self._deaths.append(now)
        if len(self._deaths) < DEATHS or now - self._deaths[0] > DEATHS_S:
            self._missing = True
        return news

    def _send(self, message: dict[str, Any]) -> None:
        try:
            if self._line is not None:
                self._line.send_bytes(encode(message))
        except OSError:
            return  # it is gone, and `hear` will be told
