"""A fired cue: what it still has to do, by absolute sample."""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass

from beamctl.show.sheet import Act


@dataclass(slots=True)
class Run:
    """A fired cue: what it still has to do, by absolute sample."""

    ref: str
    started: int
    acts: deque[tuple[int, Act]]
    follow: tuple[int, str] | None
    settles_at: int  # when the last glide it started is over
    frozen: int = 0  # samples of those glides that were left when the show was held

    def lasts(self, sample: int) -> None:
        """It is not done before `sample`."""
        self.settles_at = max(self.settles_at, sample)

    def due(self) -> int | None:
        """Sample of the next act."""
        return self.acts[0][0] if self.acts else None
