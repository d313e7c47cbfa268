"""Keeps the process that looks through edited cues: begun by the first edit, asked by every one."""

from __future__ import annotations

import contextlib
from multiprocessing.connection import Connection
from pathlib import Path
from typing import Any

from beamctl.host.child import Post, start_child
from beamctl.host.document import Loaded
from beamctl.host.link import encode
from beamctl.host.looking_process import LookingTask, looking_main
from beamctl.host.places import state_folder
from beamctl.host.priority import ordinarily

LIVES = 2  # for one look
END_S = 1.0


class Looker:
    """The looks of one loaded show, numbered from 1; what comes of them is posted to the loop."""

    def __init__(self, document: Path, loaded: Loaded, post: Post) -> None:
        log = str(state_folder() / "looking.log")
        self._task = LookingTask(str(document), loaded.show.seal, loaded.air, log)
        self._post = post
        self.words = ""  # how far it is, "" while it has nothing to do
        self._asked = self._answered = 0
        self._lives = LIVES
        self._process: Any = None
        self._line: Connection | None = None
        self._generation = 0

    def ask(self) -> int:
        """Have the cues looked through as the document has them now; the number of that look."""
        self._asked, self._lives = self._asked + 1, LIVES
        self.words = "looking through the edited cues"
        if self._line is None:
            self._start()
        self._send()
        return self._asked

    def hear(self, message: dict[str, Any]) -> dict[str, Any] | None:
        """Take a message in; it again when it is what came of a look."""
        if message["generation"] != self._generation:
            return None
        if "progress" in message:
            what, done, of = message["progress"]
            self.words = f"looking through the edited cues: {what}, {done} of {of}"
        elif "gone" in message:
            return self._gone()
        elif "looked" in message:
            self._answered = message["looked"]
            if self._answered == self._asked:
                self.words = ""
            return message
        return None

    def end(self) -> None:
        """End the process, whatever it does."""
        self._generation += 1
        if self._process is not None:
            self._process.kill()
            self._process.join(END_S)

    def _start(self) -> None:
        self._generation += 1
        self._process, self._line = start_child(
            looking_main, self._task, self._generation, self._post, ordinarily()
        )

    def _send(self) -> None:
        with contextlib.suppress(OSError):  # it is gone, and `hear` will be told
            assert self._line is not None
            self._line.send_bytes(encode({"look": self._asked}))

    def _gone(self) -> dict[str, Any] | None:
        """Have another look for what the last one owes; what came of it when that is hopeless."""
        self._line, self._lives = None, self._lives - 1
        if self._answered == self._asked:
            return None
        if self._lives:
            self._start()
            self._send()
            return None
        self.words, self._answered = "", self._asked
        return {"looked": self._asked, "failed": "what looks through the cues died"}
