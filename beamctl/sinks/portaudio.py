"""PortAudio: listing devices and opening one exactly as asked. Nothing else imports sounddevice."""

from __future__ import annotations

import atexit
import os
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from beamctl.errors import ContractError, DeviceError
from beamctl.sinks.sink import SinkInfo

_JACK, _ALSA = "JACK Audio Connection Kit", "ALSA"
_WASAPI, _CORE_AUDIO = "Windows WASAPI", "Core Audio"
# These hand over the samples as they are; the other host APIs mix or resample unasked.
_DIRECT = (_JACK, _ALSA, _WASAPI, _CORE_AUDIO, "ASIO", "Windows WDM-KS")
_WHERE = {
    _JACK: "change the rate or the ports where the JACK server is started",
    _WASAPI: "change it under Sound > device properties > Advanced, and allow exclusive control",
    _CORE_AUDIO: "change it in Audio MIDI Setup",
}
_WHERE_ELSE = "change it in the interface's own control panel, or free it from another program"
_INSTALL = "apt install libportaudio2, dnf install portaudio, or pacman -S portaudio"

# Streams that PortAudio still holds, each with the memory that its callback reads.
_open: dict[Any, object] = {}


class Device(NamedTuple):
    """An output device and where PortAudio lists it now; the number is never kept."""

    number: int
    info: SinkInfo


def list_sinks() -> list[SinkInfo]:
    """Every output device that there is now. Raises DeviceError without PortAudio."""
    return [device.info for device in _devices()]


def find(name: str) -> Device:
    """The one device called `name`, or `host api: name`. Raises DeviceError for none or several."""
    devices = _devices()
    matches = [d for d in devices if name in (d.info.name, _full_name(d.info))]
    if len(matches) == 1:
        return matches[0]
    if matches:
        offered = ", ".join(repr(_full_name(device.info)) for device in matches)
        raise DeviceError(f"{len(matches)} sinks are called {name!r}", f"say which: {offered}")
    offered = ", ".join(repr(device.info.name) for device in devices) or "no device"
    raise DeviceError(f"no sink is called {name!r}", f"this computer offers {offered}")


def check(device: Device, rate_hz: int, channels: int) -> None:
    """Raise DeviceError unless the device takes exactly this, with no conversion on the way."""
    info = device.info
    if info.host_api not in _DIRECT or (info.host_api == _ALSA and "(hw:" not in info.name):
        raise DeviceError(
            f"{_full_name(info)} may mix or resample",
            "choose the device under ASIO, WASAPI, Core Audio, JACK or as an ALSA (hw:…) name",
        )
    where = _WHERE.get(info.host_api, _WHERE_ELSE)
    needed = f"{_full_name(info)}: needed {channels} channels at {rate_hz} Hz"
    if info.channels < channels:
        raise ContractError(f"{needed}, offered {info.channels} channels", where)
    library = _library()
    try:
        library.check_output_settings(**_settings(device, rate_hz, channels))
    except library.PortAudioError as error:
        offered = f"offered {info.default_rate_hz:.0f} Hz by default"
        raise ContractError(f"{needed}, {offered} ({_reason(error)})", where) from error


def open_callback(
    device: Device, rate_hz: int, channels: int, callback: int, user_data: NDArray[np.int64]
) -> Any:
    """Start a stream whose PaStreamCallback* is at the address `callback`; return the stream.

    The memory of `user_data` is held for as long as PortAudio may call. Rests on the base class
    that sounddevice offers to authors of libraries.
    """
    library = _library()
    with translated(device.info.name):
        stream = library._StreamBase(
            "output",
            callback=library._ffi.cast("PaStreamCallback*", callback),
            userdata=library._ffi.cast("void*", user_data.ctypes.data),
            latency="low",
            dither_off=True,  # dither would sound where exact zeros are promised
            **_settings(device, rate_hz, channels),
        )
        return _started(stream, user_data)


def open_blocking(device: Device, rate_hz: int, channels: int, latency_s: float) -> Any:
    """Start a stream for blocking writes, PortAudio buffering `latency_s`; return the stream.

    Raises DeviceError under JACK for other than two channels: pa_jack.c counts two, and plays what
    lies behind the samples instead of the rest (PortAudio issue #81).
    """
    if device.info.host_api == _JACK and channels != 2:
        raise DeviceError(
            f"{device.info.name} asks for no samples, and {channels} channels cannot be written",
            "start the JACK server anew, then open it again",
        )
    with translated(device.info.name):
        stream = _library().OutputStream(
            latency=latency_s, dither_off=True, **_settings(device, rate_hz, channels)
        )
        return _started(stream, None)


def close(stream: Any, limit_s: float) -> bool:
    """Stop and close a stream; True once it is. After `limit_s` leave it: it may never answer.

    Whoever asks for devices after that needs a fresh process.
    """

    def end() -> None:
        stream.abort()
        stream.close()
        _open.pop(stream)

    thread = threading.Thread(target=end, name="closing sink", daemon=True)
    thread.start()
    thread.join(limit_s)
    if thread.is_alive():
        give_up()
        return False
    return True


def give_up() -> None:
    """Leave PortAudio as it is at exit: with its device lost, ending it hangs or aborts."""
    atexit.unregister(_library()._exit_handler)


@contextmanager
def translated(name: str) -> Iterator[None]:
    """Turn what PortAudio raises about the device `name` into a DeviceError of one line."""
    try:
        yield
    except Exception as error:
        if not isinstance(error, _library().PortAudioError):
            raise
        raise DeviceError(
            f"{name}: {_reason(error)}", "check the device, then open it again"
        ) from (error)


def _library() -> Any:
    os.environ.setdefault("SD_ENABLE_ASIO", "1")  # read at import; many-channel cards need it
    try:
        import sounddevice
    except OSError as error:
        raise DeviceError("the PortAudio library is not installed", _INSTALL) from error
    return sounddevice


def _devices() -> list[Device]:
    library = _library()
    with translated("PortAudio"):
        apis = _rescan(library)
        return [
            Device(
                entry["index"],
                SinkInfo(
                    entry["name"],
                    apis[entry["hostapi"]],
                    entry["max_output_channels"],
                    entry["default_samplerate"],
                ),
            )
            for entry in library.query_devices()
            if entry["max_output_channels"] > 0
        ]


def _rescan(library: Any) -> list[str]:
    """Read the devices anew, where that harms nobody; return the names of the host APIs.

    It would end running streams, and as a client of JACK it would abort the whole process if the
    server has died meanwhile (pa_jack.c asserts that the server still answers).
    """
    if not _open and _JACK not in _host_apis(library):
        library._terminate()
        library._initialize()
    return _host_apis(library)


def _host_apis(library: Any) -> list[str]:
    return [api["name"] for api in library.query_hostapis()]


def _settings(device: Device, rate_hz: int, channels: int) -> dict[str, Any]:
    extra = None
    if device.info.host_api == _WASAPI:
        extra = _library().WasapiSettings(exclusive=True)
    elif device.info.host_api == _CORE_AUDIO:
        extra = _library().CoreAudioSettings(
            change_device_parameters=True, fail_if_conversion_required=True
        )
    return {
        "device": device.number,
        "samplerate": rate_hz,
        "channels": channels,
        "dtype": "float32",
        "extra_settings": extra,
    }


def _started(stream: Any, memory: object) -> Any:
    _open[stream] = memory
    try:
        stream.start()
    except BaseException:
        close(stream, 1.0)
        raise
    return stream


def _full_name(info: SinkInfo) -> str:
    return f"{info.host_api}: {info.name}"


def _reason(error: Exception) -> str:
    """PortAudio's text and, where there is one, the host's own, on one line."""
    parts = [str(error.args[0])]
    if len(error.args) > 2:
        parts.append(str(error.args[2][2]))
    return " ".join("; ".join(part for part in parts if part).split())
