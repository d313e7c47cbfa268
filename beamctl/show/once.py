"""Tokens that make a trigger once only."""

from __future__ import annotations

from dataclasses import dataclass, field

KEPT = 4096


@dataclass(slots=True)
class Once:
    """Remembers the newest 4096 tokens; 0 is none, and is never used up."""

    _used: dict[int, None] = field(default_factory=dict)

    def used(self, token: int) -> bool:
        """True for a token that was taken before."""
        return token in self._used

    def take(self, token: int) -> None:
        """Use a token up."""
        if token:
            self._used[token] = None
        if len(self._used) > KEPT:
            del self._used[next(iter(self._used))]
