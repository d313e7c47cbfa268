"""How fast the renderer is, as ratios measured in one run: `python tests/bench/speed.py [FILE]`.

Prints a table (and writes it to FILE when named); exit 1 when a figure falls short of 0.8 of its
target. Every figure is a median over interleaved rounds, so that a machine whose speed drifts moves
both sides of a ratio. One core: run it with `taskset -c 0` for steady figures.
"""

from __future__ import annotations

import os

for _name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[_name] = "1"

import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numba
import numpy as np
from numpy.typing import NDArray

sys.path.insert(0, str(Path(__file__).parents[1]))

from bench.c_kernel import c_way, compiler
from support.rigs import analytic_tone, grid, make_show

from beamctl.engine import envelopes, kernels, sharing
from beamctl.engine.buffers import SEGMENT
from beamctl.engine.panel import Panel
from beamctl.engine.renderer import Renderer
from beamctl.files.reader import load_show
from beamctl.host import offline
from beamctl.show.records import Record
from beamctl.sinks.rf64 import Rf64Writer

RATE = 192_000
ROUNDS = 40
LOT = 64  # segments in one call
NIGHT_TRAM = Path(__file__).parents[2] / "scenes" / "night-tram"
PERFORMANCE = (
    (0, "1"),
    (8, "2"),
    (14, "3"),
    (21, "4"),
    (27, "4.5"),
    (34, "5"),
    (45, "6A"),
    (52, "7"),
)
PERFORMANCE_S = 62


@dataclass(frozen=True)
class Figure:
    """One row of the table; `more` says whether more is better."""

    what: str
    value: float
    target: float
    unit: str
    more: bool

    @property
    def holds(self) -> bool:
        """Within 0.8 of the target."""
        return self.value >= 0.8 * self.target if self.more else self.value <= self.target / 0.8


def seconds(work: Callable[[], object], repeat: int) -> float:
    """Seconds of one call, over `repeat` calls."""
    began = time.perf_counter()
    for _ in range(repeat):
        work()
    return (time.perf_counter() - began) / repeat


def moving_renderer(columns: int, rows: int, beams: int) -> Renderer:
    """A renderer whose beams all sound and travel at 60 degrees a second."""
    names = tuple(f"b{i}" for i in range(beams))
    show = make_show(names, cells=grid(columns, rows), q=20.0)
    renderer = Renderer(show, {"p": {"tone": analytic_tone(1000.0, 1.0)}})
    for i, name in enumerate(names):
        first = [np.sin(-0.5), np.cos(-0.5), 0.01 * i]
        goal = [np.sin(0.5), np.cos(0.5), 0.01 * i]
        renderer.put(Record(0, "aim", name, args={"direction": first, "n": 0}))
        renderer.put(Record(0, "play", name, args={"sound": "tone", "loop": True}))
        renderer.put(Record(0, "level", name, args={"power": 0.01, "n": 3840}))
        for turn in range(200):
            to = goal if turn % 2 == 0 else first
            at = 4000 + turn * RATE
            renderer.put(Record(at, "aim", name, args={"direction": to, "n": RATE - 1}))
    out = np.zeros((SEGMENT, show.channels), np.float32)
    for _ in range(40):
        renderer.render(out)
    return renderer


@numba.njit(nogil=True)
def segments(count, b, w, row_at, start, known, upsampling):
    """`count` segments, all beams: row layout, aiming, summing, carrier; or upsampling first."""
    for _ in range(count):
        for i in range(b.active.shape[0]):
            kernels.aim_feeds(
                b.coef[i], b.edge[i], known, w.cells, w.wanted, w.feed, w.share, b.scratch,
                b.aim[i], b.reach[i], start, 256.0, w.steer,
            )  # fmt: skip
            if upsampling:
                envelopes.raise_rate(b.full[i], 576, 256, b.quarter[i], 19, w.raise_taps, 0, b.line)
            kernels.fill_rows(b.rows[i], b.base[i], w.row_taps, row_at, 5, 256)
        kernels.fill_carrier(b.carrier, b.total, w.cycles_per_sample, int(start), 0, 256)
        kernels.sum_feeds(
            b.out, b.acc, b.carrier, b.rows, b.coef, b.active, b.piece, w.ramp, row_at, 0, 256
        )


def kernel_of(
    panel: Panel, count: int, known: bool = True, upsampling: bool = False
) -> Callable[[], None]:
    """`count` segments of a panel in one call of compiled code, as the engine runs it.

    known       the first phasors are those the last segment ended with, as in a long travel
    upsampling  begin with the envelopes at a quarter of the rate; NumPy and C are given them at
                the full rate, as this is without it
    """
    b, w = panel.buffers, panel.wiring
    assert (kernels.ROW_TAPS, SEGMENT, sharing.LOOKAHEAD, len(w.raise_taps)) == (6, 256, 576, 80)
    row_at = b.rows.shape[3] - SEGMENT
    return lambda: segments(count, b, w, row_at, 30_000.0, known, upsampling)


def numpy_ways(panel: Panel) -> dict[str, Callable[[], object]]:
    """The same sum in NumPy, for beams that stand still, from the same envelope, as accurate.

    shift matrix   every feed's interpolation taps and phasors in one matrix, times the envelopes
                   at every whole-sample delay: one product, all about the aim worked out before
    gathered rows  the 16 fractional rows by a small product, two of them gathered per feed and
                   beam, then one batched product with the weights of both
    """
    b, taps = panel.buffers, panel.wiring.row_taps
    beams, feeds = len(panel.states), b.out.shape[0]
    weights = (b.coef[:, 0] + 1j * b.coef[:, 1]).astype(np.complex64)
    carrier = np.exp(2j * np.pi * np.arange(SEGMENT) * 40_000 / RATE).astype(np.complex64)
    longest = int(b.coef[:, 2].max()) // 16 + 8
    base = np.random.default_rng(1).standard_normal((beams, longest + SEGMENT, 2))
    envelope = base.astype(np.float32).view(np.complex64)[..., 0]
    low = np.floor(b.coef[:, 2]).astype(int)
    part = b.coef[:, 2] - low

    matrix = np.zeros((feeds, beams, longest), np.complex64)
    for beam in range(beams):
        for f in range(feeds):
            for row, share in (
                (low[beam, f], 1.0 - part[beam, f]),
                (low[beam, f] + 1, part[beam, f]),
            ):
                at = row // 16
                matrix[f, beam, at : at + 6] += share * weights[beam, f] * taps[row % 16]
    matrix = matrix.reshape(feeds, beams * longest)
    shifts = np.lib.stride_tricks.sliding_window_view(envelope, SEGMENT, axis=1)[:, longest:0:-1]

    def shift_matrix() -> NDArray[np.float32]:
        delayed = np.ascontiguousarray(shifts).reshape(beams * longest, SEGMENT)
        return ((matrix @ delayed) * carrier).real

    spread = SEGMENT + longest - 5
    six = np.lib.stride_tricks.sliding_window_view(envelope, spread, axis=1)[:, 5::-1]
    both = np.stack([low, low + 1], axis=-1)
    shares = np.stack([(1.0 - part) * weights, part * weights], axis=-1)
    shares = np.ascontiguousarray(
        shares.transpose(1, 0, 2).reshape(feeds, 1, 2 * beams), np.complex64
    )
    beam_at = np.arange(beams)[:, None, None]
    row_at = longest - 5 - both // 16
    complex_taps = taps.astype(np.complex64)

    def gathered_rows() -> NDArray[np.float32]:
        rows = complex_taps @ np.ascontiguousarray(six)
        windows = np.lib.stride_tricks.sliding_window_view(rows, SEGMENT, axis=2)
        picked = windows[beam_at, both % 16, row_at].transpose(1, 0, 2, 3)
        picked = np.ascontiguousarray(picked).reshape(feeds, 2 * beams, SEGMENT)
        return ((shares @ picked)[:, 0] * carrier).real

    assert np.abs(shift_matrix() - gathered_rows()).max() < 1e-4 * np.abs(shift_matrix()).max()
    return {"shift matrix": shift_matrix, "gathered rows": gathered_rows}


def against_others() -> tuple[list[Figure], list[str]]:
    """Kernel with all beams travelling, against NumPy with them standing, and against plain C."""
    panel = moving_renderer(8, 8, 4).panels["p"]
    work, whole = kernel_of(panel, LOT), kernel_of(panel, LOT, upsampling=True)
    work()
    whole()
    ways = numpy_ways(panel)
    if compiler() is not None:
        kernel_of(panel, 1, known=False)()
        ways["C"] = in_c = c_way(panel, 30_000.0)
        assert np.abs(in_c() - panel.buffers.out).max() < 1e-5
    ours: list[float] = []
    wholes: list[float] = []
    theirs: dict[str, list[float]] = {name: [] for name in ways}
    for _ in range(ROUNDS):
        ours.append(seconds(work, 1) / LOT)
        wholes.append(seconds(whole, 1) / LOT)
        for name, way in ways.items():
            theirs[name].append(seconds(way, 3))
    medians = {name: float(np.median(times)) for name, times in theirs.items()}
    best = min((n for n in medians if n != "C"), key=lambda name: medians[name])
    share = 100.0 * float(np.median(wholes)) * RATE / SEGMENT
    notes = [f"{name}: {1e6 * t:.0f} µs a segment" for name, t in medians.items()]

    def ratio(name: str) -> float:
        return float(np.median(np.array(theirs[name]) / np.array(ours)))

    figures = [
        Figure(f"64 × 4 travelling against NumPy ({best})", ratio(best), 5.0, "×", True),
        Figure("64 × 4 travelling, upsampling included, of one core", share, 5.0, "%", False),
    ]
    if "C" in ways:
        what = "64 × 4 travelling against C, -O3 -march=native -ffast-math"
        figures.append(Figure(what, ratio("C"), 1.0, "×", True))
    else:
        notes.append("no C compiler here")
    return figures, notes


def growth() -> list[Figure]:
    """Cost per feed and beam at 256 × 8 against 64 × 4: 1 is linear."""
    small = kernel_of(moving_renderer(8, 8, 4).panels["p"], LOT, upsampling=True)
    large = kernel_of(moving_renderer(16, 16, 8).panels["p"], LOT // 8, upsampling=True)
    small()
    large()
    ratios, shares = [], []
    for _ in range(ROUNDS):
        a, b = seconds(small, 1) / LOT, seconds(large, 1) / (LOT // 8)
        ratios.append((b / (256 * 8)) / (a / (64 * 4)))
        shares.append(100.0 * b * RATE / SEGMENT)
    cost = float(np.median(ratios))
    return [
        Figure("cost of 256 × 8 over 64 × 4, per feed and beam", cost, 1.0, "×", False),
        Figure(
            "256 × 8 travelling, upsampling included, of one core",
            float(np.median(shares)),
            35.0,
            "%",
            False,
        ),
    ]


def whole_render() -> Figure:
    """The shipped show's whole performance to a file, prepared sounds and compiled code ready."""
    show = load_show(NIGHT_TRAM)
    samples = PERFORMANCE_S * show.rig.rate_hz
    gos = [(at * show.rig.rate_hz, ref) for at, ref in PERFORMANCE]
    rates = []
    for _ in range(3):
        records = list(offline.play_through(show, gos, samples))
        with tempfile.TemporaryDirectory() as folder:
            began = time.perf_counter()
            writer = Rf64Writer(Path(folder) / "out.wav", show.rig.rate_hz, show.channels)
            offline.render(show, records, samples, writer.write, lambda *_: None)
            writer.close()
            rates.append(PERFORMANCE_S / (time.perf_counter() - began))
    return Figure("render of night-tram against real time", float(np.median(rates)), 5.0, "×", True)


def main() -> int:
    """Measure, print, write; 1 when a figure falls short."""
    figures, notes = against_others()
    figures += growth()
    figures.append(whole_render())
    lines = ["| what | measured | target | |", "|---|---|---|---|"]
    for f in figures:
        bound = "≥" if f.more else "≤"
        verdict = "holds" if f.holds else "FALLS SHORT"
        lines.append(
            f"| {f.what} | {f.value:.2f} {f.unit} | {bound} {f.target:g} {f.unit} | {verdict} |"
        )
    table = "\n".join([*lines, "", *notes])
    print(table)
    if len(sys.argv) > 1:
        Path(sys.argv[1]).write_text(table + "\n", encoding="utf-8")
    return 0 if all(f.holds for f in figures) else 1


if __name__ == "__main__":
    sys.exit(main())
