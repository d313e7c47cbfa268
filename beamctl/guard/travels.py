"""What every beam does while the sheet is played from the top, in steps that miss no seat.

The sheet in its order, GO after GO, each cue once the one before has settled and with loops going
on, by the player and the beam states of the show itself: travels, dips and shared moments are those
that will be. A cue that another one follows by itself is looked at alone, as it would be if the
follow-on were refused; the follow-on then finds it as it is at that second.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import replace
from functools import cache
from itertools import groupby, pairwise
from typing import NamedTuple

import numpy as np

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.show import glides
from beamctl.show.beamstate import LAWS, BeamState
from beamctl.show.events import Confirm, Go, Ready
from beamctl.show.player import Player
from beamctl.show.records import SOUNDING, Record
from beamctl.show.show import Show

TURN = np.pi / 4.0  # of phase at a panel's edge from one step to the next: a quarter of the lobe
BETWEEN = 1.0 / float(np.sinc(0.125))  # what a lobe midway between two steps has over them
PARTS = 8  # of a glide of level, depth, law or sound
GAP_S = 0.1  # between a cue that has settled and the next GO: every old slope has died away

Place = tuple[float, float, float, float]  # unit direction in panel axes, and focus in 1/m


class Programme(NamedTuple):
    """What modulates a beam."""

    sound: str
    law: str
    depth: float


Mix = tuple[tuple[Programme, float], ...]  # programmes that cross-fade, and their shares


class Source(NamedTuple):
    """One beam during one step.

    gain    the most it has in the step; 1 is trim 0 dB
    glide   the gains between which it glides there, equal when it does not
    place   where it points midway
    moving  whether its aim or its reach changes during the step
    mixes   what it plays when the step begins and when it ends
    """

    beam: str
    gain: float
    glide: tuple[float, float]
    place: Place
    moving: bool
    mixes: tuple[Mix, ...]

    def held(self, gain: float) -> Source:
        """The same with both ends of its glide held to `gain`."""
        first, last = self.glide
        share = (self.gain - first) / (last - first) if first != last else 1.0
        first, last = min(first, gain), min(last, gain)
        return self._replace(gain=max(0.0, first + (last - first) * share), glide=(first, last))


class Step(NamedTuple):
    """A short while at sample `at`: the beams that sound."""

    at: int
    sources: tuple[Source, ...]


class Travel(NamedTuple):
    """One cue from its GO at sample `go` until it has settled; `before` is what it finds."""

    ref: str
    go: int
    before: Step
    steps: tuple[Step, ...]


def travels(show: Show) -> Iterator[Travel]:
    """Every cue of the sheet that a GO or a follow-on reaches, not always in the sheet's order."""
    leading = [cue.ref for cue in show.sheet.cue if cue.then is not None]
    others = {cue.ref for cue in show.sheet.cue}.difference(leading)
    yield from _sampled(show, _played(show), others)
    for ref in leading:
        alone = _without_follow_on(show, ref)
        yield from _sampled(show, _played(alone, ref), {ref})


# -- playing --------------------------------------------------------------------------------------


def _without_follow_on(show: Show, ref: str) -> Show:
    cues = tuple(
        cue.model_copy(update={"then": None, "then_at_s": None}) if cue.ref == ref else cue
        for cue in show.sheet.cue
    )
    return replace(show, sheet=show.sheet.model_copy(update={"cue": cues}))


def _played(show: Show, last: str = "") -> list[Record]:
    """Records of the sheet played from the top, as far as cue `last` where one is named."""
    player = Player(show)
    records = player.sink("sink-open", 0)
    records += player.handle(Ready(), 0) + player.handle(Confirm(), 0)
    fired: set[str] = set()
    sample = 0
    for cue in show.sheet.cue:
        if cue.ref in fired:  # it came by itself
            continue
        sample += round(GAP_S * show.rig.rate_hz)
        found = player.handle(Go("", cue.ref), sample)
        settled = -1
        while (end := max(_pending(player), *map(_end, found))) > settled:
            settled = end
            found += player.advance(settled + 1)
        records += found
        fired.update(record.cue for record in found if record.what == "go")
        if last in fired:
            break
        sample = settled
    return records


def _end(record: Record) -> int:
    return record.sample + int(record.args.get("n", 0))


def _pending(player: Player) -> int:
    """The last sample at which something is known to happen by itself."""
    runs, plans = player.runs.values(), player.plans.values()
    acts = (run.acts[-1][0] for run in runs if run.acts)
    follows = (run.follow[0] for run in runs if run.follow)
    ends = (plan.ends_at for plan in plans if plan.ends_at is not None)
    return max((*acts, *follows, *ends), default=0)


# -- looking at what was played -------------------------------------------------------------------


def _sampled(show: Show, records: list[Record], wanted: set[str]) -> Iterator[Travel]:
    beams = {name: _Beam(show, name) for name in show.sheet.beam}
    ref, go, before = "", 0, Step(0, ())
    steps: list[Step] = []
    then = 0
    in_time = sorted(records, key=lambda record: record.sample)  # stable: as they were told
    for sample, together in groupby(in_time, key=lambda record: record.sample):
        if ref in wanted:
            steps += _steps(beams.values(), then, sample)
        for record in together:
            if record.what == "go":
                if ref in wanted:
                    yield Travel(ref, go, before, tuple(steps))
                ref, go, before, steps = record.cue, sample, _step(beams.values(), sample), []
            elif record.what in SOUNDING:
                beams[record.beam].state.apply(record)
        then = sample
    if ref in wanted:
        settled = max(map(_end, records))
        steps += _steps(beams.values(), then, settled + round(GAP_S * show.rig.rate_hz))
        yield Travel(ref, go, before, tuple(steps))


class _Beam:
    """One beam of the show while its records are gone through."""

    def __init__(self, show: Show, name: str) -> None:
        panel = show.panel_of(name)
        cells = show.cells[panel]
        live = cells.at_m[~cells.dead]
        speed = sound_speed_m_s(Air(**show.house.air.model_dump()))
        self.name = name
        self.state = BeamState(show.rig.rate_hz)
        self._wavenumber = 2.0 * np.pi * show.rig.panel[panel].carrier_hz / speed
        self._radius_m = max(map(float, np.linalg.norm(live, axis=1)), default=0.0)

    def place(self, sample: int) -> Place:
        x, y, z, _ = self.state.direction_at(sample)
        return x, y, z, self.state.reach_per_m_at(sample)

    def turn(self, a: Place, b: Place) -> float:
        """Radians at most that the phase at the panel's edge changes by from a to b."""
        aim = self._radius_m * float(np.linalg.norm(np.subtract(a[:3], b[:3])))
        focus = 0.5 * self._radius_m**2 * abs(a[3] - b[3])
        return self._wavenumber * (aim + focus)

    def moving(self, sample: int) -> bool:
        state = self.state
        return state.travelling(sample) or not glides.reach_settled(state.reach, sample)

    def marks(self) -> Iterator[float]:
        """Samples at which a glide ends, may turn about, or has done another part of its way."""
        state = self.state
        for row, carried in (
            (state.level, glides.CARRY_N),
            (state.aim, glides.DRIFT_N),
            (state.reach, glides.CARRY_N),
        ):
            start = row[glides.START]
            yield from (start + row[glides.N], start + row[carried] / 3.0, start + row[carried])
        for row in (state.level, state.depth, *state.law, *(v.weight for v in state.voices)):
            if row[glides.FROM] != row[glides.TO]:
                yield from row[glides.START] + row[glides.N] * np.arange(1, PARTS + 1) / PARTS

    def source(self, begin: int, end: int) -> Source:
        """What it is from `begin` to `end`; level glides count with their larger end."""
        level = self.state.level
        gain = max(self.state.power_at(begin), self.state.power_at(end)) ** 0.5
        still = glides.is_settled(level, begin)
        glide = (gain, gain) if still else (float(level[glides.FROM]), float(level[glides.TO]))
        moving = end > begin and self.moving(begin)
        mixes = tuple(dict.fromkeys((self._mix(begin), self._mix(end))))
        return Source(self.name, gain, glide, self.place((begin + end) // 2), moving, mixes)

    def _mix(self, sample: int) -> Mix:
        state = self.state
        sounds: dict[str, float] = {}
        for voice in state.voices:
            share = glides.scalar_at(voice.weight, sample)
            sounds[voice.sound] = sounds.get(voice.sound, 0.0) + share
        found = (
            (Programme(sound, law, depth), a * glides.scalar_at(row, sample) * b)
            for sound, a in sounds.items()
            for law, row in zip(LAWS, state.law, strict=True)
            for depth, b in _ends(state.depth, sample)
        )
        return tuple((programme, share) for programme, share in found if share > 0.0)


def _ends(row: glides.Row, sample: int) -> tuple[tuple[float, float], ...]:
    """The two ends of a glide, each with its share in the value now."""
    first, last = float(row[glides.FROM]), float(row[glides.TO])
    if glides.is_settled(row, sample) or first == last:
        return ((last, 1.0),)
    share = min(1.0, max(0.0, (glides.scalar_at(row, sample) - first) / (last - first)))
    return (first, 1.0 - share), (last, share)


def _steps(beams: Iterable[_Beam], begin: int, end: int) -> Iterator[Step]:
    """Steps from `begin` to `end`, between which no record changes a beam."""
    sounding = [beam for beam in beams if not beam.state.silent(begin)]
    marks = {round(mark) for beam in sounding for mark in beam.marks()}
    cuts = sorted({begin, end} | {mark for mark in marks if begin < mark < end})
    for a, b in pairwise(cuts):
        moving = [beam for beam in sounding if beam.moving(a)]
        for u, v in _pieces(moving, a, b):
            yield from _piece(sounding, u, v)


def _piece(sounding: list[_Beam], u: int, v: int) -> Iterator[Step]:
    now, most = _step(sounding, u), _step(sounding, u, v)
    gains = [[source.gain for source in step.sources] for step in (now, most)]
    if gains[0] == gains[1]:
        yield most
        return
    if len(sounding) > 1:  # the larger ends need not come together: as it is at one end, too
        yield now
    yield most._replace(at=v)


def _step(beams: Iterable[_Beam], begin: int, end: int | None = None) -> Step:
    sources = (beam.source(begin, begin if end is None else end) for beam in beams)
    return Step(begin, tuple(source for source in sources if source.gain > 0.0))


def _pieces(moving: list[_Beam], begin: int, end: int) -> Iterator[tuple[int, int]]:
    """Parts of a stretch, in each of which no beam turns by more than TURN."""
    places: list[tuple[_Beam, Callable[[int], Place]]] = [(b, cache(b.place)) for b in moving]

    def cut(u: int, v: int) -> Iterator[tuple[int, int]]:
        mid = (u + v) // 2
        halves = ((beam, at(mid), at(u), at(v)) for beam, at in places)
        near = all(max(b.turn(m, x), b.turn(m, y)) <= 0.5 * TURN for b, m, x, y in halves)
        if near or v - u < 2:
            yield u, v
        else:
            yield from cut(u, mid)
            yield from cut(mid, v)

    yield from cut(begin, end)
