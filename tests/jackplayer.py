"""A process that plays the count signal through the outlet into JACK until its input ends.

Every sample tells its frame and its channel, so a recording shows what was moved, lost or mixed.
Called with `deaf`, it offers the device a callback that asks for nothing.
"""

from __future__ import annotations

import ctypes
import itertools
import json
import sys
import threading
import time

import numpy as np
from jackserver import SINK
from numpy.typing import NDArray

from beamctl.engine import layout as at
from beamctl.engine.callback import ADDRESS
from beamctl.engine.outlet import Outlet, Wire, ring_frames
from beamctl.sinks.open import open_sink

PERIOD = 1 << 17  # frames until the signal repeats
QUANTUM = 256
RATE_HZ = 192_000
STRIDE = 2654435761  # odd, so that the samples of a frame differ
LOST_S = 0.4  # without a callback
FOREVER = 1 << 62


@ctypes.CFUNCTYPE(ctypes.c_int, *[ctypes.c_void_p] * 2, ctypes.c_ulong, *[ctypes.c_void_p] * 3)
def deaf(*_asked: object) -> int:
    """A callback that leaves the outlet alone."""
    return 0


def count_signal(frame: NDArray[np.int64], channels: int) -> NDArray[np.float32]:
    """The count signal, (n, channels): channel 0 counts frames, the others scramble the count."""
    count = frame % PERIOD + 1
    level = (count[:, None] * (2 * np.arange(channels) + 1) * STRIDE) % (2 * PERIOD)
    level[:, 0] = count
    return (level / (4.0 * PERIOD)).astype(np.float32)


def frame_of(samples: NDArray[np.float32]) -> NDArray[np.int64]:
    """The frame that a sample of channel 0 tells."""
    return np.rint(samples.astype(np.float64) * 4.0 * PERIOD).astype(np.int64) - 1


def open_gate(frames: int, channels: int) -> Outlet:
    """An outlet that lets everything through, by a ramp of one frame: a frame is whole or zero."""
    outlet = Outlet.create(None, frames, channels, [Wire(0, channels, 1.0)], ramp_n=1)
    outlet.grant(FOREVER, [1e6])
    outlet.host_lives(1 << 62)
    outlet.ask_open(1)
    return outlet


class Player:
    """Fills the outlet as it makes room, and watches the callbacks, as the engine does."""

    def __init__(self, outlet: Outlet, channels: int) -> None:
        self.outlet = outlet
        table = count_signal(np.arange(PERIOD), channels)
        self._blocks = itertools.cycle(table[k : k + QUANTUM] for k in range(0, PERIOD, QUANTUM))
        self.fill()  # warms the compiled code too

    def fill(self) -> None:
        """Push as much as there is room for."""
        while self.outlet.room >= QUANTUM:
            self.outlet.push(next(self._blocks))

    def play(self, going: threading.Thread) -> bool:
        """Play while `going` lives; True when the device was lost meanwhile."""
        callbacks, called_s = self.outlet.callbacks, time.monotonic()
        while going.is_alive():
            self.fill()
            if self.outlet.callbacks != callbacks:
                callbacks, called_s = self.outlet.callbacks, time.monotonic()
            elif time.monotonic() - called_s > LOST_S:
                return True
            time.sleep(QUANTUM / RATE_HZ / 3.0)
        return False


def main() -> None:
    """Print one line of JSON when the sink is open, and one at the end."""
    channels, ring_ms = int(sys.argv[1]), float(sys.argv[2])
    route = deaf if "deaf" in sys.argv else None
    address = ctypes.cast(route, ctypes.c_void_p).value if route else ADDRESS
    until_input_ends = threading.Thread(target=sys.stdin.read, daemon=True)
    until_input_ends.start()
    outlet = open_gate(ring_frames(ring_ms, RATE_HZ, QUANTUM), channels)
    player = Player(outlet, channels)
    sink = open_sink(SINK, RATE_HZ, outlet, address or 0, QUANTUM)
    print(json.dumps({"route": sink.route, "period": sink.period}), flush=True)

    began_s, began_cpu_s, asked = time.monotonic(), time.process_time(), outlet.callbacks
    lost = player.play(until_input_ends)
    ended_s, cpu_s = time.monotonic(), time.process_time() - began_cpu_s
    if lost:
        sink.abandon()
    sink.close()
    report = {
        "lost": lost,
        "close_s": time.monotonic() - ended_s,
        "trouble": str(sink.trouble or ""),
        "callbacks": outlet.callbacks - asked,
        "empty": outlet.count(at.EMPTY),
        "faults": outlet.count(at.FAULTS) + outlet.count(at.CLIPS),
        "longest_ms": outlet.count(at.LONGEST_NS) * 1e-6,
        "seconds": ended_s - began_s,
        "cpu_pct": 100.0 * cpu_s / (ended_s - began_s),
    }
    print(json.dumps(report), flush=True)


if __name__ == "__main__":
    main()
