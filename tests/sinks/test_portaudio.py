"""Devices by name and nothing else, with PortAudio replaced by one that misbehaves on command."""

from __future__ import annotations

import ctypes.util
import os
import subprocess
import sys
import threading
import time
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest
from jackserver import wait_for
from numpy.typing import NDArray

from beamctl.errors import DeviceError
from beamctl.sinks import device, portaudio
from beamctl.sinks.open import open_sink

RATE_HZ = 192_000
APIS = ["ALSA", "JACK Audio Connection Kit", "Windows WASAPI", "Core Audio", "MME", "ASIO"]


class PortAudioError(Exception):
    """Stands for sounddevice's own."""


class Stream:
    """A stream that takes what it has room for, and may hang when it is closed."""

    latency = 0.01

    def __init__(self, **settings: Any) -> None:
        self.settings = settings
        self.room = 0
        self.taken: list[NDArray[np.float32]] = []
        self.underflow = False
        self.hang = threading.Event()
        self.hang.set()

    def start(self) -> None:
        self.room = 100

    @property
    def write_available(self) -> int:
        return self.room

    def write(self, block: NDArray[np.float32]) -> bool:
        self.taken.append(block.copy())
        return self.underflow

    def abort(self) -> None:
        self.hang.wait()

    def close(self) -> None:
        pass


class Library(SimpleNamespace):
    """As much of sounddevice as beamctl uses: (name, host api, channels) and two rates."""

    PortAudioError = PortAudioError
    WasapiSettings = CoreAudioSettings = dict

    def __init__(self, *entries: tuple[str, str, int]) -> None:
        self.entries = entries
        self.rescans = 0
        self.streams: list[Stream] = []
        self._ffi = SimpleNamespace(cast=lambda kind, value: value)

    def query_hostapis(self) -> list[dict[str, str]]:
        return [{"name": api} for api in APIS if api in {entry[1] for entry in self.entries}]

    def query_devices(self) -> list[dict[str, Any]]:
        apis = [api["name"] for api in self.query_hostapis()]
        return [
            {
                "index": index,
                "name": name,
                "hostapi": apis.index(api),
                "max_output_channels": channels,
                "default_samplerate": 48_000.0,
            }
            for index, (name, api, channels) in enumerate(self.entries)
        ]

    def check_output_settings(self, **settings: Any) -> None:
        if settings["samplerate"] != RATE_HZ:
            raise PortAudioError("Invalid sample rate", -9997, (0, -22, "the host\nsays no"))

    def _initialize(self) -> None:
        self.rescans += 1

    def _terminate(self) -> None:
        pass

    def _exit_handler(self) -> None:
        pass

    def _StreamBase(self, kind: str, **settings: Any) -> Stream:
        return self.OutputStream(**settings)

    def OutputStream(self, **settings: Any) -> Stream:
        self.streams.append(Stream(**settings))
        return self.streams[-1]


@pytest.fixture
def offer(monkeypatch: pytest.MonkeyPatch) -> Any:
    """Pretend that the computer has these devices."""

    def pretend(*entries: tuple[str, str, int]) -> Library:
        library = Library(*entries)
        monkeypatch.setattr(portaudio, "_library", lambda: library)
        monkeypatch.setattr(portaudio, "_open", {})
        monkeypatch.setattr(device, "START_S", 0.02)
        return library

    return pretend


def test_only_outputs_are_listed_and_read_anew_each_time(offer: Any) -> None:
    library = offer(("card (hw:0,0)", "ALSA", 64), ("microphone (hw:1,0)", "ALSA", 0))
    (info,) = portaudio.list_sinks()
    assert (info.name, info.host_api, info.channels) == ("card (hw:0,0)", "ALSA", 64)
    library.entries = (("other (hw:0,0)", "ALSA", 2),)
    (info,) = portaudio.list_sinks()
    assert info.name == "other (hw:0,0)"
    assert library.rescans == 2


def test_no_rescan_under_jack_or_a_running_stream(
    offer: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    library = offer(("system", "JACK Audio Connection Kit", 64))
    portaudio.list_sinks()
    assert library.rescans == 0
    library = offer(("card (hw:0,0)", "ALSA", 64))
    monkeypatch.setattr(portaudio, "_open", {"a stream": None})
    portaudio.list_sinks()
    assert library.rescans == 0


def test_a_name_is_whole_or_refused(offer: Any) -> None:
    offer(("card", "ASIO", 64), ("card", "Core Audio", 64), ("card 2", "ASIO", 8))
    assert portaudio.find("card 2").number == 2
    assert portaudio.find("Core Audio: card").number == 1
    with pytest.raises(DeviceError, match="2 sinks are called 'card'") as caught:
        portaudio.find("card")
    assert "'ASIO: card', 'Core Audio: card'" in caught.value.do
    for name in ("car", "Card", "0", ""):
        with pytest.raises(DeviceError, match="no sink is called"):
            portaudio.find(name)


@pytest.mark.parametrize(
    ("name", "api"), [("card", "MME"), ("default", "ALSA"), ("plughw:0", "ALSA")]
)
def test_what_may_resample_is_refused(offer: Any, name: str, api: str) -> None:
    offer((name, api, 64))
    with pytest.raises(DeviceError, match="may mix or resample"):
        open_sink(name, RATE_HZ, 64, 12.0, 256)


def test_a_mismatch_says_needed_offered_and_where(offer: Any) -> None:
    offer(("card", "ASIO", 8))
    with pytest.raises(DeviceError, match="needed 9 channels at 192000 Hz, offered 8") as caught:
        open_sink("card", RATE_HZ, 9, 12.0, 256)
    assert "control panel" in caught.value.do
    with pytest.raises(DeviceError, match="at 96000 Hz, offered 48000 Hz") as caught:
        open_sink("card", 96_000, 8, 12.0, 256)
    assert "(Invalid sample rate; the host says no)" in caught.value.what
    assert "\n" not in caught.value.what


@pytest.mark.parametrize(
    ("api", "flags"),
    [
        ("Windows WASAPI", {"exclusive": True}),
        ("Core Audio", {"change_device_parameters": True, "fail_if_conversion_required": True}),
        ("ASIO", None),
    ],
)
def test_direct_access_is_asked_for(offer: Any, api: str, flags: dict[str, bool] | None) -> None:
    library = offer(("card", api, 4))
    open_sink("card", RATE_HZ, 4, 12.0, 256).close()
    for stream in library.streams:
        assert stream.settings["extra_settings"] == flags
        assert (stream.settings["channels"], stream.settings["samplerate"]) == (4, RATE_HZ)
        assert stream.settings["dither_off"]


def test_without_callbacks_the_writes_block_and_the_sink_says_so(offer: Any) -> None:
    library = offer(("card", "ASIO", 2))
    sink = open_sink("card", RATE_HZ, 2, 12.0, 256)
    assert sink.route == "blocking writes"
    unused, stream = library.streams
    assert list(portaudio._open) == [stream]
    assert unused.settings["callback"]

    block = np.arange(512, dtype=np.float32).reshape(256, 2)
    sink.write(block)
    assert max(len(piece) for piece in stream.taken) == 100  # never more than there was room for
    np.testing.assert_array_equal(np.concatenate(stream.taken), block)
    assert sink.late == 0
    stream.underflow = True
    sink.write(block[:50])
    assert sink.late == 1
    sink.close()
    sink.close()
    assert not portaudio._open
    with pytest.raises(DeviceError, match="is closed"):
        sink.write(block)


def test_a_device_that_takes_nothing_is_lost_and_one_that_is_slow_is_not(offer: Any) -> None:
    library = offer(("card", "ASIO", 2))
    sink = open_sink("card", RATE_HZ, 2, 12.0, 256)
    stream = library.streams[-1]
    stream.room = 0
    block = np.zeros((256, 2), np.float32)
    waker = threading.Timer(0.2, lambda: setattr(stream, "room", 256))
    waker.start()
    sink.write(block)
    stream.room = 0
    began_s = time.monotonic()
    with pytest.raises(DeviceError, match="card is lost"):
        sink.write(block)
    assert 0.35 <= time.monotonic() - began_s < 1.5
    waker.join()
    sink.close()


def test_closing_gives_up_on_a_device_that_never_answers(offer: Any) -> None:
    library = offer(("card", "ASIO", 2))
    sink = open_sink("card", RATE_HZ, 2, 12.0, 256)
    stream = library.streams[-1]
    stream.hang.clear()
    began_s = time.monotonic()
    sink.close()
    assert 1.5 < time.monotonic() - began_s < 2.5
    assert stream in portaudio._open  # still held, so no rescan
    stream.hang.set()
    wait_for(lambda: not portaudio._open, "the device to answer after all")


def test_what_portaudio_raises_while_playing_becomes_one_line(
    offer: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    offer(("card", "ASIO", 2))
    sink = open_sink("card", RATE_HZ, 2, 12.0, 256)

    def gone(self: Stream, block: NDArray[np.float32]) -> bool:
        raise PortAudioError("Device unavailable", -9985)

    monkeypatch.setattr(Stream, "write", gone)
    with pytest.raises(DeviceError, match="card: Device unavailable") as caught:
        sink.write(np.zeros((10, 2), np.float32))
    assert "\n" not in caught.value.what
    sink.close()


def test_without_the_library_the_error_names_its_package(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delitem(sys.modules, "sounddevice", raising=False)
    monkeypatch.setattr(ctypes.util, "find_library", lambda name: None)
    monkeypatch.setattr("platform.system", lambda: "Linux")
    monkeypatch.delenv("SD_ENABLE_ASIO", raising=False)
    with pytest.raises(DeviceError, match="PortAudio library is not installed") as caught:
        portaudio.list_sinks()
    assert "libportaudio2" in caught.value.do
    assert os.environ["SD_ENABLE_ASIO"] == "1"  # set before the import


def test_null_and_file_load_no_audio_library() -> None:
    program = (
        "import sys; from beamctl.sinks.open import open_sink; "
        "open_sink('null', 48000, 2, 12.0, 256); print('sounddevice' in sys.modules)"
    )
    done = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True
    )
    assert done.stdout == "False\n"
