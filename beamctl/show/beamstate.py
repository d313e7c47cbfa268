"""What one beam is doing: rows of glides, and how a record changes them.

The renderer and the player both keep one `BeamState` per beam and feed it the same records; the
renderer's rows are views into its compiled arrays.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from math import sqrt
from typing import Any, cast

import numpy as np
from numpy.typing import NDArray

from beamctl.show import glides
from beamctl.show.glides import Row
from beamctl.show.records import Record
from beamctl.show.sheet import Law

LAWS = ("dsb", "root", "ssb", "mam")
DEFAULT_DEPTH = 0.7
DEFAULT_TRIM_DB = -60.0
MIN_GLIDE_S = 0.020  # every change of level takes at least this
EASE_S = 0.050  # a travel takes this long to get going and to stop
SWAP_S = 0.020  # cross-fade between sounds, and between laws


@dataclass(slots=True)
class Voice:
    """One sound a beam plays: `weight` is a scalar row, `start` the sample of its first frame."""

    sound: str
    start: int
    loop: bool
    weight: Row


@dataclass(slots=True)
class BeamState:
    """Rows of one beam; see glides.py for their layout. `law` holds one weight row per law.

    `level` glides in gain, not in its square: gain and square then both start and stop without a
    step in slope. The square is what the air hears of one beam; of two on a panel it also hears
    the product of their gains, and the root of a raised cosine meets zero at a slope.
    """

    rate_hz: int
    level: Row = field(default_factory=lambda: np.zeros(glides.SCALAR_SIZE))
    depth: Row = field(default_factory=lambda: np.zeros(glides.SCALAR_SIZE))
    reach: Row = field(default_factory=lambda: np.zeros(glides.REACH_SIZE))
    aim: Row = field(default_factory=lambda: np.zeros(glides.TRAVEL_SIZE))
    law: NDArray[np.float64] = field(
        default_factory=lambda: np.zeros((len(LAWS), glides.SCALAR_SIZE))
    )
    voices: list[Voice] = field(default_factory=list)
    _frozen: list[tuple[Row, tuple[float, ...]]] = field(default_factory=list)
    _frozen_at: int | None = None

    def __post_init__(self) -> None:
        self.level[:] = 0.0
        self.depth[:] = (0, 0, DEFAULT_DEPTH, DEFAULT_DEPTH, 0, 0)
        self.reach[:] = 0.0
        self.aim[:] = 0.0
        self.aim[glides.AT : glides.AT + 3] = (0.0, 1.0, 0.0)
        self.aim[glides.GOAL : glides.GOAL + 3] = (0.0, 1.0, 0.0)
        self.law[:] = 0.0
        self.law[0, (glides.FROM, glides.TO)] = 1.0

    def apply(self, record: Record) -> None:
        """Change the rows as `record` says; KeyError for a record that is not a beam's."""
        _APPLY[record.what](self, record.sample, record.args)

    def power_at(self, sample: int) -> float:
        """Square of the beam's gain."""
        return max(0.0, glides.scalar_at(self.level, sample)) ** 2

    def direction_at(self, sample: int) -> tuple[float, float, float, float]:
        """Unit direction in panel axes, and the distance to the target in metres (0: none)."""
        return glides.travel_at(self.aim, sample)

    def reach_per_m_at(self, sample: int) -> float:
        """Focus in 1/metres."""
        return glides.reach_at(self.reach, sample, self.direction_at(sample)[3])

    def depth_at(self, sample: int) -> float:
        """Modulation depth, 0 to 1."""
        return glides.scalar_at(self.depth, sample)

    def law_name(self) -> Law:
        """The law the beam has, or is changing to."""
        return cast(Law, LAWS[int(np.argmax(self.law[:, glides.TO]))])

    def silent(self, sample: int) -> bool:
        """True when the beam is at zero and stays there."""
        return self.level[glides.TO] == 0.0 and glides.is_settled(self.level, sample)

    def travelling(self, sample: int) -> bool:
        """True while the aim changes."""
        return not glides.travel_settled(self.aim, sample)

    # -- what each record does ------------------------------------------------------------

    def _glide(self, row: Row, sample: int, goal: float, n: int, shortest: float = 0.0) -> None:
        """Take `row` from wherever it is to `goal` over n samples, keeping its slope at first."""
        glides.take_over(row, float(sample), float(n), goal, shortest)

    def _level(self, sample: int, args: Any) -> None:
        n = max(int(args["n"]), round(MIN_GLIDE_S * self.rate_hz))
        self._forget(self.level)
        goal = sqrt(args["power"])
        self._glide(self.level, sample, goal, n, MIN_GLIDE_S * self.rate_hz)

    def _depth(self, sample: int, args: Any) -> None:
        n = max(int(args["n"]), round(MIN_GLIDE_S * self.rate_hz))
        self._forget(self.depth)
        self._glide(self.depth, sample, float(args["depth"]), n)

    def _law(self, sample: int, args: Any) -> None:
        n = max(int(args["n"]), round(SWAP_S * self.rate_hz))
        self._forget(*self.law)
        for row, name in zip(self.law, LAWS, strict=True):
            self._glide(row, sample, float(name == args["law"]), n)

    def _aim(self, sample: int, args: Any) -> None:
        self._forget(self.aim)
        self._travel(sample, args)

    def _travel(self, sample: int, args: Any) -> None:
        row, n = self.aim, int(args["n"])
        if "direction" in args and self.reach[glides.TO_FOLLOWS]:
            # a target without a distance cannot be followed: the focus stays where it was
            self._refocus(sample, self.reach_per_m_at(sample), n, False)
        x, y, z, distance = glides.travel_at(row, sample)
        step = np.subtract(glides.travel_at(row, sample + 1)[:3], (x, y, z))
        if self.silent(sample) or n == 0 or float(np.abs(step).max()) < 1e-15:
            step[:] = 0.0
        goal = np.asarray(args.get("point_m") or args["direction"], np.float64)
        line = "point_m" in args and (distance > 0.0 or n == 0)
        here = np.array((x, y, z)) * (distance if line and distance > 0.0 else 1.0)
        if not line and "point_m" in args:
            here = here * float(np.linalg.norm(goal))  # from an angle: along a line from as far out
            line = True
        start = goal if n == 0 else here
        row[:3] = (sample, n, glides.LINE if line else glides.ARC)
        row[glides.AT : glides.AT + 3] = start
        row[glides.GOAL : glides.GOAL + 3] = goal
        row[glides.DRIFT : glides.DRIFT + 3] = step
        row[glides.DRIFT_N] = EASE_S * self.rate_hz if step.any() else 0.0
        row[glides.EASE] = min(0.5, EASE_S * self.rate_hz / n) if n else 0.5

    def _reach(self, sample: int, args: Any) -> None:
        self._forget(self.reach)
        follows = args["per_m"] == "aim"
        self._refocus(sample, 0.0 if follows else float(args["per_m"]), int(args["n"]), follows)

    def _refocus(self, sample: int, goal_per_m: float, n: int, follows: bool) -> None:
        """Take the focus from wherever it is to a goal, keeping its slope at first."""
        value = self.reach_per_m_at(sample)
        slope = self.reach_per_m_at(sample + 1) - value
        if n == 0 or self.silent(sample) or abs(slope) < 1e-15:
            slope = 0.0
        over = EASE_S * self.rate_hz if slope else 0.0
        if slope < 0.0:  # as in `_glide`
            over = min(over, 2.4 * value / -slope)
        self.reach[:] = (sample, n, value, goal_per_m, slope, over, 0, follows)

    def _play(self, sample: int, args: Any) -> None:
        swap = round(SWAP_S * self.rate_hz)
        heard = [] if self.silent(sample) else self.voices
        self.voices = [v for v in heard if not self._faded(v, sample)]
        for voice in self.voices:  # those on their way out too, so that the weights sum to 1
            self._glide(voice.weight, sample, 0.0, swap)
        first, n = (0.0, swap) if self.voices else (1.0, 0)
        weight = np.array((sample, n, first, 1.0, 0.0, 0.0))
        self.voices.append(Voice(str(args["sound"]), sample, bool(args["loop"]), weight))

    def _stop(self, sample: int, args: Any) -> None:
        for voice in self.voices:
            if voice.weight[glides.TO] != 0.0:
                self._glide(voice.weight, sample, 0.0, int(args["n"]))

    def _faded(self, voice: Voice, sample: int) -> bool:
        return voice.weight[glides.TO] == 0.0 and glides.is_settled(voice.weight, sample)

    def _forget(self, *rows: Row) -> None:
        """What is told while frozen holds: thawing must not take it back."""
        self._frozen = [(r, old) for r, old in self._frozen if all(r is not row for row in rows)]

    def _freeze(self, sample: int, args: Any) -> None:
        if self._frozen_at is not None:
            return
        self._frozen_at = sample
        swap = round(SWAP_S * self.rate_hz)  # sounds that change places are let past each other
        fades = (v.weight for v in self.voices if v.weight[glides.N] > swap)
        for row in (self.level, self.depth, *self.law, *fades):
            if not glides.is_settled(row, sample):
                self._frozen.append((row, tuple(row)))
                self._glide(row, sample, glides.scalar_at(row, sample), 0, self._carried(row))
        if sample < self.reach[glides.START] + self.reach[glides.N]:
            self._frozen.append((self.reach, tuple(self.reach)))
            value = self.reach_per_m_at(sample)
            slope = self.reach_per_m_at(sample + 1) - value
            self.reach[:] = (sample, 0, value, value, slope, EASE_S * self.rate_hz, 0, 0)
        if self.travelling(sample):
            self._frozen.append((self.aim, tuple(self.aim)))
            *direction, distance = glides.travel_at(self.aim, sample)
            goal = np.array(direction) * (distance or 1.0)
            kind = "point_m" if distance else "direction"
            self._travel(sample, {kind: goal.tolist(), "n": round(EASE_S * self.rate_hz)})

    def _carried(self, row: Row) -> float:
        """Samples over which a row keeps its old slope: a step in level's would be heard."""
        return MIN_GLIDE_S * self.rate_hz if row is self.level else 0.0

    def _thaw(self, sample: int, args: Any) -> None:
        frozen, at = self._frozen, self._frozen_at
        self._frozen, self._frozen_at = [], None
        for row, old in frozen:
            left = max(1, round(old[glides.START] + old[glides.N] - (at or 0)))
            if row is self.aim:
                kind = "point_m" if old[glides.KIND] == glides.LINE else "direction"
                goal = list(old[glides.GOAL : glides.GOAL + 3])
                self._travel(sample, {kind: goal, "n": left})
            elif row is self.reach:
                value = self.reach_per_m_at(sample)
                follows = old[glides.TO_FOLLOWS]
                self.reach[:] = (sample, left, value, old[glides.TO], 0, 0, 0, follows)
            else:
                carried = self._carried(row)
                self._glide(row, sample, old[glides.TO], max(left, round(carried)), carried)


_APPLY = {
    "level": BeamState._level,
    "depth": BeamState._depth,
    "law": BeamState._law,
    "aim": BeamState._aim,
    "reach": BeamState._reach,
    "play": BeamState._play,
    "stop": BeamState._stop,
    "freeze": BeamState._freeze,
    "thaw": BeamState._thaw,
}
