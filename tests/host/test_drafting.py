"""The draft and its process: what counts is what the loop took up, and what died comes back."""

from __future__ import annotations

import json
import queue
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest
from support.editing import trim
from support.running import SOON_S
from support.smallshow import write_show

from beamctl.host.document import Document, on_disk
from beamctl.host.draft_process import Saved
from beamctl.host.drafting import Candidate, Drafting
from beamctl.host.editrows import edit_row
from beamctl.show.edits import Edit, Rename, Set
from beamctl.snapshot import Answer


class Loop:
    """A loop that takes up what it is told to, and notes what it was proposed."""

    def __init__(self, folder: Path, document: Path) -> None:
        self.verdict = Answer(True)
        self.proposed: list[Candidate | Saved] = []
        self._inbox: queue.SimpleQueue[Callable[[], None]] = queue.SimpleQueue()
        found = Document.of(folder)
        found.store(document)
        self.drafting = Drafting(
            document, found.load(), on_disk(folder), self._inbox.put, self._decide
        )

    def _decide(self, what: Candidate | Saved) -> Answer:
        self.proposed.append(what)
        if self.verdict.done and isinstance(what, Candidate):
            self.drafting.proposed.replace(self.drafting.document)
        return self.verdict

    def ask(self, do: str, *steps: Any) -> dict[str, Any]:
        """Ask, and turn until it is answered."""
        answers: list[bytes] = []
        edit = edit_row(Edit("an edit", steps)) if steps else None
        self.drafting.ask(do, answers.append, edit)
        while not answers:
            self._inbox.get(timeout=SOON_S)()
        row: dict[str, Any] = json.loads(answers[0])
        return row

    def trims(self) -> tuple[float | None, ...]:
        """The trim of the first act of every cue that was taken up last."""
        return tuple(cue.act[0].trim_db for cue in self.drafting.show.sheet.cue)


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("BEAMCTL_STATE", str(tmp_path / "state"))
    return write_show(tmp_path / "small")


@pytest.fixture
def loop(folder: Path, tmp_path: Path) -> Iterator[Loop]:
    loop = Loop(folder, tmp_path / "a.show")
    yield loop
    loop.drafting.end()


def test_only_what_was_taken_up_enters_the_history(loop: Loop) -> None:
    before = loop.trims()
    edited = (before[0], -30.0, *before[2:])
    assert loop.ask("edit", trim("2", -30.0))["done"]
    (first,) = loop.proposed
    assert isinstance(first, Candidate)
    assert (first.proposal.version, first.proposal.edited) == (2, ["2"])
    assert first.proposal.doubts == ["2"]

    loop.verdict = Answer(False, "busy", "hush first")
    for answer in (loop.ask("edit", trim("2", -40.0)), loop.ask("undo")):
        assert (answer["reason"], answer["text"]) == ("busy", "hush first")
    assert loop.trims() == edited
    assert (loop.drafting.view.undo, loop.drafting.view.unsaved) == ("an edit", 1)

    loop.verdict = Answer(True)
    assert loop.ask("undo")["done"]
    assert loop.trims() == before
    assert loop.ask("undo") == {"done": False, "reason": "busy", "text": "nothing to undo"}
    assert loop.ask("redo")["done"]
    assert (loop.trims(), loop.drafting.version) == (edited, 4)
    assert loop.ask("draft")["version"] == 4
    a_renamed_cue_is_followed_back(loop)


def a_renamed_cue_is_followed_back(loop: Loop) -> None:
    swap = (("1", "99"), ("2", "1"), ("99", "2"))
    loop.ask("edit", *(Rename("sheet.toml", ("cue", old), new) for old, new in swap))
    loop.ask("undo")
    there, back = (what.proposal.renamed for what in loop.proposed[-2:])
    assert there == {"1": "2", "2": "1"}
    assert back == {"2": "1", "1": "2"}


def test_what_was_edited_outlives_the_process(loop: Loop, folder: Path) -> None:
    before = loop.trims()
    loop.ask("edit", trim("1", -30.0))
    loop.ask("edit", trim("2", -31.0))
    loop.drafting._process.kill()
    loop.drafting._process.join()
    while not (answer := loop.ask("undo"))["done"]:
        assert "died" in answer["text"]
    assert loop.trims() == before
    assert loop.ask("redo")["done"]
    assert loop.trims()[:2] == (-30.0, -31.0)


def test_a_sound_that_is_gone_is_said(loop: Loop, folder: Path) -> None:
    (folder / "sounds/tone.wav").unlink()
    answer = loop.ask("draft")
    assert (answer["done"], answer["reason"]) == (False, "busy")
    assert "tone.wav" in answer["text"]


def test_it_is_saved_over_what_was_read_and_over_nothing_else(loop: Loop, folder: Path) -> None:
    sheet, guard = folder / "sheet.toml", folder / "guard.toml"
    signed = guard.read_text() + "# somebody else was here\n"
    guard.write_text(signed)
    loop.ask("edit", trim("1", -30.0))
    assert loop.ask("save")["done"]
    assert "trim_db = -30.0" in sheet.read_text()
    assert isinstance(loop.proposed[-1], Saved)
    assert loop.drafting.digests["sheet.toml"] == on_disk(folder)["sheet.toml"]

    loop.ask("edit", Set("guard.toml", (), "seats_db", 90.0))
    answer = loop.ask("save")
    assert (answer["done"], answer["reason"]) == (False, "not-allowed")
    assert "guard.toml" in answer["text"]
    assert guard.read_text() == signed
    assert loop.drafting.view.unsaved == 1
