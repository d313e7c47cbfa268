"""What left the output: kept by the recording sink, or captured at the ports of JACK."""

from __future__ import annotations

import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import NamedTuple, TypeVar

import numpy as np
import pytest
import soundfile
from jackserver import SINK, JackServer, capture_ports, ports
from support.running import Samples, wait_for
from support.smallshow import RATE_HZ

FEEDS = 8
MS = RATE_HZ // 1000  # frames
AUDIBLE = 0.001  # re full scale
CAPTURE_S = 2.0
LEAD_S = 0.15  # of the cue before a blow, by which a capture finds its place
STEP = 2.0**-31  # of what the recorder of ports keeps


class Heard(NamedTuple):
    """Frames that left, (n, feeds), and the number of the first."""

    first: int
    samples: Samples

    @property
    def end(self) -> int:
        """Number of the frame after the last."""
        return self.first + len(self.samples)

    def between(self, begin: int, end: int) -> Samples:
        """Frames `begin` up to `end` by their numbers, as far as they were heard."""
        return self.samples[max(0, begin - self.first) : max(0, end - self.first)]

    def silent_from(self) -> int:
        """Number of the frame after the last that was not exactly zero."""
        sounding = np.flatnonzero(self.samples.any(axis=1))
        return self.first + (int(sounding[-1]) + 1 if len(sounding) else 0)

    def sounds_before(self, frame: int) -> None:
        """Assert that each of the ten milliseconds before `frame` sounds."""
        last = self.between(frame - 10 * MS, frame)
        assert len(last) == 10 * MS
        assert np.abs(last).reshape(10, -1).max(axis=1).min() > AUDIBLE

    def ms_to_zero(self, frame: int, until: int | None = None) -> float:
        """From `frame` to the end of the last one, before `until`, that was not exactly zero."""
        after = Heard(frame, self.between(frame, self.end if until is None else until))
        return (after.silent_from() - frame) / MS


Deed = TypeVar("Deed")
Caught = Callable[[Heard], Heard]  # what left, placed by what is expected


class RecordingEar:
    """The recording sink: all that left, sample by sample, also of an engine that was killed."""

    name = "recording"
    hears = True
    tolerance = 0.0
    env: dict[str, str] | None = None

    def __init__(self, folder: Path) -> None:
        self._folder = folder
        self._hosts = 0

    def new_sink(self) -> str:
        """Sink of the next host."""
        self._hosts += 1
        (self._folder / f"{self._hosts}").mkdir()
        return f"file:{self._take(0)}"

    def listen(self, deed: Callable[[], Deed], engine: int = 0) -> tuple[Deed, Caught]:
        """Do it; all that the host's engine of this number sends is kept anyway."""
        path = self._take(engine)
        return deed(), lambda expected: Heard(expected.first, recorded(path))

    def _take(self, engine: int) -> Path:
        name = "take.wav" if engine == 0 else f"take.{engine + 1}.wav"
        return self._folder / f"{self._hosts}" / name


class PortEar:
    """JACK: what its ports carried for two seconds around each deed, heard by another client."""

    name = "JACK"
    hears = True
    tolerance = STEP

    def __init__(self, server: JackServer) -> None:
        self._server = server
        self.env: dict[str, str] | None = server.env

    def new_sink(self) -> str:
        """Sink of the next host."""
        return SINK

    def listen(self, deed: Callable[[], Deed], engine: int = 0) -> tuple[Deed, Caught]:
        """Do it between beginning and end of a capture."""
        del engine  # only the last one has ports
        before = set(ports(self._server))
        outputs = [port for port in ports(self._server) if port.startswith("PortAudio")]
        assert len(outputs) == FEEDS, outputs
        with ThreadPoolExecutor(1) as pool:
            capture = pool.submit(capture_ports, self._server, outputs, CAPTURE_S)
            wait_for(lambda: len(set(ports(self._server)) - before) >= FEEDS, "the recorder")
            time.sleep(LEAD_S)
            done = deed()
        caught = capture.result()
        return done, lambda expected: placed(caught, expected)


class DeafEar(PortEar):
    """JACK unheard: a server that waits for nobody would let a recorder miss some."""

    hears = False

    def listen(self, deed: Callable[[], Deed], engine: int = 0) -> tuple[Deed, Caught]:
        """Do it."""
        del engine
        return deed(), lambda _: pytest.fail("nothing was captured")


def placed(caught: Samples, expected: Heard) -> Heard:
    """Number the frames of a capture by finding one of the first that sound among the expected."""
    sounding = np.flatnonzero(np.abs(caught).max(axis=1) > AUDIBLE)
    assert len(sounding), "silence was captured"
    k = int(sounding[len(sounding) // 20])
    found = np.flatnonzero(np.abs(expected.samples - caught[k]).max(axis=1) <= STEP)
    assert len(found) == 1, f"a frame that was captured is expected {len(found)} times"
    return Heard(expected.first + int(found[0]) - k, caught)


def recorded(path: Path) -> Samples:
    """Samples of a recording; of one whose writer was killed, as many as are there."""
    if not path.exists():
        return _unfinished(Path(f"{path}.part"))
    samples, rate_hz = soundfile.read(path, dtype="float32", always_2d=True)
    assert rate_hz == RATE_HZ
    return np.asarray(samples)


def _unfinished(part: Path) -> Samples:
    """Whole frames after a header that does not know their number yet."""
    raw = part.read_bytes()
    place = 12
    while (name := raw[place : place + 4]) != b"data":
        assert name, "no samples"
        place += 8 + int.from_bytes(raw[place + 4 : place + 8], "little")
    body = raw[place + 8 :]
    count = len(body) // (4 * FEEDS) * FEEDS
    return np.frombuffer(body, "<f4", count).reshape(-1, FEEDS)
