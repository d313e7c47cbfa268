"""Devices by name and nothing else, on a computer whose devices are made up."""

from __future__ import annotations

import ctypes.util
import os
import subprocess
import sys
from typing import Any

import pytest
from support.collecting import Collecting
from support.fakeaudio import RATE_HZ

from beamctl.errors import DeviceError
from beamctl.sinks import portaudio
from beamctl.sinks.open import open_sink

ADDRESS = 4711  # of a callback that nobody calls


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
