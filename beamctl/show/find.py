"""Finding cues by what somebody remembers of them: the number, or words of title and note."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Protocol


class Written(Protocol):
    """A cue as far as it is read: one of the sheet, or one of a desk's picture of it."""

    @property
    def ref(self) -> str: ...
    @property
    def title(self) -> str: ...
    @property
    def note(self) -> str: ...


def find(cues: Iterable[Written], asked: str) -> tuple[str, ...]:
    """References of the cues that `asked` may mean, the likeliest first; all when it is empty.

    The very number, then numbers that begin so, then cues with all the words in their title, then
    with those the title lacks in their note. A word may be cut short.
    """
    text = " ".join(asked.split()).casefold()
    ranked = [(rank, cue.ref) for cue in cues if (rank := _rank(cue, text)) is not None]
    return tuple(ref for _, ref in sorted(ranked, key=lambda found: found[0]))


def _rank(cue: Written, text: str) -> int | None:
    """How likely a cue is meant, 0 the most; None when it is not."""
    ref = cue.ref.casefold()
    if ref == text:
        return 0
    if ref.startswith(text):
        return 1
    title, note = _words(cue.title), _words(cue.note)
    missing = [word for word in _words(text) if not any(w.startswith(word) for w in title)]
    if not missing:
        return 2
    return 3 if all(any(w.startswith(word) for w in note) for word in missing) else None


def _words(text: str) -> list[str]:
    """Words without the marks around them."""
    return [word.strip("'\"“”‘’()[].,;:!?") for word in text.casefold().split()]
