"""The process that looks through the cues of an edited show, as often as it is asked to.

It is ordinary and in nobody's way. Of several requests that wait only the newest is answered: the
document is looked at as it is by then.

From the host:  {"look": N}
To the host:    {"progress": [what, done, of]}, {"looked": N, "barred": {...}, "cues": [...]},
                {"looked": N, "failed": why}
"""

from __future__ import annotations

import contextlib
import json
import time
from multiprocessing.connection import Connection
from pathlib import Path
from typing import Any, NamedTuple

from threadpoolctl import threadpool_limits

from beamctl.errors import BeamctlError
from beamctl.host.barring import Kept, barred, cue_levels, rows_of
from beamctl.host.document import Readings, stored_show
from beamctl.host.link import encode
from beamctl.host.quiet import send_native_chatter_to

PROGRESS_S = 0.1


class LookingTask(NamedTuple):
    """What one such process is to look at."""

    document: str  # path of the document
    seal: str
    air: Readings | None
    log: str


def looking_main(connection: Connection, task: LookingTask) -> None:
    """Entry point of the process; returns when the host went away."""
    send_native_chatter_to(Path(task.log))
    threadpool_limits(1)
    with contextlib.suppress(EOFError, OSError):
        _Looker(connection, task).run()


class _Looker:
    """Answers one request after another; what they have in common is worked out once."""

    def __init__(self, connection: Connection, task: LookingTask) -> None:
        self._connection, self._task = connection, task
        self._kept = Kept()
        self._told_s = 0.0

    def run(self) -> None:
        """Look for as long as the host is there."""
        while True:
            asked = json.loads(self._connection.recv_bytes())
            while self._connection.poll():
                asked = json.loads(self._connection.recv_bytes())
            self._tell({"looked": asked["look"]} | self._look())

    def _look(self) -> dict[str, Any]:
        try:
            show = stored_show(Path(self._task.document), self._task.seal, self._task.air)
            found = cue_levels(show, self._progress, self._kept)
        except BeamctlError as error:
            return {"failed": error.what}
        return {"barred": barred(found), "cues": rows_of(found)}

    def _progress(self, what: str, done: int, of: int) -> None:
        if (now := time.monotonic()) - self._told_s >= PROGRESS_S:
            self._told_s = now
            self._tell({"progress": [what, done, of]})

    def _tell(self, message: dict[str, Any]) -> None:
        self._connection.send_bytes(encode(message))
