"""A fired cue: what it still has to do, by absolute sample."""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass

from beamctl.show.sheet import Act, Cue


@dataclass(slots=True)
class Run:
    """A fired cue: what it still has to do, by absolute sample."""

    ref: str
    started: int  # its acts are counted from here; a hold moves it along
    acts: deque[tuple[int, Act]]
    follow: tuple[int, str] | None
    settles_at: int  # when the last glide it started is over
    frozen: int = 0  # samples of those glides that were left when the show was held
    given_s: float = -1.0  # place of the newest act that was given
    cut_after: int | None = None  # samples after its start when it was cut short

    @classmethod
    def of(cls, cue: Cue, sample: int, rate_hz: int) -> Run:
        """A cue that is fired at `sample`."""
        run = cls(cue.ref, sample, deque(), None, sample)
        run._expect(cue, sample, rate_hz)
        return run

    def lasts(self, sample: int) -> None:
        """It is not done before `sample`."""
        self.settles_at = max(self.settles_at, sample)

    def due(self) -> int | None:
        """Sample of the next act."""
        return self.acts[0][0] if self.acts else None

    def give(self, sample: int) -> Act:
        """The next act, which is given now."""
        _, act = self.acts.popleft()
        self.given_s = act.at_s
        self.lasts(sample)
        return act

    def shift(self, by: int) -> None:
        """What is still to come comes `by` samples later."""
        self.started += by
        self.acts = deque((at + by, act) for at, act in self.acts)
        self.follow = self.follow and (self.follow[0] + by, self.follow[1])

    def drop_follow(self, sample: int) -> None:
        """What was to follow by itself does not."""
        if self.follow is not None:
            self.follow = None
            self.lasts(sample)

    def cut(self, sample: int, settles_at: int) -> None:
        """Nothing more comes after `sample`; what it started is settled at `settles_at`."""
        self.acts.clear()
        self.follow, self.frozen, self.settles_at = None, 0, settles_at
        self.cut_after = sample - self.started

    def passed(self, act: Act, sample: int, rate_hz: int) -> bool:
        """True when an act of its cue has had its time by `sample`, given or not."""
        if self.cut_after is not None:
            sample = min(sample, self.started + self.cut_after)
        return act.at_s <= self.given_s or self.started + round(act.at_s * rate_hz) < sample

    def take_up(self, before: Cue, after: Cue, sample: int, rate_hz: int) -> None:
        """Go on by the edited cue: what is not due by `sample` gives way to what it says now.

        What has passed is not made up for, and a follow-on that came or was dropped comes no more.
        """
        if self.cut_after is not None:
            return
        again = self.follow is not None or before.then is None
        self._expect(after, sample, rate_hz)
        if not again:
            self.follow = None
        self.lasts(sample)

    def _expect(self, cue: Cue, sample: int, rate_hz: int) -> None:
        """What comes from `sample` on."""
        acts = ((self.started + round(act.at_s * rate_hz), act) for act in cue.in_time())
        self.acts = deque((at, a) for at, a in acts if at >= sample and a.at_s > self.given_s)
        at = self.started + round((cue.then_at_s or 0.0) * rate_hz)
        self.follow = (at, cue.then) if cue.then and at >= sample else None
