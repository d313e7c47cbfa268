"""From the name of a sink to the sink."""

from __future__ import annotations

from pathlib import Path

from beamctl.sinks.sink import Sink

FILE = "file:"


def open_sink(name: str, rate_hz: int, channels: int, ring_ms: float, quantum: int) -> Sink:
    """Open `null`, `file:PATH`, or the output device of exactly this name.

    The writer runs `ring_ms` ahead; `quantum` is how many samples it writes at a time. Raises
    DeviceError for what cannot be had exactly as asked: there is never a substitute.
    """
    # Imported when chosen: numba and PortAudio are slow to load and may be missing.
    if name == "null":
        from beamctl.sinks.null import NullSink

        return NullSink(rate_hz, channels, ring_ms)
    if name.startswith(FILE):
        from beamctl.sinks.recording import RecordingSink

        path = Path(name.removeprefix(FILE))
        return RecordingSink(path, rate_hz, channels, ring_ms, quantum)
    from beamctl.sinks.device import open_device

    return open_device(name, rate_hz, channels, ring_ms, quantum)
