"""The sink that plays: paces the writer by the device and notices when the device is gone."""

from __future__ import annotations

import math
import time

from beamctl.errors import DeviceError
from beamctl.sinks import portaudio
from beamctl.sinks.lines import BlockingLine, CallbackLine, Line
from beamctl.sinks.sink import Block

LOST_S = 0.4  # a device that takes nothing for so long is gone
START_S = 1.0
CLOSE_S = 1.8


class DeviceSink:
    """An open device. Silent until its ring was full once; silent whenever the ring is empty."""

    def __init__(self, name: str, rate_hz: int, channels: int, quantum: int, line: Line) -> None:
        self.name = name
        self.rate_hz = rate_hz
        self.channels = channels
        self.route = line.route
        self.latency_s = line.latency_s
        self.line = line
        self._nap_s = quantum / rate_hz / 3.0
        self._closed = False
        self._pulse = line.pulse
        self._pulse_s = time.monotonic()

    @property
    def late(self) -> int:
        """Times the device asked for more than there was."""
        return self.line.late

    def write(self, block: Block) -> None:
        """Take (n, channels) as the device makes room. Raises DeviceError when it is gone."""
        with portaudio.translated(self.name):
            rest = block
            while len(rest):
                if self._closed:
                    raise DeviceError(f"the sink {self.name} is closed", "open it again")
                room = min(self.line.room, len(rest))
                if room > 0:
                    self.line.push(rest[:room])
                    rest = rest[room:]
                else:
                    self._watch()
                    time.sleep(self._nap_s)

    def close(self) -> None:
        """Stop the device; what is still in the ring is not played."""
        if not self._closed:
            self._closed = True
            portaudio.close(self.line.stream, CLOSE_S)

    def _watch(self) -> None:
        pulse, now_s = self.line.pulse, time.monotonic()
        if pulse != self._pulse:
            self._pulse, self._pulse_s = pulse, now_s
        elif now_s - self._pulse_s > LOST_S:
            portaudio.give_up()
            raise DeviceError(
                f"{self.name} is lost: it took no sample for {LOST_S * 1000:.0f} ms",
                "check its cable, power and driver, then open it again",
            )


def open_device(name: str, rate_hz: int, channels: int, ring_ms: float, quantum: int) -> DeviceSink:
    """Open the output device of exactly this name, rate and channels, or raise DeviceError."""
    device = portaudio.find(name)
    portaudio.check(device, rate_hz, channels)
    frames = max(2 * quantum, math.ceil(ring_ms * rate_hz / 1000.0))
    line: Line | None = _callback_line(device, rate_hz, channels, frames, quantum)
    if line is None:
        line = BlockingLine(portaudio.open_blocking(device, rate_hz, channels, frames / rate_hz))
    return DeviceSink(name, rate_hz, channels, quantum, line)


def _callback_line(
    device: portaudio.Device, rate_hz: int, channels: int, frames: int, quantum: int
) -> CallbackLine | None:
    """The compiled route, proved by callbacks that arrive; None where none does."""
    from beamctl.sinks.callback import ADDRESS
    from beamctl.sinks.ring import Ring

    ring = Ring(frames, channels)
    try:
        stream = portaudio.open_callback(device, rate_hz, channels, ADDRESS, ring.memory)
    except (AttributeError, TypeError):  # a sounddevice without this way in
        return None
    deadline_s = time.monotonic() + START_S
    while ring.callbacks < 3 and time.monotonic() < deadline_s:
        time.sleep(0.005)
    if ring.callbacks < 3:
        portaudio.close(stream, CLOSE_S)
        return None
    if ring.block + quantum > frames:
        portaudio.close(stream, CLOSE_S)
        needed_ms = math.ceil((ring.block + quantum) * 1000.0 / rate_hz)
        raise DeviceError(
            f"{device.info.name} takes {ring.block} samples at once; the ring holds {frames}",
            f"set ring_ms to {needed_ms} or more, or choose a shorter period for the device",
        )
    return CallbackLine(stream, ring, rate_hz)
