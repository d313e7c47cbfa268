"""The texts of a show through its edits: undo and redo without limit, and what is not saved.

A step keeps the part of each text that it changed, not the text: an evening's edits of a long
sheet weigh as little as they say.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from beamctl.show.edits import BEGUN


@dataclass(frozen=True, slots=True)
class _Patch:
    """From `at` on, `old` was replaced by `new`."""

    file: str
    at: int
    old: str
    new: str


@dataclass(frozen=True, slots=True)
class _Step:
    label: str
    patches: tuple[_Patch, ...]


class History:
    """The texts now, as they were saved, and the way between.

    texts, saved  file → text; every change puts a new mapping in the place of the old one
    """

    def __init__(self, texts: Mapping[str, str]) -> None:
        self.texts: Mapping[str, str] = dict(texts)
        self.saved: Mapping[str, str] = self.texts
        self._done: list[_Step] = []
        self._undone: list[_Step] = []
        self._saved_at = 0  # steps done when it was saved
        self._lost = 0  # steps to the saved texts that can no longer be redone

    def do(self, label: str, texts: Mapping[str, str]) -> None:
        """Take the texts that an edit made as one step; texts as they are make no step.

        A file that is new counts as begun before: it is not taken away again, only emptied.
        """
        before = {file: self.texts.get(file, BEGUN) for file in texts}
        patches = tuple(_patch(f, before[f], texts[f]) for f in texts if texts[f] != before[f])
        if not patches:
            return
        if self._saved_at > len(self._done):
            self._lost += self._saved_at - len(self._done)
            self._saved_at = len(self._done)
        self._undone.clear()
        self._done.append(_Step(label, patches))
        self.texts = {**self.texts, **texts}

    def undo(self) -> str | None:
        """Go back by one step; its label, None when there is none."""
        if not self._done:
            return None
        step = self._done.pop()
        self._undone.append(step)
        self._splice([(p.file, p.at, p.new, p.old) for p in step.patches])
        return step.label

    def redo(self) -> str | None:
        """Take the step again that was undone last; its label, None when there is none."""
        if not self._undone:
            return None
        step = self._undone.pop()
        self._done.append(step)
        self._splice([(p.file, p.at, p.old, p.new) for p in step.patches])
        return step.label

    def mark_saved(self) -> None:
        """The texts now are what is on disk."""
        self.saved = self.texts
        self._saved_at, self._lost = len(self._done), 0

    @property
    def undo_label(self) -> str | None:
        """What `undo` would take back."""
        return self._done[-1].label if self._done else None

    @property
    def redo_label(self) -> str | None:
        """What `redo` would take again."""
        return self._undone[-1].label if self._undone else None

    @property
    def unsaved(self) -> int:
        """Steps between the texts that were saved and those of now; 0 when they are the same."""
        if all(text == self.saved.get(file, BEGUN) for file, text in self.texts.items()):
            return 0
        return max(1, abs(len(self._done) - self._saved_at) + self._lost)

    def _splice(self, changes: list[tuple[str, int, str, str]]) -> None:
        texts = {**self.texts}
        for file, at, gone, put in changes:
            text = texts[file]
            texts[file] = text[:at] + put + text[at + len(gone) :]
        self.texts = texts


def _patch(file: str, old: str, new: str) -> _Patch:
    """The differing middle of two texts."""
    head = _alike(old, new)
    tail = _alike(old[head:][::-1], new[head:][::-1])
    return _Patch(file, head, old[head : len(old) - tail], new[head : len(new) - tail])


def _alike(one: str, other: str) -> int:
    """Length of the beginning that two texts share."""
    low, high = 0, min(len(one), len(other))
    while low < high:
        middle = (low + high + 1) // 2
        if one[low:middle] == other[low:middle]:
            low = middle
        else:
            high = middle - 1
    return low
