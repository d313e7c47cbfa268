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

    def shift(self, by: int) -> None:
        """What is still to come comes `by` samples later."""
        self.acts = deque((at + by, act) for at, act in self.acts)
        self.follow = self.follow and (self.follow[0] + by, self.follow[1])

    def drop_follow(self, sample: int) -> None:
        """What was to follow by itself does not."""
        if self.follow is not None:
            self.follow = None
            self.lasts(sample)

    def cut(self, settles_at: int) -> None:
        """Nothing more comes; what it started is settled at `settles_at`."""
        self.acts.clear()
        self.follow, self.frozen, self.settles_at = None, 0, settles_at
