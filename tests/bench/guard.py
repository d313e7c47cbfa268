"""What the guard costs, as shares of one core: `python tests/bench/guard.py [FILE] [--small]`.

Prints tables (and writes them to FILE when named); exit 1 when 64 feeds and 500 seats take more
than 35 % of a core at 20 estimates a second. Processor time over simulated time, one BLAS thread;
every seat has its head points, and there are two surfaces. The programme is noise to 4 kHz.
"""

from __future__ import annotations

import os

for _name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[_name] = "1"

import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from threadpoolctl import threadpool_limits

sys.path.insert(0, str(Path(__file__).parents[1]))

from support.rigs import grid, make_show

from beamctl.guard.estimator import Estimator
from beamctl.guard.field import Field
from beamctl.guard.watch import Watch
from beamctl.show.show import Show

RATE_HZ = 192_000
SLOW_N = 9216  # a block of whole half frames: 20.8 estimates a second
TARGET_PCT = 35.0
REACH_HZ = 4000.0
SIZES = ((8, 125), (8, 500), (8, 2000), (12, 500), (16, 500), (16, 2000))
LARGE = 100_000  # feeds times points: fewer rounds


class Cost(NamedTuple):
    """Processor milliseconds of every step, and seconds of sound in one."""

    step_ms: NDArray[np.float64]
    step_s: float

    @property
    def pct(self) -> NDArray[np.float64]:
        """Share of a core of every step."""
        return self.step_ms / (10.0 * self.step_s)


def venue(side: int, seats: int) -> Show:
    """A square panel of `side` squared feeds, rows of 25 seats, a back wall and a ceiling."""
    rows = seats // 25
    depth_m = 4.0 + 0.9 * rows + 2.0
    stalls = {
        "class": "seats",
        "first_m": [-6.6, 4.0, -1.8],
        "rows": [f"r{i}" for i in range(rows)],
        "row_step_m": [0.0, 0.9, 0.1],
        "seats": 25,
        "seat_step_m": [0.55, 0.0, 0.0],
    }
    wide, high, deep = [16.0, 0.0, 0.0], [0.0, 0.0, 12.0], [0.0, depth_m, 0.0]
    surfaces = {
        "back": {"corner_m": [-8.0, depth_m, -3.0], "along_m": wide, "up_m": high},
        "ceiling": {"corner_m": [-8.0, 0.0, 9.0], "along_m": wide, "up_m": deep},
    }
    house = {
        "block": {"stalls": stalls},
        "surface": {name: surface | {"reflection": 0.9} for name, surface in surfaces.items()},
    }
    return make_show(cells=grid(side, side), house=house, at_m=(0.0, 0.0, 1.0), tilt_deg=-5.0)


def sounding(show: Show, beams: int, frames: int) -> NDArray[np.float32]:
    """(frames, feeds) of so many beams, each with noise of its own, to different sides."""
    rng = np.random.default_rng(beams)
    hz = np.fft.rfftfreq(frames, 1.0 / RATE_HZ)
    right_m = show.cells["p"].at_m[:, 0]
    total = np.zeros((len(hz), len(right_m)), np.complex128)
    carrier = int(np.argmin(np.abs(hz - 40_000.0)))
    beside = np.abs(hz - hz[carrier]) <= REACH_HZ
    for sine in rng.uniform(-0.5, 0.5, beams):
        lines = rng.normal(size=(len(hz), 2)) @ (1.0, 1j) * beside
        lines *= 0.4 / np.linalg.norm(lines)
        lines[carrier] = 1.0
        total += lines[:, None] * np.exp(-2j * np.pi * hz[:, None] * right_m * sine / 344.0)
    return (np.fft.irfft(total, axis=0) * frames / (4.0 * beams)).astype(np.float32)


def timed(work: Callable[[NDArray[np.float32]], object], samples: NDArray[np.float32], n: int,
          rounds: int) -> Cost:  # fmt: skip
    """`work` on steps of `n` samples, after one round that warms up."""
    steps = [samples[at : at + n] for at in range(0, len(samples) - n + 1, n)]
    took = []
    for number in range(rounds + 1):
        for step in steps:
            began = time.process_time()
            work(step)
            if number:
                took.append(1e3 * (time.process_time() - began))
    return Cost(np.array(took), n / RATE_HZ)


def watching(watch: Watch) -> Callable[[NDArray[np.float32]], object]:
    """A step as the guard takes it: read it, grant, count it as left."""

    def step(block: NDArray[np.float32]) -> None:
        watch.take(block)
        watch.left(np.full(len(watch.field.panels), 0.1))

    return step


def row(side: int, seats: int, beams: int) -> tuple[str, Cost]:
    """A line of the table, and what 20 estimates a second cost."""
    show = venue(side, seats)
    began = time.process_time()
    field = Field(show)
    watch = Watch(show, 2304, field)
    estimator = Estimator(show, field, show.caps)
    built_s = time.process_time() - began
    large = side * side * seats > LARGE
    samples = sounding(show, beams, SLOW_N * (2 if large else 4))
    rounds = 1 if large else 8
    fast = timed(watching(watch), samples, watch.step_n, rounds)
    slow = timed(estimator.take, samples, SLOW_N, rounds)
    ms = np.percentile(fast.step_ms, [0, 50, 95])
    return (
        f"| {side * side} | {seats} | {beams} | {ms[0]:.2f} / {ms[1]:.2f} / {ms[2]:.2f} | "
        f"{np.mean(fast.pct):.1f} % | {np.mean(slow.pct):.1f} % | {built_s:.1f} s |"
    ), slow


def main() -> int:
    """Measure, print, write; 1 when the target is missed."""
    small = "--small" in sys.argv
    files = [name for name in sys.argv[1:] if name != "--small"]
    lines = [
        "| feeds | seats | beams | ms a step: least / median / 95 % | at 94 a second | at 20 | "
        "to build |",
        "|---|---|---|---|---|---|---|",
    ]
    print(*lines, sep="\n")
    verdict = []
    with threadpool_limits(1):
        for side, seats in SIZES[:2] if small else SIZES:
            for beams in (1, 4) if (side, seats) == (8, 500) else (1,):
                line, slow = row(side, seats, beams)
                print(line, flush=True)
                lines.append(line)
                if (side, seats) == (8, 500):
                    verdict.append(float(np.mean(slow.pct)))
    holds = max(verdict) <= TARGET_PCT
    lines.append(
        f"\n64 feeds, 500 seats at 20 a second: {max(verdict):.1f} % of a core at the most, target "
        f"≤ {TARGET_PCT:g} %: {'holds' if holds else 'FALLS SHORT'}"
    )
    print(lines[-1])
    if files:
        Path(files[0]).write_text("\n".join(lines) + "\n", encoding="utf-8")
    return 0 if holds else 1


if __name__ == "__main__":
    sys.exit(main())
