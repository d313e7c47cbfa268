"""What a panel's renderer carries from step to step, and what of it never changes."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.cells import CellMap
from beamctl.acoustics.steering import base_delay_s
from beamctl.engine import kernels, sharing
from beamctl.show import glides
from beamctl.show.beamstate import LAWS
from beamctl.show.rig import PanelSpec
from beamctl.signal.equaliser import envelope_fir, interpolation_fir

SEGMENT = 256  # samples that are worked out on one set of coefficients
F32 = NDArray[np.float32]


class Buffers(NamedTuple):
    """What a panel's beams (axis 0) carry from step to step; history first, then the segment."""

    programme: F32  # (B, 2, 128) analytic programme at half rate
    half: F32  # (B, 2, 2, …) envelope at half rate, as the law makes it, even and odd positions
    quarter: F32  # (B, 2, …) band-limited and equalised, at a quarter
    full: F32  # (B, 2, …) at the full rate
    gain: F32  # (B, …) beam gain
    base: F32  # (B, 2, …) gain × envelope, LOOKAHEAD later
    rows: F32  # (B, 16, 2, …) base, each row 1/16 sample later
    peaks: NDArray[np.float64]
    held: NDArray[np.float64]
    demands: NDArray[np.float64]
    coef: NDArray[np.float64]  # (B, 9, F) parabolas of phasors and row delays
    edge: NDArray[np.float64]  # (B, 3, F) phasor and row delay at the segment's end
    known: NDArray[np.bool_]  # (B,) edge is what the aim gives at the next segment's start
    level: NDArray[np.float64]  # (B, 6) rows of glides, and so on below
    depth: NDArray[np.float64]
    reach: NDArray[np.float64]
    aim: NDArray[np.float64]
    law: NDArray[np.float64]  # (B, 4, 6)
    active: NDArray[np.bool_]  # (B,) False: silent long enough to be skipped
    stale: NDArray[np.bool_]  # (B,) coef must be made anew from `piece`
    still: NDArray[np.bool_]  # (B,) coef hold until the aim is touched
    piece: NDArray[np.int64]  # (B,) position in the segment from which coef count
    scratch: NDArray[np.float64]  # (3, N)
    line: F32  # (65,) one phase of what is brought to the full rate
    acc: F32  # (2, 256) one feed's sums
    total: F32  # (256,) summed demands, then the shared gain
    carrier: F32  # (2, 256)
    out: F32  # (F, 256) feed samples


class Wiring(NamedTuple):
    """What stays the same: filters, cells, constants."""

    taps_re: F32
    taps_im: F32
    raise_taps: F32
    row_taps: F32
    ramp: F32
    cells: NDArray[np.float64]  # (4, N) right, out, up, squared distance
    wanted: NDArray[np.float64]  # (2, N) what undoes polarity, phase and trim, times share
    feed: NDArray[np.int64]
    share: NDArray[np.float64]
    steer: tuple[float, float, float, float]
    cycles_per_sample: float
    drive: float
    release: float


def make_wiring(spec: PanelSpec, cells: CellMap, air: Air, rate_hz: int) -> Wiring:
    taps = envelope_fir(spec.carrier_hz, spec.resonance_hz, spec.q, rate_hz)
    live = ~cells.dead
    count = np.bincount(cells.feed[live], minlength=cells.feeds)
    turn = np.deg2rad(cells.phase_deg)
    trim = 10.0 ** (cells.trim_db / 20.0)
    share = np.where(live, 1.0 / np.maximum(count[cells.feed], 1), 0.0)
    wanted = share * cells.polarity * trim[cells.feed] * np.exp(-1j * turn)
    return Wiring(
        taps_re=np.ascontiguousarray(taps.real, np.float32),
        taps_im=np.ascontiguousarray(taps.imag, np.float32),
        raise_taps=np.ascontiguousarray(interpolation_fir(), np.float32),
        row_taps=kernels.row_taps(),
        ramp=np.arange(SEGMENT, dtype=np.float32),
        cells=np.ascontiguousarray(np.vstack([cells.at_m.T, np.sum(cells.at_m**2, axis=1)])),
        wanted=np.vstack([wanted.real, wanted.imag]),
        feed=np.ascontiguousarray(cells.feed, np.int64),
        share=share,
        steer=(
            spec.carrier_hz,
            1.0 / sound_speed_m_s(air),
            base_delay_s(cells.at_m),
            float(rate_hz * kernels.ROWS),
        ),
        cycles_per_sample=spec.carrier_hz / rate_hz,
        drive=spec.full_drive,
        release=float(np.exp(-sharing.CHUNK / (sharing.RELEASE_S * rate_hz))),
    )


def make_buffers(wiring: Wiring, feeds: int, rate_hz: int, beams: int) -> Buffers:
    spread = int(np.ceil(2.0 * wiring.steer[2] * rate_hz)) + 2
    chunks = sharing.SMOOTH + 2 + -(-spread // sharing.CHUNK)

    def f32(*shape: int) -> F32:
        return np.zeros(shape, np.float32)

    return Buffers(
        programme=f32(beams, 2, SEGMENT // 2),
        half=f32(beams, 2, 2, (len(wiring.taps_re) + 1) // 2 + SEGMENT // 4),
        quarter=f32(beams, 2, len(wiring.raise_taps) // 4 - 1 + SEGMENT // 4),
        full=f32(beams, 2, sharing.LOOKAHEAD + SEGMENT),
        gain=f32(beams, spread + SEGMENT),
        base=f32(beams, 2, kernels.ROW_TAPS - 1 + SEGMENT),
        rows=f32(beams, kernels.ROWS, 2, spread + SEGMENT),
        peaks=np.zeros((beams, chunks)),
        held=np.zeros((beams, sharing.SMOOTH)),
        demands=np.zeros((beams, 2)),
        coef=np.zeros((beams, 9, feeds)),
        edge=np.zeros((beams, 3, feeds)),
        known=np.zeros(beams, np.bool_),
        level=np.zeros((beams, glides.SCALAR_SIZE)),
        depth=np.zeros((beams, glides.SCALAR_SIZE)),
        reach=np.zeros((beams, glides.REACH_SIZE)),
        aim=np.zeros((beams, glides.TRAVEL_SIZE)),
        law=np.zeros((beams, len(LAWS), glides.SCALAR_SIZE)),
        active=np.zeros(beams, np.bool_),
        stale=np.ones(beams, np.bool_),
        still=np.zeros(beams, np.bool_),
        piece=np.zeros(beams, np.int64),
        scratch=np.zeros((3, wiring.cells.shape[1])),
        line=f32(SEGMENT // 4 + 1),
        acc=f32(2, SEGMENT),
        total=np.ones(SEGMENT, np.float32),
        carrier=f32(2, SEGMENT),
        out=f32(feeds, SEGMENT),
    )
