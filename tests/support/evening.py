"""A show played by chance: GO, hush, re-aim and restore through the player."""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from support.rigs import grid, make_show, silence

from beamctl.acoustics.geometry import direction
from beamctl.engine.chain import Chain
from beamctl.show import events, glides
from beamctl.show.player import Player
from beamctl.show.records import SOUNDING, Record

RATE = 192_000
NOWHERE_M = 5.0  # how far off a beam is listened to that is focused nowhere
KEPT_S = 0.060


@dataclass(slots=True)
class Happening:
    """One event, what it changes from where to where, and until when; samples are absolute."""

    kind: str  # go | re-aim | hush | restore
    label: str
    at: int
    settled: int
    cut: int = 0  # the next event's sample, or `settled`
    points_m: np.ndarray = field(default_factory=lambda: np.zeros((0, 3)))  # (P, 3), panel axes


class Tape:
    """The newest feeds (samples, F) of a renderer, by absolute sample."""

    def __init__(self) -> None:
        self._blocks: deque[tuple[int, np.ndarray]] = deque()

    def add(self, start: int, block: np.ndarray) -> None:
        self._blocks.append((start, block))

    def forget(self, before: int) -> None:
        while self._blocks and self._blocks[0][0] + len(self._blocks[0][1]) <= before:
            self._blocks.popleft()

    def take(self, begin: int, end: int) -> np.ndarray:
        """(F, end - begin) float64."""
        assert self._blocks[0][0] <= begin
        kept = [(s, b) for s, b in self._blocks if s < end and s + len(b) > begin]
        first = kept[0][0]
        whole = np.concatenate([block for _, block in kept])
        return whole[begin - first : end - first].T.astype(np.float64)


class Evening:
    """A panel with beams "a" and "b", a sheet of `count` random cues, and chance at the desk."""

    def __init__(self, rng: np.random.Generator, columns: int, rows: int, count: int) -> None:
        self.rng = rng
        self.flat = rows == 1
        cells = grid(columns, rows)
        self.cells_m = cells.at_m
        cues = [{"ref": str(n), "title": "chance", "act": self._acts(n)} for n in range(count)]
        show = make_show(("a", "b"), cues, cells)
        self.player = Player(show)
        self.renderer = Chain(show, {"p": {"tone": silence(1.0)}}, ahead=0)
        self.tape = Tape()
        self._next = 0
        self.player.sink("sink-open", 0)
        self._ask(events.Ready())
        self._ask(events.Confirm())
        self.run_to(6_000)

    # -- what a cue may hold -------------------------------------------------------------------

    def _acts(self, n: int) -> tuple[dict[str, Any], ...]:
        """The acts of cue `n`: even ones sound, odd ones only move a beam."""
        acts = [self._act(n)]
        if self.rng.random() < 0.2:
            other = self._act(n)
            if other["beam"] != acts[0]["beam"]:
                acts.append(other)
        return tuple(acts)

    def _act(self, n: int) -> dict[str, Any]:
        rng, chance = self.rng, self.rng.random
        act: dict[str, Any] = {"beam": str(rng.choice(["a", "a", "b"])), "over_s": self._over_s()}
        if n % 2 == 0:
            act |= {"sound": "tone", "loop": True, "trim_db": float(rng.uniform(-40.0, 0.0))}
        if n % 2 or chance() < 0.5:
            act |= self._aim()
        if chance() < 0.3:
            near = "aim" if "point_m" in act else float(rng.uniform(0.5, 6.0))
            act["reach"] = near if chance() < 0.7 else "far"
        if chance() < 0.3:
            act["law"] = str(rng.choice(["dsb", "root", "ssb", "mam"]))
        if chance() < 0.3:
            act["depth"] = float(chance())
        return act

    def _over_s(self) -> float:
        """None, short or long; up to two seconds."""
        kind = self.rng.random()
        if kind < 0.25:
            return 0.0
        return float(self.rng.uniform(0.0, 0.3) if kind < 0.8 else self.rng.uniform(0.3, 2.0))

    def _aim(self) -> dict[str, Any]:
        rng = self.rng
        wide = float(rng.choice([3.0, 15.0, 50.0]))
        azimuth = float(rng.uniform(-wide, wide))
        elevation = 0.0 if self.flat else float(rng.uniform(-wide, wide)) / 2.0
        if rng.random() < 0.5:
            return {"azimuth_deg": azimuth, "elevation_deg": elevation}
        point = direction(azimuth, elevation) * rng.uniform(0.8, 6.0)
        return {"point_m": tuple(point.tolist())}

    # -- time ------------------------------------------------------------------------------------

    def run_to(self, sample: int) -> None:
        """Render up to `sample`, the player's own deeds included."""
        while (n := min(2_048, sample - self.renderer.position)) > 0:
            self._put(self.player.advance(self.renderer.position + n))
            out = np.zeros((n, self.renderer.channels), np.float32)
            start = self.renderer.position
            self.renderer.render(out)
            self.tape.add(start, out)

    def next_event(self) -> Happening:
        """Let chance ask for something, here and now."""
        where = self._where(self.renderer.position)
        sample = self.renderer.position
        kind, event, beams = self._chance()
        records = self._ask(event)
        assert not [r for r in records if r.what == "refused"], records
        sounding = [r for r in records if r.what in SOUNDING]
        settled = max((r.sample + int(r.args.get("n", 0)) for r in sounding), default=sample)
        goals = [self._goal(b) for b in beams]
        points = [_between(where[b], goal) for b, goal in zip(beams, goals, strict=True)]
        if kind in ("hush", "restore"):
            points = [_between(where["a"], where["b"])]
        told = " ".join(f"{r.beam}.{r.what}@{r.sample - sample}{dict(r.args)}" for r in sounding)
        label = f"{kind} at {sample} {told}"
        return Happening(kind, label, sample, settled, points_m=np.concatenate(points))

    def _chance(self) -> tuple[str, events.Event, list[str]]:
        if self.player.output == "HUSHED":
            return "restore", events.Restore(), []
        if self.rng.random() < 0.16:
            return "hush", events.Hush(), []
        cue = self.player.show.sheet.cue[self._next]
        self._next += 1
        beams = sorted({act.beam for act in cue.act})
        kind = "go" if any(act.sound for act in cue.act) else "re-aim"
        return kind, events.Go(ref=cue.ref), beams

    def _ask(self, event: events.Event) -> list[Record]:
        records = self.player.handle(event, self.renderer.position)
        self._put(records)
        return records

    def _put(self, records: list[Record]) -> None:
        for record in records:
            self.renderer.put(record)

    # -- where beams point -------------------------------------------------------------------------

    def _where(self, sample: int) -> dict[str, np.ndarray]:
        """Points (3,) the beams make for now, as rendered."""
        states = self.renderer.renderer.panels["p"].states
        return {b: _point(s, sample) for b, s in zip("ab", states, strict=True)}

    def _goal(self, beam: str) -> np.ndarray:
        """The point a beam makes for in the end."""
        return _point(self.player.plans[beam].state, self.renderer.position + 100 * RATE)


def _point(state: Any, sample: int) -> np.ndarray:
    *unit, distance_m = glides.travel_at(state.aim, float(sample))
    per_m = glides.reach_at(state.reach, float(sample), distance_m)
    reach_m = 1.0 / per_m if per_m > 1.0 / NOWHERE_M else NOWHERE_M
    return np.array(unit) * (distance_m if distance_m > 0.0 else reach_m)


def _between(old: np.ndarray, new: np.ndarray) -> np.ndarray:
    """Old, new and twenty points between, (22, 3): on the great circle, distance in proportion."""
    far_old, far_new = np.linalg.norm(old), np.linalg.norm(new)
    a, b = old / far_old, new / far_new
    share = np.linspace(0.0, 1.0, 22)[:, None]
    angle = np.arccos(np.clip(a @ b, -1.0, 1.0))
    if angle < 1e-6:
        unit = a + share * (b - a)
    else:
        unit = (np.sin((1.0 - share) * angle) * a + np.sin(share * angle) * b) / np.sin(angle)
    return unit * (far_old + share * (far_new - far_old))
