"""Shows at their cap whose samples go wrong before the final stage, with the guard in step."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.signal import hilbert
from support.directsum import Slab, absorption_np_m
from support.pressure import Hung
from support.rigs import analytic_tone, grid, make_show

from beamctl.engine.chain import Chain
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
LATE_S = 0.004  # by which a grant comes after the step that it is for is whole: as live
QUANTUM = 256
CAP_DB = 78.0  # so low that ten times the drive of a show at its cap is still below full scale
COLUMNS, ROWS, PITCH_M, CELL_M = 8, 2, 0.007, 0.006
FEEDS = COLUMNS * ROWS
AIR_CELSIUS, AIR_PCT = 20.0, 50.0
FAR_M, NEAR_M = (1.1, 4.9, -0.5), (-0.59, 2.33, -0.265)

F32 = NDArray[np.float32]


# -- shows ---------------------------------------------------------------------------------------


def make(law: str, panels: int = 1, seats: dict[str, tuple[float, float, float]] | None = None,
         rate_hz: int = RATE_HZ, aims: tuple[str, ...] = ("far", "far"), cap_db: float = CAP_DB) -> Show:
    """Measured, signed panels "p0", "p1" with a beam each; cue 1 starts both at their seats."""
    seats = seats or {"far": FAR_M, "near": NEAR_M}
    spec = {
        "at_m": (0.0, 0.0, 0.0), "grid": {"columns": COLUMNS, "rows": ROWS, "pitch_mm": 1e3 * PITCH_M},
        "volts_at_full_scale": 5.0, "max_volts": 5.0, "level_db_30cm_10v": 115.0,
        "cell_mm": 1e3 * CELL_M, "resonance_hz": 40e3, "q": 1e-3, "measured": "m.csv",
    }
    rig = {f"p{n}": spec | {"at_m": (0.8 * n, 0.0, 0.0), "first_feed": 1 + n * FEEDS} for n in range(panels)}
    acts = [
        {"beam": f"b{n}", "sound": "programme", "loop": True, "law": law, "depth": 0.7,
         "trim_db": -22.0, "over_s": 0.02, "point_m": seats[aims[n]]}
        for n in range(panels)
    ]
    blocks = {
        name: {"class": "seats", "first_m": at_m, "rows": (name,), "row_step_m": (0.0, 1.0, 0.0),
               "seats": 1, "seat_step_m": (0.5, 0.0, 0.0)}
        for name, at_m in seats.items()
    }
    bare = make_show(("b0",), [], house={"block": blocks}, rate_hz=rate_hz, sounds=("programme",))
    signed = {"by": "a venue", "on": "2026-01-01", "digest": "seal"}
    sheet = {"format": 1, "title": "t", "beam": {f"b{n}": {"panel": f"p{n}"} for n in range(panels)},
             "cue": [{"ref": "1", "title": "t", "act": acts}]}
    return replace(
        bare, seal="seal",
        rig=Rig.model_validate({"format": 1, "rate_hz": rate_hz, "panel": rig}),
        sheet=Sheet.model_validate(sheet),
        guard=Guard.model_validate({"format": 1, "seats_db": cap_db, "signed": signed}),
        cells={name: grid(COLUMNS, ROWS, PITCH_M) for name in rig},
    )


def hung(show: Show) -> list[Hung]:
    """The show's panels for the direct sums."""
    pa_m = 20e-6 * 10.0 ** (115.0 / 20.0) * 0.3 * 0.5
    pa_m *= np.exp(0.3 * absorption_np_m(40e3, AIR_CELSIUS, AIR_PCT))
    return [
        Hung(Slab(p.at_m, 0.0, 0.0, COLUMNS, ROWS, PITCH_M, 40e3, CELL_M, pa_m), p.first_feed - 1)
        for p in show.rig.panel.values()
    ]


# -- programmes ----------------------------------------------------------------------------------


def steady(seconds: float, rate_hz: int) -> F32:
    """A tone of 1 kHz."""
    return analytic_tone(1_000.0, seconds, rate_hz)


def bursts(seconds: float, rate_hz: int) -> F32:
    """Invented noise between 300 and 3000 Hz in bursts of a tenth to a third of a second."""
    rng = np.random.default_rng(3)
    n = round(seconds * rate_hz / 2)
    hz = np.fft.rfftfreq(n, 2.0 / rate_hz)
    lines = rng.normal(size=(2, len(hz))) * ((hz > 300) & (hz < 3000)) / np.maximum(hz, 300)
    noise = np.fft.irfft(lines[0] + 1j * lines[1], n)
    shape, at = np.zeros(n), 0
    while at < n:
        loud, pause = (round(s * rate_hz / 2) for s in (rng.uniform(0.1, 0.35), rng.uniform(0.05, 0.4)))
        edge = np.hanning(round(0.02 * rate_hz))
        window = np.ones(loud)
        half = len(edge) // 2
        window[:half], window[-half:] = edge[:half], edge[-half:]
        shape[at : at + loud] = window[: n - at] * rng.uniform(0.5, 1.0)
        at += loud + pause
    turns = hilbert(noise * shape)
    turns /= np.abs(turns).max()
    return np.stack((turns.real, turns.imag), axis=1).astype(np.float32)


PROGRAMMES: dict[str, Callable[[float, int], F32]] = {"steady": steady, "bursts": bursts}


# -- tapes ---------------------------------------------------------------------------------------


def records_of(show: Show, seconds: float) -> list[Record]:
    """What the player says for cue 1 at the first sample."""
    return list(play_through(show, [(0, "1")], round(seconds * show.rig.rate_hz)))


def tape_of(show: Show, programme: F32, seconds: float) -> F32:
    """Samples (n, channels) as the renderer gives them to the final stage."""
    renderer = Renderer(show, {name: {"programme": programme} for name in show.rig.panel})
    for record in records_of(show, seconds):
        renderer.put(record)
    tape = np.zeros((round(seconds * show.rig.rate_hz), show.channels), np.float32)
    renderer.render(tape)
    return tape


def headroom_db(show: Show, shared: Field, tape: F32) -> float:
    """What the guard's own figure leaves to the cap at a tape's worst, if all of it left."""
    watch = Watch(show, ring_n(show), shared)
    least = np.inf
    for first in range(0, len(tape) - watch.step_n + 1, watch.step_n):
        watch.take(tape[first : first + watch.step_n])
        watch.left(np.ones(len(show.rig.panel)))
        found = watch.headroom_db()
        least = min(least, np.inf if found is None else found)
    return least


class Tape:
    """Stands where the renderer stands: samples that are ready, gone wrong from somewhere on."""

    def __init__(self, samples: F32) -> None:
        self.samples, self.position = samples, 0

    def put(self, record: Record) -> None:
        """It is all on the tape."""

    def render(self, out: F32) -> None:
        """The next of it; silence after its end."""
        piece = self.samples[self.position : self.position + len(out)]
        out[: len(piece)], out[len(piece) :] = piece, 0.0
        self.position += len(out)


@dataclass
class Told:
    """What a run sent, and what the guard said at each of its steps."""

    out: F32
    stepped: Stepped
    held_db: dict[str, list[float]] = field(default_factory=dict)
    headroom_db: list[float] = field(default_factory=list)
    states: list[str] = field(default_factory=list)

    def began(self, step_s: float, panel: str) -> int:
        """How often a hold of a panel began, if it is over after a second without."""
        count, ago_s = 0, np.inf
        for db in self.held_db[panel]:
            count += db > 0.0 and ago_s > 1.0
            ago_s = 0.0 if db > 0.0 else ago_s + step_s
        return count


def run(show: Show, shared: Field, tape: F32, late_s: float = LATE_S) -> Told:
    """Send a tape through ring and final stage under the guard, in a device's quanta."""
    stepped = Stepped(show, Watch(show, ring_n(show), shared))
    told = Told(np.zeros_like(tape), stepped, {name: [] for name in show.rig.panel})

    def tap(first: int, block: F32) -> None:
        before = len(stepped.watch._under_way)
        stepped.tap(first, block)
        if len(stepped.watch._under_way) > before:
            held = stepped.watch.held_db()
            for name, row in told.held_db.items():
                row.append(held.get(name, 0.0))
            told.headroom_db.append(stepped.watch.headroom_db() or np.inf)
            told.states.append(stepped.watch.state)

    ahead = ring_n(show) - round(late_s * show.rig.rate_hz)
    chain = Chain(show, {name: {} for name in show.rig.panel}, 0, ahead, tap)
    chain.renderer = Tape(tape)  # type: ignore[assignment]
    stepped.watch_over(chain)
    for record in records_of(show, len(tape) / show.rig.rate_hz):
        chain.put(record)
    for first in range(0, len(tape), QUANTUM):
        chain.render(told.out[first : first + QUANTUM])
        stepped.settle()
    return told
