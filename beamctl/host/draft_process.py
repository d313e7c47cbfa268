"""The draft's process: keeps the texts as edited and their history, and makes shows of them.

Reading a long sheet takes longer than the host's loop may be away, and by a thread beside it the
loop would be late as well. One thing is done at a time, in the order asked; what was edited counts
once the host has taken it up.

From the host:  {"ask": N, "do": "edit" | "undo" | "redo" | "save" | "draft", "edit": {...}},
                {"verdict": {...}}
To the host:    {"propose": {...}, "show": packed}, {"saved": {...}}, and at last
                {"answer": N, "row": {...}, "view": {...}}; {"failed": why} before it ends
"""

from __future__ import annotations

import contextlib
import json
import traceback
from collections import deque
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from multiprocessing.connection import Connection
from pathlib import Path
from typing import Any, NamedTuple

from beamctl.errors import BeamctlError
from beamctl.files.edits import edited
from beamctl.files.reader import read_show
from beamctl.files.saving import save
from beamctl.files.sounds import SOUNDS
from beamctl.host.document import FILES, Document, on_disk, stored
from beamctl.host.editrows import edit_of
from beamctl.host.link import encode
from beamctl.host.loading import Hashes
from beamctl.host.looking import doubtful, sounding
from beamctl.host.packing import pack
from beamctl.host.quiet import send_native_chatter_to
from beamctl.show.differences import edited_cues
from beamctl.show.edits import BEGUN, Edit, Rename
from beamctl.show.history import History
from beamctl.snapshot import Answer, EditView

Texts = Mapping[str, str]
Renamed = Mapping[str, str]  # cue before → cue after


class DraftTask(NamedTuple):
    """What the draft begins with."""

    document: str  # path of the document that the host plays
    proposed: str  # path where a document is put before the host takes it up
    digests: dict[str, str]  # of the files as they were read or saved last
    version: int
    log: str


class Proposal(NamedTuple):
    """An edited show that can be played, for the host to take up.

    label    what was done, in words
    edited   cues of its sheet that are new or changed
    renamed  cues that only bear another number
    doubts   cues whose forecast may not be what it was
    digests  of every file it is played from
    """

    version: int
    label: str
    edited: Sequence[str]
    renamed: Renamed
    doubts: Sequence[str]
    digests: Mapping[str, str]


class Saved(NamedTuple):
    """The texts are on disk; `digests` are those of the files."""

    version: int
    digests: dict[str, str]


def draft_main(connection: Connection, task: DraftTask) -> None:
    """Entry point of the process; returns when the host went away."""
    send_native_chatter_to(Path(task.log))
    with contextlib.suppress(EOFError, OSError):
        try:
            _Draft(connection, task).run()
        except BeamctlError as error:  # what is played cannot be read any more
            connection.send_bytes(encode({"failed": _refused(error).text}))


class _Draft:
    """The texts, their history, and the line to the host."""

    def __init__(self, connection: Connection, task: DraftTask) -> None:
        self._connection, self._proposed = connection, Path(task.proposed)
        self._waiting: deque[dict[str, Any]] = deque()
        self._digests, self._version = task.digests, task.version
        self._hashes = Hashes()
        self._document = stored(Path(task.document))
        self._folder = Path(self._document.folder)
        found, problems = read_show(self._folder, self._document.texts)
        self._show = found or self._document.load()  # which raises what is wrong with it
        self._remarks = tuple(map(str, problems))
        self._sounding = sounding(self._show)
        self._history, self._saved_sheet = History(self._own()), self._show.sheet
        self._renames: list[Renamed] = []  # of every step, also of those that were undone
        self._step = 0  # how many of them are done
        self._count_as_edited()

    def run(self) -> None:
        """Do what is asked for as long as the host is there."""
        deeds: dict[str, Callable[[dict[str, Any]], object]] = {
            "edit": lambda asked: self._edit(edit_of(asked["edit"])),
            "undo": lambda _: self._undo(),
            "redo": lambda _: self._redo(),
            "save": lambda _: self._save(),
            "draft": lambda _: self._draft(),
        }
        while True:
            asked = self._waiting.popleft() if self._waiting else self._hear()
            try:
                row = deeds[asked["do"]](asked)
            except BeamctlError as error:
                row = _refused(error)
            except Exception as error:  # nothing was taken up, and the history is worth keeping
                traceback.print_exc()
                row = Answer(False, "bad-type", f"this cannot be done: {error!r}")
            self._tell({"answer": asked["ask"], "row": row, "view": self._view()})

    def _edit(self, edit: Edit | None) -> Answer:
        if edit is None:
            return Answer(False, "bad-type", "this is no edit")
        texts = edited(self._history.texts, edit)
        if texts == self._history.texts:
            return Answer(True)
        renamed = _renamed(edit)
        answer = self._propose(edit.label, texts, renamed)
        if answer.done:
            self._history.do(edit.label, texts)
            self._renames[self._step :] = [renamed]
            self._step += 1
        return answer

    def _undo(self) -> Answer:
        if (label := self._history.undo()) is None:
            return Answer(False, "busy", "nothing to undo")
        renamed = {new: old for old, new in self._renames[self._step - 1].items()}
        answer = self._propose(f"undo: {label}", self._history.texts, renamed)
        if answer.done:
            self._step -= 1
        else:
            self._history.redo()
        return answer

    def _redo(self) -> Answer:
        if (label := self._history.redo()) is None:
            return Answer(False, "busy", "nothing to redo")
        answer = self._propose(f"redo: {label}", self._history.texts, self._renames[self._step])
        if answer.done:
            self._step += 1
        else:
            self._history.undo()
        return answer

    def _propose(self, label: str, texts: Texts, renamed: Renamed) -> Answer:
        """Read the show of these texts, and have the host take it up."""
        document = replace(self._document, texts={**self._document.texts, **texts})
        show, problems = read_show(self._folder, document.texts)
        if show is None:
            error = next(problem for problem in problems if problem.severity == "error")
            return Answer(False, "bad-type", str(error))
        document = document.with_lists(show.rig)
        document.store(self._proposed)
        now = sounding(show)
        doubts = doubtful(self._show.sheet, self._sounding, show.sheet, now)
        changed, digests = edited_cues(self._show.sheet, show.sheet), self._hashes.of(show)
        proposal = Proposal(self._version + 1, label, changed, renamed, doubts, digests)
        answer = self._ask("propose", proposal, show=pack(show, self._show))
        if answer.done:
            self._show, self._document, self._version = show, document, proposal.version
            self._sounding = now
            self._remarks = tuple(map(str, problems))
        return answer

    def _save(self) -> Answer:
        """Write the files that were edited; what else somebody changed there is left alone."""
        texts, saved = self._history.texts, self._history.saved
        changed = {file: t for file, t in texts.items() if t != saved.get(file, BEGUN)}
        try:
            save(self._folder, changed, self._digests)
        except BeamctlError as error:
            return replace(_refused(error), reason="not-allowed")
        self._history.mark_saved()
        self._saved_sheet, self._version = self._show.sheet, self._version + 1
        self._digests = {**self._digests, **on_disk(self._folder, changed)}
        return self._ask("saved", Saved(self._version, self._digests))

    def _draft(self) -> dict[str, Any]:
        """See `desk.link.Draft`."""
        sounds = self._folder / SOUNDS
        files = (path for path in sounds.rglob("*") if path.is_file())
        return {
            "version": self._version,
            "texts": dict(self._document.texts),
            "saved": {**self._document.texts, **self._history.saved},
            "files": sorted(path.relative_to(sounds).as_posix() for path in files),
            "remarks": self._remarks,
        }

    def _view(self) -> EditView:
        """How the draft stands against what is saved."""
        history = self._history
        return EditView(
            undo=history.undo_label or "",
            redo=history.redo_label or "",
            unsaved=history.unsaved,
            edited=edited_cues(self._saved_sheet, self._show.sheet),
        )

    def _own(self) -> dict[str, str]:
        """Its texts that are edited: not the cell lists."""
        return {name: text for name, text in self._document.texts.items() if name in FILES}

    def _count_as_edited(self) -> None:
        """What differs from the files as they were read was edited: before a process that died."""
        own, now, read = self._own(), on_disk(self._folder), Document.of(self._folder).texts
        kept = [name for name in own if name in now and now[name] == self._digests.get(name)]
        saved = {**own, **{name: read[name] for name in kept}}
        if own != saved:
            self._history = History(saved)
            self._history.do("what was edited so far", own)
            self._renames, self._step = [{}], 1
            document = replace(self._document, texts={**self._document.texts, **saved})
            self._saved_sheet = document.load().sheet

    # -- the line --------------------------------------------------------------------------------

    def _hear(self) -> dict[str, Any]:
        message: dict[str, Any] = json.loads(self._connection.recv_bytes())
        return message

    def _ask(self, what: str, row: Proposal | Saved, **rest: object) -> Answer:
        """Have the host decide; what is asked meanwhile waits."""
        self._tell({what: row._asdict(), **rest})
        while "verdict" not in (message := self._hear()):
            self._waiting.append(message)
        return Answer(**message["verdict"])

    def _tell(self, message: dict[str, Any]) -> None:
        self._connection.send_bytes(encode(message))


def _renamed(edit: Edit) -> Renamed:
    """Which cue bears which number after an edit, of those that were given another."""
    now: dict[str, str] = {}
    for step in edit.steps:
        if isinstance(step, Rename) and step.place[:1] == ("cue",):
            before = str(step.place[1])
            first = next((old for old, new in now.items() if new == before), before)
            now[first] = step.name
    return now


def _refused(error: BeamctlError) -> Answer:
    return Answer(False, "bad-type", "; ".join(filter(None, (error.what, error.do))))
