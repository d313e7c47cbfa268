"""From the name of a sink to the sink."""

from __future__ import annotations

from pathlib import Path

from beamctl.sinks.sink import Outlet, Sink

FILE = "file:"


def open_sink(name: str, rate_hz: int, outlet: Outlet, callback_address: int, quantum: int) -> Sink:
    """Open `null`, `file:PATH`, or the output device of exactly this name; it pulls at once.

    `callback_address` is a compiled PaStreamCallback that is given the outlet's memory; `quantum`
    is how many frames the ring is filled by, and how many are pulled where no device says
    otherwise. Raises DeviceError for what cannot be had exactly as asked: there is never a
    substitute.
    """
    # Imported when chosen: PortAudio is slow to load and may be missing.
    if name == "null":
        from beamctl.sinks.null import NullSink

        return NullSink(rate_hz, outlet, quantum)
    if name.startswith(FILE):
        from beamctl.sinks.recording import RecordingSink

        return RecordingSink(Path(name.removeprefix(FILE)), rate_hz, outlet, quantum)
    from beamctl.sinks.device import open_device

    return open_device(name, rate_hz, outlet, callback_address, quantum)
