"""The sinks that play: a device through the compiled callback, or a thread that writes to it."""

from __future__ import annotations

import math
import threading
import time
from typing import Any

import numpy as np

from beamctl.errors import DeviceError
from beamctl.sinks import portaudio
from beamctl.sinks.sink import Outlet

LOOKAHEAD = 576  # frames that the outlet's last stage sees ahead in the ring
START_S = 1.0  # for the first callbacks to arrive
ENOUGH = 3  # callbacks that prove the route
WRITE_S = 0.4  # the longest that a write to a healthy device takes
CLOSE_S = 1.2


class DeviceSink:
    """An open device that asks for its samples itself, without Python."""

    route = "compiled callback"
    digest: str | None = None

    def __init__(self, name: str, rate_hz: int, outlet: Outlet, stream: Any) -> None:
        self.name = name
        self.rate_hz = rate_hz
        self.channels = outlet.channels
        self.trouble: DeviceError | None = None
        self._outlet = outlet
        self._stream = stream
        self._closed = False

    @property
    def period(self) -> int:
        """The most frames that the device asked for at once."""
        return self._outlet.block

    def close(self) -> None:
        """Stop the device; what is still in the ring is not played."""
        if not self._closed:
            self._closed = True
            self._stop()

    def abandon(self) -> None:
        """Leave a lost device as it is: whoever waits for it may wait for ever."""
        self._closed = True
        portaudio.give_up()

    def _stop(self) -> None:
        portaudio.close(self._stream, CLOSE_S)


class WritingSink(DeviceSink):
    """An open device where the compiled callback is never called: a thread pulls and writes.

    PortAudio's own buffer comes on top of the ring, and is as long.
    """

    route = "blocking writes"

    def __init__(self, name: str, rate_hz: int, outlet: Outlet, quantum: int, stream: Any) -> None:
        super().__init__(name, rate_hz, outlet, stream)
        self._quantum = quantum
        self._thread = threading.Thread(target=self._play, name="playing", daemon=True)
        self._thread.start()

    @property
    def period(self) -> int:
        """Frames a write."""
        return self._quantum

    def _stop(self) -> None:
        self._thread.join(WRITE_S)  # or PortAudio would be stopped under a write
        super()._stop()

    def _play(self) -> None:
        block = np.zeros((self._quantum, self.channels), np.float32)
        try:
            with portaudio.translated(self.name):
                while not self._closed:
                    self._outlet.pull(block, time.monotonic_ns())
                    self._stream.write(block)
        except DeviceError as error:
            if not self._closed:
                self.trouble = error


def open_device(
    name: str, rate_hz: int, outlet: Outlet, callback_address: int, quantum: int
) -> DeviceSink:
    """Open the output device of exactly this name, rate and channels, or raise DeviceError."""
    device = portaudio.find(name)
    portaudio.check(device, rate_hz, outlet.channels)
    stream = _callback_stream(device, rate_hz, outlet, callback_address)
    if stream is None:
        latency_s = outlet.frames / rate_hz
        stream = portaudio.open_blocking(device, rate_hz, outlet.channels, latency_s)
        sink: DeviceSink = WritingSink(name, rate_hz, outlet, quantum, stream)
    else:
        sink = DeviceSink(name, rate_hz, outlet, stream)
    needed = sink.period + quantum + LOOKAHEAD
    if needed > outlet.frames:
        sink.close()
        raise DeviceError(
            f"{device.info.name} takes {sink.period} samples at once; "
            f"the ring holds {outlet.frames}, and needs {needed}",
            f"set ring_ms to {math.ceil(needed * 1000.0 / rate_hz)} or more, "
            "or choose a shorter period for the device",
        )
    return sink


def _callback_stream(
    device: portaudio.Device, rate_hz: int, outlet: Outlet, callback_address: int
) -> Any:
    """A stream on the compiled route, proved by callbacks that arrive; None where none does."""
    proved = outlet.callbacks + ENOUGH
    try:
        stream = portaudio.open_callback(
            device, rate_hz, outlet.channels, callback_address, outlet.memory
        )
    except (AttributeError, TypeError):  # a sounddevice without this way in
        return None
    until_s = time.monotonic() + START_S
    while outlet.callbacks < proved and time.monotonic() < until_s:
        time.sleep(0.005)
    if outlet.callbacks >= proved:
        return stream
    if not portaudio.close(stream, CLOSE_S):  # it might still call: two would empty one ring
        raise DeviceError(
            f"{device.info.name} takes no samples and does not answer",
            "check its cable, power and driver, then open it again",
        )
    return None
