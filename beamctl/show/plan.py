"""One beam's acts turned into records, within what the ear does not hear as a click.

A sounding beam that sweeps past a point is an amplitude modulation there, and the air makes sound
of its square. What counts is how fast the phases across the panel change: the second derivative of
the squared envelope is at most 2 (dφ/dt)² for an rms phase rate dφ/dt. At PHASE_RATE, together with
the shortest level ramp at once, it stays 60 dB under a 1 kHz tone at depth 0.8. A travel that would
be faster is slowed when that costs little, else the beam dips, jumps while silent, and returns.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from math import acos, sqrt
from typing import Any, NamedTuple

import numpy as np

from beamctl.acoustics.cells import CellMap
from beamctl.show.beamstate import DEFAULT_TRIM_DB, EASE_S, MIN_GLIDE_S, BeamState
from beamctl.show.glides import TO, TO_FOLLOWS
from beamctl.show.records import Record
from beamctl.show.settled import FIELDS, FRESH, Settled, after_act, names
from beamctl.show.sheet import Act, Reach
from beamctl.show.targets import Target

PHASE_RATE = 80.0  # rad/s, rms over the panel
SLOWED_S = 0.15  # a travel is slowed to take up to this long; beyond it the beam dips
DIP_S = 0.030  # fall and rise of a dip
DARK_S = 0.004  # silence around the jump, longer than the spread of a panel's delays
END_FALL_S = 0.050  # fall of the carrier when a one-shot sound has ended
TRY_S = 0.2  # rise and fall of a try
END_PAD_S = 0.010  # after the sound's last frame: it comes out a few milliseconds late
TRY = "try"  # stands for the cue of what is sounded outside any
AHEAD = Target("", direction=(0.0, 1.0, 0.0))
Changes = Mapping[str, tuple[Any, float]]  # field of `Settled` → its value, seconds it takes


def swing_of(cells: CellMap, wavenumber_per_m: float) -> tuple[float, float]:
    """Radians rms that a panel's phases change by per radian of aim, and per 1/metre of reach.

    Largest principal spread of the live cells, and the spread of half their squared distance.
    """
    at = cells.at_m[~cells.dead]
    if len(at) < 2:
        return 0.0, 0.0
    aim = sqrt(max(0.0, float(np.linalg.eigvalsh(np.cov(at.T, bias=True))[-1])))
    reach = float(np.std(0.5 * np.sum(at**2, axis=1)))
    return wavenumber_per_m * aim, wavenumber_per_m * reach


class Kept(NamedTuple):
    """What a beam shall be when a cue next starts a sound on it, and the cue that said so."""

    cue: str
    state: Settled


@dataclass(slots=True)
class BeamPlan:
    """What one beam was told, and what it still has to do by itself."""

    name: str
    rate_hz: int
    swing: tuple[float, float]
    state: BeamState
    trim_db: float = DEFAULT_TRIM_DB
    sound: str = ""
    cue: str = ""  # the cue that last touched it
    owner: str = ""  # the cue whose sound it plays
    before: Settled = FRESH  # what it was when that cue first touched it
    kept: Kept | None = None  # where a try, or an edit that ended its sound, left it otherwise
    target: Target = AHEAD
    returns_at: int = 0  # until this sample the beam is in a dip: falling, then dark
    ends_at: int | None = None  # one-shot sounds: when the carrier falls
    lost: str = ""  # the loop it played when the engine went, until it is brought back
    _out: list[Record] = field(default_factory=list)

    def perform(
        self, act: Act, sample: int, cue: str, target: Target | None, seconds: float
    ) -> list[Record]:
        """Records of one act at `sample`; `seconds` is how long its sound lasts, if it has one."""
        if self.kept is not None:
            self._count_in(act, sample, cue, target)
        elif cue != self.cue:
            self.before = self.settled()
        self._do(act, sample, cue, target, seconds)
        return self._told()

    def attempt(self, state: Settled, loop: bool, sample: int, seconds: float) -> list[Record]:
        """Records that sound a state outside any cue, over `TRY_S`; what it was is kept."""
        self.keep()
        self._become({key: (getattr(state, key), TRY_S) for key in FIELDS}, sample, TRY)
        act = Act(beam=self.name, sound=state.sound, loop=loop, over_s=TRY_S)
        self._do(act, sample, TRY, None, seconds)
        return self._told()

    def keep(self) -> None:
        """Keep what it is now for the cue that next starts a sound on it."""
        self.kept = self.kept or Kept(self.cue, self.settled())

    def follow(self, changes: Changes, sample: int) -> list[Record]:
        """Records of what an edit changed; a state that is kept changes unheard."""
        if self.kept is None:
            self._become(changes, sample, self.cue)
        else:
            values = {key: value for key, (value, _) in changes.items()}
            self.kept = self.kept._replace(state=replace(self.kept.state, **values))
        return self._told()

    def fall(self, sample: int, fall_s: float, cue: str) -> list[Record]:
        """Records that end the beam's sound over `fall_s`."""
        self.cue = cue
        self._fall(sample, fall_s)
        return self._told()

    def end(self, sample: int) -> list[Record]:
        """Let the carrier go after the last frame of a one-shot sound, at `ends_at`."""
        return self.fall(sample, END_FALL_S, self.cue)

    def freeze(self, sample: int) -> list[Record]:
        """Hold every glide where it is; a beam in a dip goes dark first."""
        self._tell(max(sample, self.returns_at), "freeze")
        return self._told()

    def thaw(self, sample: int) -> list[Record]:
        """Carry on with what `freeze` held."""
        self._tell(max(sample, self.returns_at), "thaw")
        return self._told()

    def lose(self, sample: int) -> None:
        """The engine is gone: a loop is remembered, a one-shot sound is over."""
        loops = bool(self.sound) and self.ends_at is None and self.sounding(sample)
        self.lost = self.sound if loops else ""
        if not loops:
            self.sound, self.owner = "", ""
        self.ends_at, self.returns_at = None, 0

    def set_up(self, sample: int) -> list[Record]:
        """Tell a new engine, silently, what the beam had when the last one went."""
        if not self.cue:
            return []
        had = self.settled()
        self.state = BeamState(self.rate_hz)
        self._lay(had, sample)
        return self._told()

    def bring_back(self, sample: int, rise_s: float) -> list[Record]:
        """Records that take up the loop that was lost."""
        if self.lost:
            self._tell(sample, "play", sound=self.lost, loop=True)
            self._level(sample, self._power(), self._n(rise_s))
            self.lost = ""
        return self._told()

    def sounding(self, sample: int) -> bool:
        """True while a carrier is on air, or about to come back from a dip."""
        return not self.state.silent(sample)

    @property
    def trying(self) -> bool:
        """True while a try sounds."""
        return self.owner == TRY

    def touched_by(self) -> str:
        """The cue that its state hangs on."""
        return self.cue if self.kept is None else self.kept.cue

    def settled(self) -> Settled:
        """Where it is, with all its glides at their ends."""
        row = self.state.reach
        per_m = float(row[TO])
        reach: Reach = "aim" if row[TO_FOLLOWS] else 1.0 / per_m if per_m > 0.0 else "far"
        depth, law = float(self.state.depth[TO]), self.state.law_name()
        return Settled(self.sound, self.trim_db, depth, law, reach, self.target)

    # -- inside ----------------------------------------------------------------------------

    def _do(self, act: Act, sample: int, cue: str, target: Target | None, seconds: float) -> None:
        self.cue = cue
        if act.fall_s is not None:
            self._fall(sample, act.fall_s)
            return
        n = round(act.over_s * self.rate_hz)
        ends = self.state.level[TO] == 0.0  # silent, or on its way there
        if act.law is not None:
            self._tell(sample, "law", law=act.law, n=n)
        if act.depth is not None:
            self._tell(sample, "depth", depth=act.depth, n=n)
        if act.reach is not None:
            self._reach(act.reach, sample, n)
        if act.trim_db is not None:
            self.trim_db = act.trim_db
        if target is not None:
            self._aim(target, sample, n)
        if act.sound is not None:
            self._play(act.sound, act.loop, sample, seconds)
        if (act.sound if ends else act.trim_db) is not None:
            self._level(sample, self._power(), n)

    def _fall(self, sample: int, fall_s: float) -> None:
        if self.sounding(sample):
            n = max(self._n(fall_s), self._n(MIN_GLIDE_S))
            self._level(sample, 0.0, n)
            self._tell(sample, "stop", n=n)
        self.sound, self.owner, self.lost, self.ends_at = "", "", "", None

    def _become(self, changes: Changes, sample: int, cue: str) -> None:
        """Take some fields to other values, each in its own time."""
        for key in (key for key in FIELDS if key in changes):
            value, over_s = changes[key]
            act = Act(beam=self.name, over_s=over_s, **({} if key == "target" else {key: value}))
            self._do(act, sample, cue, (value or AHEAD) if key == "target" else None, 0.0)

    def _count_in(self, act: Act, sample: int, cue: str, target: Target | None) -> None:
        """An act on a beam that keeps a state: before a sound starts, it has all of that again.

        Any other act is done on what is there, and counts for the state that is kept.
        """
        before, had = self.kept or Kept("", FRESH)
        if cue != before:
            self.before = had
        state = after_act(had, act, target)
        self.kept, self.cue = Kept(cue, state), cue
        if act.sound is None:
            return
        self.kept = None
        if self.sounding(sample):
            rest = [key for key in FIELDS if not names(act, key)]
            self._become({key: (getattr(state, key), act.over_s) for key in rest}, sample, cue)
        else:
            self.trim_db = had.trim_db
            self._lay(had, sample)

    def _lay(self, state: Settled, sample: int) -> None:
        """Give a silent beam a state at once."""
        self._place(state.target or AHEAD, sample, 0)
        self._tell(sample, "reach", per_m=_per_m(state.reach), n=0)
        self._tell(sample, "law", law=state.law, n=0)
        self._tell(sample, "depth", depth=state.depth, n=0)

    def _told(self) -> list[Record]:
        out, self._out = self._out, []
        return out

    def _tell(self, sample: int, what: str, **args: Any) -> None:
        record = Record(sample, what, self.name, self.cue, args=args)
        self.state.apply(record)
        self._out.append(record)

    def _n(self, seconds: float) -> int:
        return round(seconds * self.rate_hz)

    def _power(self) -> float:
        return float(10.0 ** (self.trim_db / 10.0))

    def _play(self, sound: str, loop: bool, sample: int, seconds: float) -> None:
        self._tell(sample, "play", sound=sound, loop=loop)
        self.sound, self.owner = sound, self.cue
        self.ends_at = None if loop else sample + self._n(seconds + END_PAD_S)

    def _level(self, sample: int, power: float, n: int) -> None:
        """A new level; in a dip it becomes the level to come back to."""
        self._tell(max(sample, self.returns_at), "level", power=power, n=n)

    def _aim(self, target: Target, sample: int, n: int) -> None:
        if sample < self.returns_at:
            self._place(target, self.returns_at - 1, 0)
        elif not self.sounding(sample):
            self._place(target, sample, 0)
        else:
            self._travel(target, sample, n)

    def _travel(self, target: Target, sample: int, n: int) -> None:
        shortest_s = self._swing_rad(target, sample) / PHASE_RATE + EASE_S
        if n >= self._n(shortest_s) or shortest_s <= SLOWED_S:
            self._place(target, sample, max(n, self._n(shortest_s)))
            return
        power = float(self.state.level[TO]) ** 2
        fall, dark = self._n(DIP_S), self._n(DARK_S)
        self._tell(sample, "level", power=0.0, n=fall)
        self._place(target, sample + fall + dark, 0)
        self.returns_at = sample + fall + 2 * dark
        self._level(sample, power, max(fall, n - fall - 2 * dark))

    def _swing_rad(self, target: Target, sample: int) -> float:
        """Phase change, radians rms, of a travel that kept its fastest pace all the way.

        A great circle is turned at one pace. A straight line is walked at one pace, which turns
        the beam fastest, and pulls a focus that follows hardest, where it passes nearest.
        """
        x, y, z, distance = self.state.direction_at(sample)
        if target.point_m is None:
            a, b, c = target.unit()
            return acos(min(1.0, max(-1.0, x * a + y * b + z * c))) * self.swing[0]
        goal = np.array(target.point_m)
        start = np.array((x, y, z)) * (distance or np.linalg.norm(goal))
        way = start + np.linspace(0.0, 1.0, 65)[:, np.newaxis] * (goal - start)
        square = np.sum(way**2, axis=1)
        turning = np.linalg.norm(np.cross(start, goal)) / square
        nearing = way @ (goal - start) / square**1.5 * self.state.reach[TO_FOLLOWS]
        return float(np.max(np.hypot(self.swing[0] * turning, self.swing[1] * nearing)))

    def _place(self, target: Target, sample: int, n: int) -> None:
        self.target = target
        if target.point_m is not None:
            self._tell(sample, "aim", point_m=list(target.point_m), n=n)
        else:
            self._tell(sample, "aim", direction=list(target.unit()), n=n)

    def _reach(self, reach: Reach, sample: int, n: int) -> None:
        per_m = _per_m(reach)
        if not self.sounding(sample) or sample < self.returns_at:
            self._tell(max(sample, self.returns_at - 1), "reach", per_m=per_m, n=0)
            return
        goal = 0.0 if per_m == "aim" else float(per_m)
        change = abs(goal - self.state.reach_per_m_at(sample)) if per_m != "aim" else 2.0
        shortest_s = EASE_S + 0.5 * np.pi * change * self.swing[1] / PHASE_RATE
        self._tell(sample, "reach", per_m=per_m, n=max(n, self._n(shortest_s)))


def _per_m(reach: Reach) -> float | str:
    """A reach as records have it: 1/metres, 0 for far, or "aim"."""
    if reach == "aim":
        return "aim"
    return 0.0 if reach == "far" else 1.0 / float(reach)
