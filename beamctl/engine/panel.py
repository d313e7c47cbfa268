"""One panel's beams, from programme to feed samples, a segment of 256 samples at a time.

A segment starts at an absolute multiple of 256 and may be worked through in any number of steps.
Everything that is interpolated inside it is anchored to the segment, or to the sample of the record
that changed the aim, so the samples do not depend on how the steps fall.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.cells import CellMap
from beamctl.acoustics.steering import base_delay_s
from beamctl.engine import envelopes, kernels, sharing
from beamctl.engine.compiled import compiled
from beamctl.show import glides
from beamctl.show.beamstate import LAWS, BeamState
from beamctl.show.rig import PanelSpec
from beamctl.signal.equaliser import INTERPOLATION_DELAY, envelope_fir, interpolation_fir
from beamctl.signal.laws import REST

SEGMENT = 256
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


class Panel:
    """The renderer of one panel; `states` are its beams in order, views into its arrays."""

    def __init__(self, spec: PanelSpec, cells: CellMap, air: Air, rate_hz: int, beams: int) -> None:
        self.rate_hz = rate_hz
        self.wiring = _wiring(spec, cells, air, rate_hz)
        self.buffers = _buffers(self.wiring, cells.feeds, rate_hz, beams)
        buffers = self.buffers
        self.states = [
            BeamState(
                rate_hz,
                level=buffers.level[b],
                depth=buffers.depth[b],
                reach=buffers.reach[b],
                aim=buffers.aim[b],
                law=buffers.law[b],
            )
            for b in range(beams)
        ]
        self._quiet_n = buffers.rows.shape[3] + 2 * SEGMENT
        self._awake: set[int] = set()
        for b in range(beams):
            self._rest(b)

    @property
    def idle(self) -> bool:
        """True while no beam sounds: the feeds are exact zeros."""
        return not self._awake

    @property
    def programme_delay(self) -> int:
        """Samples from a sound's frame to the feed of a cell at the panel's centre."""
        filters = len(self.wiring.taps_re) - 1 + INTERPOLATION_DELAY
        base = round(self.wiring.steer[2] * self.rate_hz)
        return filters + sharing.LOOKAHEAD + kernels.ROW_DELAY + base

    def touch(self, beam: int, position: int) -> None:
        """The aim or reach of `beam` changed at this position of the segment."""
        self.buffers.stale[beam] = True
        self.buffers.still[beam] = False
        self.buffers.known[beam] = False
        self.buffers.piece[beam] = position

    def wake(self, beam: int) -> None:
        """The beam may sound from here on."""
        self.buffers.active[beam] = True
        self._awake.add(beam)

    def begin_segment(self, sample: int) -> None:
        """Move every history one segment on; let beams rest that have been silent long enough."""
        for b in sorted(self._awake):
            if self.states[b].silent(sample - self._quiet_n):
                self._rest(b)
        _shift(self.buffers)

    def step(self, sample: int, begin: int, end: int, sounds: Mapping[str, F32]) -> None:
        """Work out positions begin … end of the segment at `sample`; not to be asked while idle."""
        for b in self._awake:
            self._read_programme(b, self.states[b], sample, begin, end, sounds)
        advance(self.buffers, self.wiring, sample, begin, end)

    def _read_programme(
        self, b: int, state: BeamState, sample: int, begin: int, end: int, sounds: Mapping[str, F32]
    ) -> None:
        first, last = (begin + 1) // 2, (end + 1) // 2
        target = self.buffers.programme[b, :, first:last]
        target[:] = 0.0
        for voice in state.voices:
            envelopes.mix_voice(
                target,
                sounds[voice.sound],
                (voice.start + 1) // 2,
                voice.loop,
                voice.weight,
                sample // 2 + first,
                last - first,
            )

    def _rest(self, b: int) -> None:
        """Put a beam where silence leaves it, so that waking it up depends on nothing before."""
        buffers = self.buffers
        for array in (buffers.half[b, 0], buffers.half[b, 1], buffers.quarter[b], buffers.full[b]):
            array[0] = REST
            array[1] = 0.0
        for array in (buffers.programme, buffers.gain, buffers.base, buffers.rows):
            array[b] = 0.0
        for array in (buffers.peaks, buffers.held, buffers.demands):
            array[b] = 1.04 * REST
        buffers.active[b] = False
        self._awake.discard(b)
        buffers.stale[b] = True
        buffers.still[b] = False
        buffers.known[b] = False
        buffers.piece[b] = 0


def _wiring(spec: PanelSpec, cells: CellMap, air: Air, rate_hz: int) -> Wiring:
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


def _buffers(wiring: Wiring, feeds: int, rate_hz: int, beams: int) -> Buffers:
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


@compiled
def _shift(buffers):
    """Every history takes the last values of the segment just finished."""
    for b in range(buffers.active.shape[0]):
        buffers.piece[b] = 0
        buffers.stale[b] |= not buffers.still[b]
        if buffers.active[b]:
            _shift_row(buffers.gain[b], SEGMENT)
            for q in range(2):
                _shift_row(buffers.half[b, 0, q], SEGMENT // 4)
                _shift_row(buffers.half[b, 1, q], SEGMENT // 4)
                _shift_row(buffers.quarter[b, q], SEGMENT // 4)
                _shift_row(buffers.full[b, q], SEGMENT)
                _shift_row(buffers.base[b, q], SEGMENT)
                for j in range(buffers.rows.shape[1]):
                    _shift_row(buffers.rows[b, j, q], SEGMENT)


@compiled
def interleave(block, first, out, begin):
    """block[i, first + f] = out[f, begin + i]: feeds of one panel into (n, channels)."""
    for i in range(block.shape[0]):
        for f in range(out.shape[0]):
            block[i, first + f] = out[f, begin + i]


@compiled
def _shift_row(row, n):
    for i in range(row.shape[0] - n):
        row[i] = row[i + n]


@compiled
def advance(buffers, wiring, sample, begin, end):
    """All beams of a panel over positions begin … end of the segment that starts at `sample`."""
    total = buffers.total
    total[begin:end] = 0.0
    row_at = buffers.rows.shape[3] - SEGMENT
    for b in range(buffers.active.shape[0]):
        if buffers.active[b]:
            _make_base(buffers, wiring, b, sample, begin, end)
            _aim(buffers, wiring, b, sample)
            kernels.fill_rows(
                buffers.rows[b],
                buffers.base[b],
                wiring.row_taps,
                row_at + begin,
                kernels.ROW_TAPS - 1 + begin,
                end - begin,
            )
    sharing.shared_gain(total, wiring.drive, begin, end)
    kernels.fill_carrier(
        buffers.carrier, total, wiring.cycles_per_sample, sample + begin, begin, end
    )
    kernels.sum_feeds(
        buffers.out,
        buffers.acc,
        buffers.carrier,
        buffers.rows,
        buffers.coef,
        buffers.active,
        buffers.piece,
        wiring.ramp,
        row_at,
        begin,
        end,
    )


@compiled
def _aim(buffers, wiring, b, sample):
    if not buffers.stale[b]:
        return
    start = sample + buffers.piece[b]
    kernels.aim_feeds(
        buffers.coef[b],
        buffers.edge[b],
        buffers.known[b],
        wiring.cells,
        wiring.wanted,
        wiring.feed,
        wiring.share,
        buffers.scratch,
        buffers.aim[b],
        buffers.reach[b],
        float(start),
        float(SEGMENT - buffers.piece[b]),
        wiring.steer,
    )
    buffers.stale[b] = False
    buffers.known[b] = True
    buffers.still[b] = glides.travel_settled(buffers.aim[b], start) and glides.reach_settled(
        buffers.reach[b], start
    )


@compiled
def _make_base(buffers, wiring, b, sample, begin, end):
    """Programme to base of beam b, chunk by chunk, with the beam's demand on the shared gain."""
    p = begin
    while p < end:
        stop = min(end, (p // sharing.CHUNK + 1) * sharing.CHUNK)
        _make_full(buffers, wiring, b, sample, p, stop)
        late = buffers.gain.shape[1] - SEGMENT
        gain = buffers.gain[b]
        envelopes.gain_ramp(gain[late + p : late + stop], buffers.level[b], sample + p, stop - p)
        offset = p % sharing.CHUNK
        before, after = buffers.demands[b, 0], buffers.demands[b, 1]
        sharing.add_demand(buffers.total, gain[late:], gain, before, after, offset, p, stop)
        for q in range(2):
            base, full = buffers.base[b, q], buffers.full[b, q]
            for i in range(p, stop):
                base[kernels.ROW_TAPS - 1 + i] = gain[late + i] * full[i]
        if stop % sharing.CHUNK == 0:
            at = sharing.LOOKAHEAD + stop - sharing.CHUNK
            peak = envelopes.chunk_peak(buffers.full[b], at, sharing.CHUNK)
            sharing.take_peak(
                buffers.peaks[b], buffers.held[b], buffers.demands[b], peak, wiring.release
            )
        p = stop


@compiled
def _make_full(buffers, wiring, b, sample, begin, end):
    """Programme to full-rate envelope of beam b."""
    first, last = (begin + 1) // 2, (end + 1) // 2
    history = buffers.half.shape[3] - SEGMENT // 4
    envelopes.modulate(
        buffers.half[b],
        buffers.programme[b, :, first:last],
        buffers.law[b],
        buffers.depth[b],
        history,
        sample // 2 + first,
        last - first,
    )
    q_first, q_last = (begin + 3) // 4, (end + 3) // 4
    q_history = buffers.quarter.shape[2] - SEGMENT // 4
    envelopes.shape_band(
        buffers.quarter[b],
        q_history + q_first,
        q_last - q_first,
        buffers.half[b],
        history + q_first,
        wiring.taps_re,
        wiring.taps_im,
    )
    at = sharing.LOOKAHEAD
    envelopes.raise_rate(
        buffers.full[b],
        at + begin,
        end - begin,
        buffers.quarter[b],
        q_history + begin // 4,
        wiring.raise_taps,
        begin,
        buffers.line,
    )
