"""One panel's beams, from programme to feed samples, a segment of 256 samples at a time.

A segment starts at an absolute multiple of 256 and may be worked through in any number of steps.
Everything that is interpolated inside it is anchored to the segment, or to the sample of the record
that changed the aim, so the samples do not depend on how the steps fall.
"""

from __future__ import annotations

from collections.abc import Mapping

from beamctl.acoustics.air import Air
from beamctl.acoustics.cells import CellMap
from beamctl.engine import envelopes, kernels, sharing
from beamctl.engine.buffers import F32, SEGMENT, make_buffers, make_wiring
from beamctl.engine.compiled import compiled
from beamctl.show import glides
from beamctl.show.beamstate import BeamState
from beamctl.show.rig import PanelSpec
from beamctl.signal.equaliser import INTERPOLATION_DELAY
from beamctl.signal.laws import REST


class Panel:
    """The renderer of one panel; `states` are its beams in order, views into its arrays."""

    def __init__(self, spec: PanelSpec, cells: CellMap, air: Air, rate_hz: int, beams: int) -> None:
        self.rate_hz = rate_hz
        self.wiring = make_wiring(spec, cells, air, rate_hz)
        self.buffers = make_buffers(self.wiring, cells.feeds, rate_hz, beams)
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
