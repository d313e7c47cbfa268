"""Double-precision direct evaluation of what every feed should carry; slow and independent.

Written from the formulas alone: the law's Fourier series, the filter's response at each harmonic,
the delays from distances, the carrier's phase from time. Shares no code with the renderer but the
filter taps (the signal path is defined by them) and the paths of glides.
"""

from __future__ import annotations

import numpy as np

from beamctl.engine import kernels, sharing
from beamctl.engine.panel import Panel
from beamctl.show.beamstate import BeamState
from beamctl.signal.equaliser import INTERPOLATION_DELAY


def law_series(law: str, depth: float) -> np.ndarray:
    """Fourier coefficients (4096,) of the envelope of a unit tone, by harmonic (fft order)."""
    phase = 2.0 * np.pi * np.arange(4096) / 4096
    x, h = np.cos(phase), np.sin(phase)
    envelope = {
        "dsb": 1.0 + depth * x + 0j,
        "root": np.sqrt(1.0 + depth * x) + 0j,
        "ssb": 1.0 + depth * (x + 1j * h),
        "mam": (1.0 + depth * x + 1j * (1.0 - 0.5 * (depth * x) ** 2)) / (1.0 + 1j),
    }[law]
    return np.fft.fft(0.5 * envelope) / 4096


def direct_feeds(
    panel: Panel,
    state: BeamState,
    samples: np.ndarray,
    tone_hz: float,
    start: int,
    law: str,
    depth: float,
    gain: float,
) -> np.ndarray:
    """(F, samples) float64 of one beam playing a unit tone since `start`, at absolute samples."""
    rate = panel.rate_hz
    wiring = panel.wiring
    taps = wiring.taps_re.astype(np.float64) + 1j * wiring.taps_im
    series = law_series(law, depth)
    harmonics = np.fft.fftfreq(4096, 1 / 4096).astype(int)
    keep = np.abs(series) > 1e-12
    series, harmonics = series[keep], harmonics[keep]
    k = np.arange(len(taps))
    response = np.array(
        [np.sum(taps * np.exp(-2j * np.pi * h * tone_hz * k / (rate / 2))) for h in harmonics]
    )
    late = INTERPOLATION_DELAY + sharing.LOOKAHEAD + kernels.ROW_DELAY
    carrier_hz, slowness, base_s, _ = wiring.steer
    omega = 2.0 * np.pi * carrier_hz
    out = np.zeros((panel.buffers.out.shape[0], len(samples)))
    path = np.array([state.direction_at(int(s)) for s in samples])
    focus = np.array([state.reach_per_m_at(int(s)) for s in samples])
    for n, at in enumerate(wiring.cells[:3].T):
        far = path[:, :3] @ at
        near = focus > 1e-9
        lead = far.copy()
        f = path[near, :3] / focus[near, None]
        lead[near] = np.linalg.norm(f, axis=1) - np.linalg.norm(f - at, axis=1)
        tau = base_s + lead * slowness
        t = samples / rate - tau
        envelope = np.zeros(len(samples), np.complex128)
        for c, r, h in zip(series, response, harmonics, strict=True):
            since = (samples - start - late) / rate - tau
            envelope += c * r * np.exp(2j * np.pi * h * tone_hz * since)
        out[wiring.feed[n]] += gain * np.real(envelope * np.exp(1j * omega * t))
    return out
