"""Devices that play: which route their samples take, and how they are let go."""

from __future__ import annotations

import time
from typing import Any

import numpy as np
import pytest
from support.collecting import Collecting
from support.fakeaudio import RATE_HZ, PortAudioError, Stream, calling
from support.running import wait_for

from beamctl.engine import layout
from beamctl.errors import DeviceError
from beamctl.sinks import device, portaudio
from beamctl.sinks.open import open_sink

ADDRESS = 4711  # of a callback that nobody calls


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
    assert not stream.torn  # never stopped under a write
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
