"""A host in memory that takes edits up as the real one does: in the texts, read by the reader."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path

from desk.conftest import NIGHT_TRAM, FakeHost

from beamctl.desk.link import Draft
from beamctl.errors import ShowError
from beamctl.files.edits import edited
from beamctl.files.reader import read_show
from beamctl.show.differences import edited_cues
from beamctl.show.edits import Edit
from beamctl.show.history import History
from beamctl.show.show import Show
from beamctl.snapshot import Answer, CueText, EditView, SheetView

FILES = ("sheet.toml", "rig.toml", "house.toml", "guard.toml", "wire.toml")


class WritingHost(FakeHost):
    """Night Tram, or other texts in its folder, being written."""

    def __init__(self, changed: Mapping[str, str] = {}) -> None:
        super().__init__()
        folder = Path(NIGHT_TRAM.folder)
        texts = {name: (folder / name).read_text() for name in FILES if (folder / name).exists()}
        self.written = History({**texts, **changed})
        self.saved = self.show
        self.now = replace(self.now, states={}, follow={}, left_s={}, barred={}, standby="")
        assert self._take_up(self.written.texts).done
        self.saved = self.show

    @property
    def sheet_text(self) -> str:
        return self.written.texts["sheet.toml"]

    def draft(self) -> Draft:
        self._reach()
        texts, saved = self.written.texts, self.written.saved
        return Draft(self.version, self.show, texts, saved, ("bell.flac", "new.flac"))

    def edit(self, edit: Edit) -> Answer:
        answer = super().edit(edit)
        if not answer.done:
            return answer
        try:
            texts = edited(self.written.texts, edit)
        except ShowError as error:
            return Answer(False, "bad-type", str(error))
        answer = self._take_up(texts)
        if answer.done:
            self.written.do(edit.label, texts)
            self._say()
        return answer

    def history(self, what: str) -> Answer:
        answer = super().history(what)
        {"undo": self.written.undo, "redo": self.written.redo, "save": self.written.mark_saved}[
            what
        ]()
        self._take_up(self.written.texts)
        if what == "save":
            self.saved = self.show
        self._say()
        return answer

    def _take_up(self, texts: Mapping[str, str]) -> Answer:
        show, problems = read_show(NIGHT_TRAM.folder, texts)
        if show is None:
            return Answer(
                False, "bad-type", str(next(p for p in problems if p.severity == "error"))
            )
        self._put(show)
        return Answer(True)

    def _put(self, show: Show) -> None:
        self.show, self.version = show, self.version + 1
        cues = (CueText(c.ref, c.title, c.note, c.then or "") for c in show.sheet.cue)
        self.text = SheetView(self.version, show.sheet.title, tuple(cues))
        self.now = replace(self.now, sheet_version=self.version)

    def _say(self) -> None:
        history = self.written
        edit = EditView(
            history.undo_label or "",
            history.redo_label or "",
            history.unsaved,
            edited_cues(self.saved.sheet, self.show.sheet),
        )
        self.now = replace(self.now, edit=edit)
