"""The host's side of the draft: asks its process, and has the loop take up what it proposes.

The process is begun when somebody first asks, and again when it died: then what was edited is still
there, and one step of undo takes it all back.
"""

from __future__ import annotations

import contextlib
import queue
import threading
from collections.abc import Callable
from multiprocessing.connection import Connection
from pathlib import Path
from typing import Any, NamedTuple

from beamctl.host.child import start_child
from beamctl.host.desks import Answer as Send
from beamctl.host.draft_process import DraftTask, Proposal, Saved, draft_main
from beamctl.host.link import encode
from beamctl.host.packing import unpack
from beamctl.host.places import state_folder
from beamctl.host.priority import ordinarily
from beamctl.show.show import Show
from beamctl.snapshot import Answer, EditView

END_S = 1.0
DIED = "what reads edits died: ask once more"


class Candidate(NamedTuple):
    """What is proposed, and the show that it is."""

    proposal: Proposal
    show: Show


class Drafting:
    """One draft; `post` has something done on the loop, on which all else here is called.

    document, proposed  paths, see DraftTask
    show     the newest that was taken up
    version  counts edits and saves
    digests  of the files as they were read or saved last
    """

    def __init__(
        self,
        document: Path,
        show: Show,
        digests: dict[str, str],
        post: Callable[[Callable[[], None]], None],
        decide: Callable[[Candidate | Saved], Answer],
    ) -> None:
        """`decide` takes something up, or says why not."""
        self.document, self.proposed = document, document.with_suffix(".proposed")
        self.show, self.digests, self.version = show, digests, 1
        self.view = EditView()
        self._post, self._decide = post, decide
        self._sends: dict[int, Send] = {}
        self._asked = self._generation = 0
        self._why = DIED
        self._process: Any = None
        self._outbox: queue.SimpleQueue[dict[str, Any]] | None = None

    def ask(self, do: str, send: Send, edit: Any = None) -> None:
        """Have one thing done that the process knows, and its answer sent.

        `edit` is a row that makes an edit.
        """
        if self._outbox is None:
            self._start()
        self._asked += 1
        self._sends[self._asked] = send
        self._put({"ask": self._asked, "do": do, "edit": edit})

    def end(self) -> None:
        """End the process; nobody is answered any more."""
        self._generation += 1
        if self._process is not None:
            self._process.kill()
            self._process.join(END_S)
        self.proposed.unlink(missing_ok=True)

    def _start(self) -> None:
        self._generation += 1
        log = str(state_folder() / "draft.log")
        task = DraftTask(str(self.document), str(self.proposed), self.digests, self.version, log)
        self._process, line = start_child(
            draft_main, task, self._generation, self._hear, ordinarily()
        )
        self._outbox = queue.SimpleQueue()
        threading.Thread(target=_carry, args=(self._outbox, line), daemon=True).start()

    def _hear(self, message: dict[str, Any]) -> None:
        """What the process says, on the thread that hears it."""
        if "propose" in message:
            candidate = Candidate(
                Proposal(**message["propose"]), unpack(message["show"], self.show)
            )
            self._post(lambda: self._weigh(candidate, message["generation"]))
        else:
            self._post(lambda: self._take(message))

    def _take(self, message: dict[str, Any]) -> None:
        if message["generation"] != self._generation:
            return
        if "saved" in message:
            self._weigh(Saved(**message["saved"]), message["generation"])
        elif "answer" in message:
            view = message["view"]
            self.view = EditView(**view | {"edited": tuple(view["edited"])})
            self._sends.pop(message["answer"])(encode(message["row"]))
        elif "failed" in message:
            self._why = message["failed"]
        elif "gone" in message:
            self._gone()

    def _gone(self) -> None:
        """Tell all who wait why they are not answered."""
        answer, self._why = encode(Answer(False, "busy", self._why)), DIED
        sends, self._sends, self._outbox = self._sends, {}, None
        for send in sends.values():
            send(answer)

    def _weigh(self, what: Candidate | Saved, generation: int) -> None:
        """Have it decided, and tell the process how."""
        if generation != self._generation:
            return
        answer = self._decide(what)
        if answer.done and isinstance(what, Candidate):
            self.show, self.version = what.show, what.proposal.version
        elif answer.done and isinstance(what, Saved):
            self.digests, self.version = what.digests, what.version
        self._put({"verdict": answer})

    def _put(self, message: dict[str, Any]) -> None:
        if self._outbox is not None:
            self._outbox.put(message)


def _carry(outbox: queue.SimpleQueue[dict[str, Any]], line: Connection) -> None:
    """Send what is put out: the loop never waits for the process to read."""
    with contextlib.suppress(OSError):
        while True:
            line.send_bytes(encode(outbox.get()))
