"""A process that plays the count signal into a sink until its standard input ends.

Every sample tells its frame and its channel, so a recording shows what was moved, lost or mixed.
"""

from __future__ import annotations

import itertools
import json
import sys
import threading
import time

import numpy as np
from numpy.typing import NDArray

from beamctl.errors import DeviceError
from beamctl.sinks.device import open_device

PERIOD = 1 << 17  # frames until the signal repeats
QUANTUM = 256
RATE_HZ = 192_000
STRIDE = 2654435761  # odd, so that the samples of a frame differ


def count_signal(frame: NDArray[np.int64], channels: int) -> NDArray[np.float32]:
    """The count signal, (n, channels): channel 0 counts frames, the others scramble the count."""
    count = frame % PERIOD + 1
    level = (count[:, None] * (2 * np.arange(channels) + 1) * STRIDE) % (2 * PERIOD)
    level[:, 0] = count
    return (level / (4.0 * PERIOD)).astype(np.float32)


def frame_of(samples: NDArray[np.float32]) -> NDArray[np.int64]:
    """The frame that a sample of channel 0 tells."""
    return np.rint(samples.astype(np.float64) * 4.0 * PERIOD).astype(np.int64) - 1


def main() -> None:
    """Print one line of JSON when the sink has played one period, and one at the end."""
    channels, ring_ms = int(sys.argv[1]), float(sys.argv[2])
    table = count_signal(np.arange(PERIOD), channels)
    blocks = [table[k : k + QUANTUM] for k in range(0, PERIOD, QUANTUM)]
    until_input_ends = threading.Thread(target=sys.stdin.read, daemon=True)
    until_input_ends.start()
    sink = open_device("JACK Audio Connection Kit: system", RATE_HZ, channels, ring_ms, QUANTUM)
    for block in blocks:
        sink.write(block)
    print(json.dumps({"route": sink.route, "latency_s": sink.latency_s}), flush=True)

    began_s, began_cpu_s, lost = time.monotonic(), time.process_time(), ""
    last_s = began_s
    try:
        for block in itertools.cycle(blocks):
            if not until_input_ends.is_alive():
                break
            sink.write(block)
            last_s = time.monotonic()
    except DeviceError as error:
        lost = error.what
    ended_s, cpu_s = time.monotonic(), time.process_time() - began_cpu_s
    sink.close()
    ring = sink.line.ring  # type: ignore[attr-defined]
    report = {
        "lost": lost,
        "lost_after_s": ended_s - last_s,
        "close_s": time.monotonic() - ended_s,
        "callbacks": ring.callbacks,
        "empty": sink.late,
        "longest_ms": ring.longest_s * 1e3,
        "seconds": ended_s - began_s,
        "cpu_pct": 100.0 * cpu_s / (ended_s - began_s),
    }
    print(json.dumps(report), flush=True)


if __name__ == "__main__":
    main()
