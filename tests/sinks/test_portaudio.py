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
from support.collecting import Collecting

from beamctl.engine import layout
from beamctl.errors import DeviceError
from beamctl.sinks import device, portaudio
from beamctl.sinks.open import open_sink

RATE_HZ = 192_000
ADDRESS = 4711  # of a callback that nobody calls
APIS = ["ALSA", "JACK Audio Connection Kit", "Windows WASAPI", "Core Audio", "MME", "ASIO"]


class PortAudioError(Exception):
    """Stands for sounddevice's own."""


class Stream:
    """A stream that never calls back, takes a write in a millisecond, and hangs when told to."""

    def __init__(self, **settings: Any) -> None:
        self.settings = settings
        self.taken: list[NDArray[np.float32]] = []
        self.error: Exception | None = None
        self.moving, self.answering = threading.Event(), threading.Event()
        self.moving.set()
        self.answering.set()

    def start(self) -> None:
        pass

    def write(self, block: NDArray[np.float32]) -> bool:
        self.taken.append(block.copy())
        self.moving.wait(20.0)
        time.sleep(0.001)
        if self.error is not None:
            raise self.error
        return False

    def abort(self) -> None:
        self.answering.wait(20.0)

    def close(self) -> None:
        pass


class CallingStream(Stream):
    """A stream whose device asks for 1024 frames every few milliseconds, until it is aborted."""

    outlet: Collecting

    def start(self) -> None:
        self._playing = threading.Event()
        self._thread = threading.Thread(target=self._call, daemon=True)
        self._thread.start()

    def abort(self) -> None:
        self._playing.set()
        self._thread.join()
        super().abort()

    def _call(self) -> None:
        block = np.zeros((1024, self.outlet.channels), np.float32)
        while not self._playing.wait(0.002):
            self.outlet.pull(block, 0)


class Library(SimpleNamespace):
    """As much of sounddevice as beamctl uses: (name, host api, channels) and two rates."""

    PortAudioError = PortAudioError
    WasapiSettings = CoreAudioSettings = dict

    def __init__(self, *entries: tuple[str, str, int]) -> None:
        self.entries = entries
        self.rescans = 0
        self.calling: type[Stream] = Stream
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
        self.streams.append(self.calling(**settings))
        return self.streams[-1]

    def OutputStream(self, **settings: Any) -> Stream:
        self.streams.append(Stream(**settings))
        return self.streams[-1]


@pytest.fixture
def given_up(monkeypatch: pytest.MonkeyPatch) -> list[Any]:
    """What was taken from the interpreter's exit."""
    taken: list[Any] = []
    monkeypatch.setattr(portaudio.atexit, "unregister", taken.append)
    return taken


@pytest.fixture
def offer(monkeypatch: pytest.MonkeyPatch) -> Any:
    """Pretend that the computer has these devices."""

    def pretend(*entries: tuple[str, str, int]) -> Library:
        library = Library(*entries)
        monkeypatch.setattr(portaudio, "_library", lambda: library)
        monkeypatch.setattr(portaudio, "_open", {})
        monkeypatch.setattr(device, "START_S", 0.1)
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
        open_sink(name, RATE_HZ, Collecting(64), ADDRESS, 256)


def test_a_mismatch_says_needed_offered_and_where(offer: Any) -> None:
    offer(("card", "ASIO", 8))
    with pytest.raises(DeviceError, match="needed 9 channels at 192000 Hz, offered 8") as caught:
        open_sink("card", RATE_HZ, Collecting(9), ADDRESS, 256)
    assert "control panel" in caught.value.do
    with pytest.raises(DeviceError, match="at 96000 Hz, offered 48000 Hz") as caught:
        open_sink("card", 96_000, Collecting(8), ADDRESS, 256)
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
    open_sink("card", RATE_HZ, Collecting(4), ADDRESS, 256).close()
    assert len(library.streams) == 2  # by callback, then by writes
    for stream in library.streams:
        assert stream.settings["extra_settings"] == flags
        assert (stream.settings["channels"], stream.settings["samplerate"]) == (4, RATE_HZ)
        assert stream.settings["dither_off"]


def calling(library: Library, outlet: Collecting) -> Library:
    """Have the library's streams call back for samples of the outlet."""
    library.calling = type("Calling", (CallingStream,), {"outlet": outlet})
    return library


def test_callbacks_that_arrive_prove_the_route(offer: Any) -> None:
    outlet = Collecting(2)
    library = calling(offer(("card", "ASIO", 2)), outlet)
    sink = open_sink("card", RATE_HZ, outlet, ADDRESS, 256)
    (stream,) = library.streams
    assert stream.settings["callback"] == ADDRESS
    assert stream.settings["userdata"] == outlet.memory.ctypes.data
    assert portaudio._open == {stream: outlet.memory}  # held for as long as it may be called
    assert (sink.route, sink.period, sink.trouble, sink.digest) == (
        "compiled callback",
        1024,
        None,
        None,
    )
    sink.close()
    sink.close()
    assert not portaudio._open
    asked = outlet.callbacks
    time.sleep(0.02)
    assert outlet.callbacks == asked


@pytest.mark.parametrize(("frames", "fits"), [(1855, False), (1856, True)])
def test_a_ring_too_short_for_the_device_is_refused(offer: Any, frames: int, fits: bool) -> None:
    outlet = Collecting(2, frames)
    calling(offer(("card", "ASIO", 2)), outlet)
    if fits:
        open_sink("card", RATE_HZ, outlet, ADDRESS, 256).close()
    else:
        with pytest.raises(DeviceError, match="takes 1024 samples at once; the ring h") as caught:
            open_sink("card", RATE_HZ, outlet, ADDRESS, 256)
        assert "ring_ms to 10 or more" in caught.value.do  # 1856 frames are 9.67 ms
    assert not portaudio._open


def test_the_ring_is_measured_against_what_the_final_stage_sees_ahead() -> None:
    assert device.LOOKAHEAD == layout.LOOKAHEAD


def test_without_callbacks_a_thread_writes_and_the_sink_says_so(offer: Any) -> None:
    library, outlet = offer(("card", "ASIO", 2)), Collecting(2)
    sink = open_sink("card", RATE_HZ, outlet, ADDRESS, 256)
    assert (sink.route, sink.period, sink.digest) == ("blocking writes", 256, None)
    _unused, stream = library.streams
    assert list(portaudio._open) == [stream]
    assert stream.settings["latency"] == pytest.approx(4096 / RATE_HZ)
    wait_for(lambda: len(stream.taken) >= 20, "some writes")
    sink.close()
    sink.close()
    assert sink.trouble is None
    assert not portaudio._open
    np.testing.assert_array_equal(np.concatenate(stream.taken), outlet.everything)
    written = len(stream.taken)
    time.sleep(0.02)
    assert len(stream.taken) == written


@pytest.mark.parametrize(("channels", "written"), [(1, False), (2, True), (64, False)])
def test_under_jack_only_two_channels_can_be_written(
    offer: Any, channels: int, written: bool
) -> None:
    library = offer(("system", "JACK Audio Connection Kit", 64))
    if written:
        sink = open_sink("system", RATE_HZ, Collecting(channels), ADDRESS, 256)
        assert sink.route == "blocking writes"
        sink.close()
    else:
        with pytest.raises(DeviceError, match=f"{channels} channels cannot be written"):
            open_sink("system", RATE_HZ, Collecting(channels), ADDRESS, 256)
    assert len(library.streams) == 1 + written
    assert not portaudio._open


def test_a_sounddevice_without_callbacks_by_address_is_written_to(offer: Any) -> None:
    library, outlet = offer(("card", "ASIO", 2)), Collecting(2)

    def refuse(**settings: Any) -> Stream:
        raise TypeError("unexpected keyword")

    library.calling = refuse
    sink = open_sink("card", RATE_HZ, outlet, ADDRESS, 256)
    assert sink.route == "blocking writes"
    sink.close()


def test_no_second_route_while_the_first_may_still_call(
    offer: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    library = offer(("card", "ASIO", 2))
    monkeypatch.setattr(device, "CLOSE_S", 0.1)

    class Silent(Stream):
        def start(self) -> None:
            self.answering.clear()

    library.calling = Silent
    with pytest.raises(DeviceError, match="card takes no samples and does not answer"):
        open_sink("card", RATE_HZ, Collecting(2), ADDRESS, 256)
    (stream,) = library.streams
    stream.answering.set()
    wait_for(lambda: not portaudio._open, "the device to answer after all")


@pytest.mark.parametrize("stuck", ["answering", "moving"])
def test_closing_gives_up_on_a_device_that_never_answers(
    offer: Any, given_up: list[Any], stuck: str
) -> None:
    library = offer(("card", "ASIO", 2))
    sink = open_sink("card", RATE_HZ, Collecting(2), ADDRESS, 256)
    stream = library.streams[-1]
    stream.answering.clear()
    getattr(stream, stuck).clear()  # and perhaps a write that never returns
    time.sleep(0.01)
    began_s = time.monotonic()
    sink.close()
    assert 1.0 < time.monotonic() - began_s < 2.0
    assert given_up == [library._exit_handler]
    assert stream in portaudio._open  # still held, so no rescan
    stream.moving.set()
    stream.answering.set()
    wait_for(lambda: not portaudio._open, "the device to answer after all")


@pytest.mark.parametrize("route", ["compiled callback", "blocking writes"])
def test_an_abandoned_device_is_left_at_once(offer: Any, given_up: list[Any], route: str) -> None:
    library, outlet = offer(("card", "ASIO", 2)), Collecting(2)
    if route == "compiled callback":
        calling(library, outlet)
    sink = open_sink("card", RATE_HZ, outlet, ADDRESS, 256)
    assert sink.route == route
    stream = library.streams[-1]
    stream.answering.clear()
    stream.moving.clear()
    began_s = time.monotonic()
    sink.abandon()
    sink.close()
    assert time.monotonic() - began_s < 0.1
    assert given_up == [library._exit_handler]
    assert stream in portaudio._open  # its memory outlives it
    stream.answering.set()
    stream.moving.set()
    portaudio.close(stream, 1.0)


def test_what_portaudio_raises_while_playing_is_the_sinks_trouble(offer: Any) -> None:
    library, outlet = offer(("card", "ASIO", 2)), Collecting(2)
    sink = open_sink("card", RATE_HZ, outlet, ADDRESS, 256)
    library.streams[-1].error = PortAudioError("Device unavailable", -9985)
    wait_for(lambda: sink.trouble is not None, "the trouble")
    assert sink.trouble is not None
    assert sink.trouble.what == "card: Device unavailable"
    pulled = outlet.callbacks
    time.sleep(0.02)
    assert outlet.callbacks == pulled
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


def test_null_loads_no_audio_library_and_no_sink_loads_the_engine() -> None:
    program = (
        "import sys; from beamctl.sinks import device, open, recording, sink\n"
        "class Outlet: channels = 2; pull = lambda *asked: None\n"
        "open.open_sink('null', 48000, Outlet(), 0, 256).close()\n"
        "print(*{'sounddevice', 'numba', 'beamctl.engine'} & set(sys.modules))"
    )
    done = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True
    )
    assert done.stdout == "\n"
