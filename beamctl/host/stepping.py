"""Steady tones on chosen feeds, live: what a wiring check steps through.

An outlet and a sink of its own; a thread keeps the ring full and renews the lease, so that whatever
stalls here is silence 150 ms later. No show, player or guard runs meanwhile: the drive is fixed and
low, and the final stage holds every panel to a ceiling a little above it.
"""

from __future__ import annotations

import contextlib
import threading
import time
from collections.abc import Collection
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from beamctl.engine import layout as at
from beamctl.engine.callback import ADDRESS
from beamctl.engine.chain import ramp_n, wires_of
from beamctl.engine.outlet import Outlet, ring_frames
from beamctl.errors import BeamctlError, DeviceError
from beamctl.host.places import memory_folder, show_key
from beamctl.show.show import Show
from beamctl.sinks.open import open_sink

RING_MS = 64.0  # silence does not wait for it: the gate is behind it
LEASE_S = 0.15
CEILING = 4.0  # times the drive: two feeds sound at once, each a little raised by the ramps
LOST_S = 0.4  # a device that asks for nothing for so long is gone
SHUT_S = 0.5  # the longest wait for the gate to shut at the end


class Stepper:
    """Sounds the feeds it is told to, each with its own fixed phasor.

    phasors      (C,) re full scale, by channel from 0: the size and phase of each tone
    carriers_hz  (C,)
    """

    def __init__(
        self,
        show: Show,
        sink: str,
        phasors: NDArray[np.complex128],
        carriers_hz: NDArray[np.float64],
    ) -> None:
        """Open the sink, gate shut; DeviceError when it cannot be had."""
        rig = show.rig
        self._rate_hz, self._quantum = rig.rate_hz, rig.quantum
        self._phasors, self._carriers_hz = phasors, carriers_hz
        self._wanted: frozenset[int] = frozenset()
        self._risen = np.zeros(len(phasors))  # 0 … 1: how far each tone has come
        self._ramp_n = ramp_n(show)
        wires = wires_of(show)
        drives = [np.abs(phasors[w.first : w.first + w.feeds]).max(initial=0.0) for w in wires]
        ceilings = [CEILING * float(drive) for drive in drives]
        self._path = memory_folder() / f"{show_key(Path(show.folder))}.wirecheck"
        self._block = np.zeros((rig.quantum, len(phasors)), np.float32)
        self.trouble: BeamctlError | None = None
        self._ended = threading.Event()
        frames = ring_frames(max(RING_MS, rig.ring_ms or 0.0), rig.rate_hz, rig.quantum)
        self._prove(Outlet.create(None, frames, len(phasors), wires, self._ramp_n))
        self.outlet = Outlet.create(self._path, frames, len(phasors), wires, self._ramp_n)
        self.outlet.grant(0, ceilings)
        try:
            self._sink = open_sink(sink, rig.rate_hz, self.outlet, ADDRESS, rig.quantum)
        except BaseException:
            self._path.unlink(missing_ok=True)
            raise
        self._thread = threading.Thread(target=self._run, name="stepping", daemon=True)
        self._thread.start()

    def open(self) -> None:
        """Open the gate, by a ramp."""
        self.outlet.ask_open(self._ramp_n)

    def sound(self, channels: Collection[int]) -> None:
        """From now on these sound and no others; what changes takes a ramp."""
        self._wanted = frozenset(channels)

    def hush(self) -> None:
        """Silence, for good: from the next block on by the ramp. Any thread may ask."""
        self.outlet.hush()

    @property
    def silent(self) -> bool:
        """True while the gate lets nothing out."""
        return self.outlet.count(at.GATE) == 0 and self.outlet.gate_gain == 0.0

    def close(self) -> None:
        """Hush, let the zeros leave, and let go of the sink; a second call does nothing."""
        if self._ended.is_set():
            return
        self.hush()
        until = time.monotonic() + SHUT_S
        zeros_to: int | None = None
        while self.trouble is None and time.monotonic() < until:
            if zeros_to is None and self.silent:
                zeros_to = self.outlet.count(at.READ) + self._quantum
            if zeros_to is not None and self.outlet.count(at.READ) >= zeros_to:
                break
            time.sleep(0.001)
        self._ended.set()
        self._thread.join(SHUT_S)
        if self.trouble is None:
            self._sink.close()
        else:
            self._sink.abandon()
        self._path.unlink(missing_ok=True)
        with contextlib.suppress(OSError):  # other shows may still use it
            memory_folder().rmdir()

    # -- the thread that fills the ring ----------------------------------------------------------

    def _run(self) -> None:
        try:
            pulse = 0, time.monotonic()
            while not self._ended.is_set():
                until = self.outlet.count(at.READ) + round(LEASE_S * self._rate_hz)
                self.outlet.grant(until)
                self.outlet.host_lives(until)
                if self.outlet.room >= self._quantum:
                    self._fill(self._block, self.outlet.count(at.WRITTEN))
                    self.outlet.push(self._block)
                else:
                    pulse = self._watch(*pulse)
                    time.sleep(self._quantum / self._rate_hz / 2.0)
        except BeamctlError as error:
            self.trouble = error
        except BaseException:
            self.trouble = DeviceError("the thread that makes the tones ended", "start again")
            raise
        finally:
            self.hush()

    def _fill(self, block: NDArray[np.float32], first: int) -> None:
        """The tones of frames first … first + len(block)."""
        block[:] = 0.0
        step = np.arange(1, len(block) + 1) / self._ramp_n
        for channel in np.union1d(np.flatnonzero(self._risen), sorted(self._wanted)).astype(int):
            rise = step if channel in self._wanted else -step
            risen = np.clip(self._risen[channel] + rise, 0.0, 1.0)
            # a raised cosine in the square, so that the air makes the least of the change
            size = np.sin(0.5 * np.pi * risen)
            cycles = (
                (first + np.arange(len(block))) * (self._carriers_hz[channel] / self._rate_hz) % 1.0
            )
            tone = np.real(self._phasors[channel] * np.exp(2j * np.pi * cycles))
            block[:, channel] = size * tone
            self._risen[channel] = risen[-1]

    def _watch(self, calls: int, since_s: float) -> tuple[int, float]:
        """The newest count of callbacks and when it came; DeviceError when the sink is gone."""
        if self._sink.trouble is not None:
            raise self._sink.trouble
        now = time.monotonic()
        if self.outlet.callbacks != calls:
            return self.outlet.callbacks, now
        if now - since_s > LOST_S:
            raise DeviceError(
                f"{self._sink.name} is lost: it asked for no sample for {1000 * LOST_S:.0f} ms",
                "check its cable, power and driver, then start again",
            )
        return calls, since_s

    def _prove(self, trial: Outlet) -> None:
        """Compile what the ring needs on a throw-away one, before a device waits for it."""
        trial.push(self._block)
        trial.flow()
        trial.pull(self._block)
        self._block[:] = 0.0
