"""Shows at their cap whose samples go wrong before the final stage, with the guard in step."""

from __future__ import annotations

import copy
from collections.abc import Callable
from dataclasses import replace
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.signal import hilbert
from support.directsum import Slab, absorption_np_m
from support.pressure import Hung
from support.rigs import analytic_tone, grid, make_show

from beamctl.engine.chain import Chain
from beamctl.engine.outlet import Outlet
from beamctl.engine.renderer import Renderer
from beamctl.guard.field import Field
from beamctl.guard.watch import Watch
from beamctl.host.offline import play_through
from beamctl.host.stepped import Stepped, ring_n
from beamctl.show.limits import Guard
from beamctl.show.records import Record
from beamctl.show.rig import Rig
from beamctl.show.sheet import Sheet
from beamctl.show.show import Show

RATE_HZ = 96_000
LATE_S = 0.004  # by which a live guard grants after a step is whole: here the ring is so much less
QUANTUM = 256
CAP_DB = 72.0  # so low that ten times the drive of a show at its cap stays below full scale
COLUMNS, ROWS, PITCH_M, CELL_M = 8, 1, 0.007, 0.006
FEEDS = COLUMNS * ROWS
SEATS = {"far": (1.1, 4.9, -0.5), "near": (-0.59, 2.33, -0.265), "aside": (6.8, 4.0, -0.5)}
PANELS_AT_M = ((0.0, 0.0, 0.0), (6.5, 0.0, 0.0))

F32 = NDArray[np.float32]


# -- shows ---------------------------------------------------------------------------------------


def at_seats(law: str, *aims: str, rate_hz: int = RATE_HZ) -> Show:
    """Measured, signed panels "p0", "p1" … with a beam each, which cue 1 starts at their seats."""
    panel = {
        "grid": {"columns": COLUMNS, "rows": ROWS, "pitch_mm": 1e3 * PITCH_M},
        "volts_at_full_scale": 5.0,
        "max_volts": 5.0,
        "level_db_30cm_10v": 115.0,
        "cell_mm": 1e3 * CELL_M,
        "resonance_hz": 40e3,
        "q": 1e-3,  # as good as flat
        "measured": "measured.csv",
    }
    act = {"sound": "programme", "loop": True, "law": law, "depth": 0.7, "trim_db": -22.0}
    row: dict[str, Any] = {"class": "seats", "seats": 1, "seat_step_m": (0.5, 0.0, 0.0)}
    row["row_step_m"] = (0.0, 1.0, 0.0)
    panels = {
        f"p{n}": panel | {"at_m": PANELS_AT_M[n], "first_feed": 1 + n * FEEDS}
        for n in range(len(aims))
    }
    acts = [
        act | {"beam": f"b{n}", "over_s": 0.02, "point_m": SEATS[aim]} for n, aim in enumerate(aims)
    ]
    sheet = {
        "format": 1,
        "title": "at its cap",
        "beam": {f"b{n}": {"panel": name} for n, name in enumerate(panels)},
        "cue": [{"ref": "1", "title": "all", "act": acts}],
    }
    signed = {"by": "a venue", "on": "2026-01-01", "digest": "seal"}
    house = {"block": {n: row | {"first_m": at_m, "rows": (n,)} for n, at_m in SEATS.items()}}
    return replace(
        make_show(house=house, sounds=("programme",)),
        rig=Rig.model_validate({"format": 1, "rate_hz": rate_hz, "panel": panels}),
        sheet=Sheet.model_validate(sheet),
        guard=Guard.model_validate({"format": 1, "seats_db": CAP_DB, "signed": signed}),
        cells={name: grid(COLUMNS, ROWS, PITCH_M) for name in panels},
        seal="seal",
    )


def hung(show: Show) -> list[Hung]:
    """The show's panels for direct sums."""
    through_air = np.exp(0.3 * absorption_np_m(40e3, 20.0, 50.0))
    pa_m = float(20e-6 * 10.0 ** (115.0 / 20.0) * 0.3 * 0.5 * through_air)
    shape = 0.0, 0.0, COLUMNS, ROWS, PITCH_M, 40e3, CELL_M, pa_m
    return [Hung(Slab(p.at_m, *shape), p.first_feed - 1) for p in show.rig.panel.values()]


# -- programmes ----------------------------------------------------------------------------------


def steady(seconds: float, rate_hz: int) -> F32:
    """A tone of 1 kHz."""
    return analytic_tone(1_000.0, seconds, rate_hz)


def bursts(seconds: float, rate_hz: int) -> F32:
    """Invented noise of 300 to 3000 Hz in bursts of a tenth to a third of a second, and pauses."""
    rng = np.random.default_rng(3)
    n, per_s = round(seconds * rate_hz / 2), rate_hz / 2
    hz = np.fft.rfftfreq(n, 1.0 / per_s)
    weight = ((hz > 300.0) & (hz < 3_000.0)) / np.maximum(hz, 300.0)
    noise = np.fft.irfft((rng.normal(size=len(hz)) + 1j * rng.normal(size=len(hz))) * weight, n)
    shape, at = np.zeros(n), 0
    while at < n:
        loud = round(rng.uniform(0.1, 0.35) * per_s)
        burst = np.minimum(1.0, np.hanning(loud) * 4.0) * rng.uniform(0.5, 1.0)
        shape[at : at + loud] = burst[: n - at]
        at += loud + round(rng.uniform(0.05, 0.4) * per_s)
    turns = hilbert(noise * shape)
    turns /= np.abs(turns).max()
    return np.stack((turns.real, turns.imag), axis=1).astype(np.float32)


PROGRAMMES: dict[str, Callable[[float, int], F32]] = {"steady": steady, "bursts": bursts}


# -- tapes ---------------------------------------------------------------------------------------


def tape_of(show: Show, programme: str, seconds: float) -> F32:
    """Samples (n, channels) as the renderer gives them to the final stage."""
    rate_hz = show.rig.rate_hz
    sound = PROGRAMMES[programme](seconds, rate_hz)
    renderer = Renderer(show, {name: {"programme": sound} for name in show.rig.panel})
    for record in _records(show, seconds):
        renderer.put(record)
    tape = np.zeros((round(seconds * rate_hz), show.channels), np.float32)
    renderer.render(tape)
    return tape


def gain_to_cap(show: Show, field: Field, tape: F32) -> np.float32:
    """The gain with which a tape's worst averaging time is at a cap, by the guard's own figure."""
    watch, least_db = Watch(show, ring_n(show), field), np.inf
    for first in range(0, len(tape) - watch.step_n + 1, watch.step_n):
        watch.take(tape[first : first + watch.step_n])
        watch.left(np.ones(len(show.rig.panel)))
        least_db = min(least_db, watch.headroom_db() or np.inf)
    return np.float32(10.0 ** (least_db / 20.0))


def _records(show: Show, seconds: float) -> list[Record]:
    return list(play_through(show, [(0, "1")], round(seconds * show.rig.rate_hz)))


# -- playing -------------------------------------------------------------------------------------


class Tape:
    """Stands where the renderer stands, with samples that are ready."""

    def __init__(self, samples: F32) -> None:
        self.samples, self.position = samples, 0

    def put(self, record: Record) -> None:
        """It is all on the tape."""

    def render(self, out: F32) -> None:
        """The next of it; silence after its end."""
        piece = self.samples[self.position : self.position + len(out)]
        out[: len(piece)], out[len(piece) :] = piece, 0.0
        self.position += len(out)


class Said(NamedTuple):
    """The guard after one step."""

    held_db: dict[str, float]
    headroom_db: float
    state: str


class Listening(Watch):
    """A watch whose every step is written down."""

    def __init__(self, show: Show, field: Field) -> None:
        super().__init__(show, ring_n(show), field)
        self.said: list[Said] = []

    def take(self, block: F32) -> NDArray[np.float64]:
        """As ever."""
        ceilings = super().take(block)
        self.said.append(Said(self.held_db(), self.headroom_db() or np.inf, self.state))
        return ceilings


class Playing:
    """A tape on its way through ring and final stage under the guard, in a device's quanta."""

    def __init__(self, show: Show, field: Field, tape: F32) -> None:
        self.show, self.tape, self.out = show, Tape(tape), np.zeros_like(tape)
        self.watch = Listening(show, field)
        self.stepped = Stepped(show, self.watch)
        ahead = ring_n(show) - round(LATE_S * show.rig.rate_hz)
        nothing: dict[str, dict[str, F32]] = {name: {} for name in show.rig.panel}
        self.chain = Chain(show, nothing, 0, ahead, self.stepped.tap)
        self.chain.renderer = self.tape  # type: ignore[assignment]
        self.stepped.watch_over(self.chain)
        for record in _records(show, len(tape) / show.rig.rate_hz):
            self.chain.put(record)

    def until(self, frame: int) -> Playing:
        """Play up to a multiple of the quantum, or to the end."""
        while self.chain.position < min(frame, len(self.out)):
            first = self.chain.position
            self.chain.render(self.out[first : first + QUANTUM])
            self.stepped.settle()
        return self

    def fork(self, tape: F32) -> Playing:
        """Another that goes on from here with another tape."""
        outlet = self.chain.outlet
        alike = (self.show, self.watch.field, self.tape.samples)
        known: dict[int, Any] = {id(one): one for one in alike}
        known[id(outlet)] = Outlet(outlet.memory.copy())
        other = copy.deepcopy(self, known)
        other.tape.samples = tape
        return other

    def said_after(self, seconds: float) -> list[Said]:
        """What the guard said of steps that entered later than that."""
        return self.watch.said[int(np.ceil(seconds / self.watch.step_s)) :]

    def holds_of(self, panel: str) -> int:
        """How many holds of a panel there were; one is over after a second without."""
        count, ago_s = 0, np.inf
        for said in self.watch.said:
            count += panel in said.held_db and ago_s > 1.0
            ago_s = 0.0 if panel in said.held_db else ago_s + self.watch.step_s
        return count
