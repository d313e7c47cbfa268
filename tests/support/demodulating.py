"""Rendered feeds taken apart again: the complex lines of a periodic envelope, and what air adds.

A line h stands h · tone_hz beside the carrier; everything here is periodic with the tone, so the
lines are exact values of one discrete Fourier transform, with no window and no filter.
"""

from __future__ import annotations

import numpy as np
from support.rigs import grid, make_show

from beamctl.engine.renderer import Renderer
from beamctl.show.records import Record

RATE = 192_000


def render(
    programme: np.ndarray,
    law: str,
    depth: float,
    samples: int,
    q: float = 0.01,
    power: float = 0.25,
    carrier_hz: float = 40_000.0,
) -> np.ndarray:
    """(samples,) float64 of the one feed of a one-cell panel, long after everything has settled.

    programme  (frames, 2) analytic, repeated without a seam; a cell of small q is not equalised
    """
    show = make_show(cells=grid(1, 1), q=q, carrier_hz=carrier_hz)
    renderer = Renderer(show, {"p": {"tone": programme}})
    renderer.put(Record(0, "law", "a", args={"law": law, "n": 0}))
    renderer.put(Record(0, "depth", "a", args={"depth": depth, "n": 0}))
    renderer.put(Record(0, "play", "a", args={"sound": "tone", "loop": True}))
    renderer.put(Record(0, "level", "a", args={"power": power, "n": 3840}))
    out = np.zeros((38_400 + samples, 1), np.float32)
    renderer.render(out)
    return out[38_400:, 0].astype(np.float64)


def lines_of(feed: np.ndarray, tone_hz: float, carrier_hz: float = 40_000.0) -> np.ndarray:
    """Lines -K … K of the envelope, (2 K + 1,) complex, K lines being all above 0 Hz and Nyquist.

    `feed` must hold whole periods of tone and carrier.
    """
    step_hz = RATE / len(feed)
    middle, apart = carrier_hz / step_hz, tone_hz / step_hz
    assert middle == round(middle) and apart == round(apart), "not whole periods"
    reach = int(min(carrier_hz, 0.5 * RATE - carrier_hz, 20e3) / tone_hz)
    at = round(middle) + round(apart) * np.arange(-reach, reach + 1)
    return 2.0 * np.fft.rfft(feed)[at] / len(feed)


def audible(lines: np.ndarray) -> np.ndarray:
    """Amplitude of d²/dt²|E|² at 0, 1, 2 … times the tone, in units of (2π tone)².

    Berktay, J. Sound Vib. 2 (1965) 435: the far-field pressure of a modulated carrier.
    """
    square = np.convolve(lines, np.conj(lines[::-1]))[len(lines) - 1 :]
    return 2.0 * np.abs(square) * np.arange(len(square)) ** 2


def distortion(tones: np.ndarray, highest: int = 19) -> float:
    """Total harmonic distortion of `audible` tones, re the first, up to harmonic `highest`."""
    return float(np.sqrt(np.sum(tones[2 : highest + 1] ** 2)) / tones[1])
