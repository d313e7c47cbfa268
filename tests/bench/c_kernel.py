"""Builds kernel.c and calls it on a panel's own arrays, where a C compiler is."""

from __future__ import annotations

import ctypes
import shutil
import subprocess
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

from beamctl.engine import kernels
from beamctl.engine.buffers import SEGMENT
from beamctl.engine.panel import Panel
from beamctl.show.glides import reach_at, travel_at

FLAGS = ("-O3", "-march=native", "-ffast-math", "-shared", "-fPIC")


def compiler() -> str | None:
    """A C compiler's path."""
    return shutil.which("cc") or shutil.which("gcc") or shutil.which("clang")


def c_way(panel: Panel, start: float) -> Callable[[], np.ndarray]:
    """One segment from `start` by kernel.c; returns its (F, 256) feed samples."""
    folder = tempfile.mkdtemp()
    library = Path(folder) / "kernel.so"
    source = Path(__file__).with_name("kernel.c")
    subprocess.run([compiler(), *FLAGS, str(source), "-o", str(library), "-lm"], check=True)
    work = ctypes.CDLL(str(library)).delay_and_sum
    b, w = panel.buffers, panel.wiring
    beams, feeds = len(panel.states), b.out.shape[0]
    rows, base = np.zeros_like(b.rows), np.ascontiguousarray(b.base)
    aims = np.zeros((beams, 3, 4))
    for i in range(beams):
        for step in range(3):
            sample = start + 0.5 * step * SEGMENT
            x, y, z, distance = travel_at(b.aim[i], sample)
            aims[i, step] = x, y, z, reach_at(b.reach[i], sample, distance)
    coef, delay = np.zeros((feeds, 6)), np.zeros((feeds, 3))
    acc, out = np.zeros((2, *b.out.shape), np.float32), np.zeros_like(b.out)
    rows[:] = b.rows
    taps = np.ascontiguousarray(w.row_taps)
    kept: list[Any] = [rows, base, aims, coef, delay, acc, out, taps]

    def at(array: np.ndarray) -> ctypes.c_void_p:
        return ctypes.c_void_p(array.ctypes.data)

    length = rows.shape[3]
    arguments = (
        beams, feeds, w.cells.shape[1], SEGMENT, length, length - SEGMENT,
        at(base), base.shape[2], at(taps), at(w.cells), at(w.wanted), at(w.feed), at(w.share),
        at(aims), *map(ctypes.c_double, w.steer), ctypes.c_double(w.cycles_per_sample),
        ctypes.c_double(start), at(rows), at(coef), at(delay), at(acc), at(out),
    )  # fmt: skip
    assert base.shape[2] == kernels.ROW_TAPS - 1 + SEGMENT

    def run(_kept: list[Any] = kept) -> np.ndarray:
        work(*arguments)
        return out

    return run
