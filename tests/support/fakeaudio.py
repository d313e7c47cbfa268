"""A PortAudio that misbehaves on command, and the devices that it pretends to have."""

from __future__ import annotations

import threading
import time
from types import SimpleNamespace
from typing import Any

import numpy as np
from numpy.typing import NDArray
from support.collecting import Collecting

RATE_HZ = 192_000
APIS = ["ALSA", "JACK Audio Connection Kit", "Windows WASAPI", "Core Audio", "MME", "ASIO"]


class PortAudioError(Exception):
    """Stands for sounddevice's own."""


class Stream:
    """A stream that never calls back, takes a write in a millisecond, and hangs when told to."""

    def __init__(self, **settings: Any) -> None:
        self.settings = settings
        self.taken: list[NDArray[np.float32]] = []
        self.error: Exception | None = None
        self.writing = self.torn = False
        self.moving, self.answering = threading.Event(), threading.Event()
        self.moving.set()
        self.answering.set()

    def start(self) -> None:
        pass

    def write(self, block: NDArray[np.float32]) -> bool:
        self.taken.append(block.copy())
        self.writing = True
        self.moving.wait(20.0)
        time.sleep(0.001)
        self.writing = False
        if self.error is not None:
            raise self.error
        return False

    def abort(self) -> None:
        self.torn = self.writing
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


def calling(library: Library, outlet: Collecting) -> Library:
    """Have the library's streams call back for samples of the outlet."""
    library.calling = type("Calling", (CallingStream,), {"outlet": outlet})
    return library
