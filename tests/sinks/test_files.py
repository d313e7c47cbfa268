"""Samples into files: bit for bit, and under the asked name only when complete."""

from __future__ import annotations

import hashlib
import threading
import time
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
import soundfile
from jackplayer import Player, count_signal, open_gate
from numpy.typing import NDArray
from support.collecting import Collecting
from support.running import wait_for

from beamctl.errors import DeviceError
from beamctl.sinks import recording
from beamctl.sinks.open import open_sink
from beamctl.sinks.recording import RecordingSink
from beamctl.sinks.rf64 import Rf64Writer

RATE_HZ = 192_000


def noise(frames: int, channels: int) -> NDArray[np.float32]:
    """Any floats at all, full scale and beyond, subnormal and negative zero included."""
    rng = np.random.default_rng(7)
    samples = rng.normal(size=(frames, channels)).astype(np.float32)
    samples[0, :4] = (-0.0, 1e-45, 1.0, -1.0)
    return samples


@pytest.fixture
def small_disk() -> Iterator[None]:
    """A disk that is full after 300 kB, for this process."""
    resource = pytest.importorskip("resource")
    before = resource.getrlimit(resource.RLIMIT_FSIZE)
    resource.setrlimit(resource.RLIMIT_FSIZE, (300_000, before[1]))
    yield
    resource.setrlimit(resource.RLIMIT_FSIZE, before)


def test_80_feeds_come_back_bit_for_bit(tmp_path: Path) -> None:
    path = tmp_path / "out.wav"
    samples = noise(5000, 80)
    writer = Rf64Writer(path, RATE_HZ, 80)
    for start in range(0, 5000, 256):
        writer.write(samples[start : start + 256])
    assert not path.exists()
    writer.close()
    writer.close()
    assert [p.name for p in tmp_path.iterdir()] == ["out.wav"]

    back, rate_hz = soundfile.read(path, dtype="float32", always_2d=True)
    assert rate_hz == RATE_HZ
    np.testing.assert_array_equal(back.view(np.uint32), samples.view(np.uint32))


def test_the_header_is_rf64_with_its_sizes_in_ds64(tmp_path: Path) -> None:
    path = tmp_path / "out.wav"
    writer = Rf64Writer(path, RATE_HZ, 80)
    writer.write(noise(1000, 80))
    writer.close()
    head = path.read_bytes()[:60]
    # EBU Tech 3306: 'RF64', a size of all ones, 'WAVE', then 'ds64' with the true sizes.
    assert head[:4] == b"RF64"
    assert head[4:8] == b"\xff\xff\xff\xff"
    assert head[8:16] == b"WAVEds64"
    riff_bytes, data_bytes, frames = np.frombuffer(head[20:44], "<u8")
    assert riff_bytes == path.stat().st_size - 8
    assert data_bytes == 1000 * 80 * 4
    assert frames == 1000


def test_a_place_that_cannot_be_written_is_refused(tmp_path: Path) -> None:
    with pytest.raises(DeviceError, match="is a folder"):
        Rf64Writer(tmp_path, RATE_HZ, 2)
    with pytest.raises(DeviceError, match="cannot be written") as caught:
        Rf64Writer(tmp_path / "missing" / "out.wav", RATE_HZ, 2)
    assert "\n" not in caught.value.what
    assert caught.value.do


@pytest.mark.usefixtures("small_disk")
def test_a_full_disk_is_said_and_leaves_no_file_of_the_asked_name(tmp_path: Path) -> None:
    path = tmp_path / "out.wav"
    writer = Rf64Writer(path, RATE_HZ, 80)
    with pytest.raises(DeviceError, match="the disk refused samples"):
        for _ in range(10):
            writer.write(noise(256, 80))
    writer.abandon()
    assert [p.name for p in tmp_path.iterdir()] == ["out.wav.part"]


def test_a_recording_holds_what_was_pulled(tmp_path: Path) -> None:
    path, outlet = tmp_path / "take.wav", Collecting(64)
    sink = open_sink(f"file:{path}", RATE_HZ, outlet, 0, 256)
    wait_for(lambda: outlet.callbacks >= 40, "some pulls")
    sink.close()
    sink.close()
    assert (sink.name, sink.route) == (f"file:{path}", "clock, to file")
    back, _rate = soundfile.read(path, dtype="float32", always_2d=True)
    np.testing.assert_array_equal(back.view(np.uint32), outlet.everything.view(np.uint32))
    assert sink.digest == hashlib.sha256(back.tobytes()).hexdigest()


def test_a_recording_through_the_real_outlet_holds_every_frame_in_its_place(tmp_path: Path) -> None:
    outlet = open_gate(RATE_HZ, 4)  # a ring of a second, full
    Player(outlet, 4)
    sink = open_sink(f"file:{tmp_path / 'take.wav'}", RATE_HZ, outlet, 0, 256)
    wait_for(lambda: outlet.callbacks >= 100, "some pulls")
    sink.close()
    back, _rate = soundfile.read(tmp_path / "take.wav", dtype="float32", always_2d=True)
    assert len(back) == 256 * outlet.callbacks <= RATE_HZ
    np.testing.assert_array_equal(back[0], 0.0)  # the gate's ramp of one frame
    np.testing.assert_array_equal(back[1:], count_signal(np.arange(1, len(back)), 4))


def test_a_recording_is_never_overwritten(tmp_path: Path) -> None:
    died, whole = tmp_path / "take.wav.part", tmp_path / "take.2.wav"
    died.write_bytes(b"of an engine that died")
    whole.write_bytes(b"of one that closed")
    outlet = Collecting(2)
    sink = open_sink(f"file:{tmp_path / 'take.wav'}", RATE_HZ, outlet, 0, 256)
    wait_for(lambda: outlet.callbacks > 0, "a pull")
    sink.close()
    assert sink.name == f"file:{tmp_path / 'take.3.wav'}"
    assert died.read_bytes() == b"of an engine that died"
    assert whole.read_bytes() == b"of one that closed"
    assert soundfile.info(tmp_path / "take.3.wav").frames == len(outlet.everything)


@pytest.mark.usefixtures("small_disk")
def test_a_recording_on_a_full_disk_stops_and_says_so(tmp_path: Path) -> None:
    outlet = Collecting(64)
    sink = RecordingSink(tmp_path / "take.wav", RATE_HZ, outlet, 256)
    wait_for(lambda: sink.trouble is not None, "the disk to be full")
    assert sink.trouble is not None
    assert "the disk refused samples" in sink.trouble.what
    sink._thread.join(5.0)
    assert not sink._thread.is_alive()  # pulls no more
    with pytest.raises(DeviceError, match="the disk refused samples"):
        sink.close()
    sink.close()  # says it once
    assert [p.name for p in tmp_path.iterdir()] == ["take.wav.part"]


@pytest.fixture
def stuck_disk(monkeypatch: pytest.MonkeyPatch) -> threading.Event:
    """A disk that takes nothing until the event is set."""
    moving = threading.Event()
    write = Rf64Writer.write

    def stuck(self: Rf64Writer, block: NDArray[np.float32]) -> None:
        moving.wait()
        write(self, block)

    monkeypatch.setattr(Rf64Writer, "write", stuck)
    monkeypatch.setattr(recording, "QUEUE_S", 0.05)
    return moving


def test_a_slow_disk_stalls_nobody_until_the_queue_is_full(
    tmp_path: Path, stuck_disk: threading.Event, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(recording, "CLOSE_S", 0.2)
    path, outlet = tmp_path / "take.wav", Collecting(4)
    sink = RecordingSink(path, RATE_HZ, outlet, 256)
    wait_for(lambda: sink.trouble is not None, "the queue to be full")
    assert sink.trouble is not None
    assert "more than 0.05 s behind" in sink.trouble.what
    # 0.05 s in the queue, one that the writer holds, and one that was refused
    assert len(outlet.given) == round(0.05 * RATE_HZ / 256) + 2
    with pytest.raises(DeviceError, match="still behind"):
        sink.close()
    assert not path.exists()
    stuck_disk.set()
    sink._writer.join(5.0)
    assert not path.exists()
    back, _rate = soundfile.read(tmp_path / "take.wav.part", dtype="float32", always_2d=True)
    np.testing.assert_array_equal(back, outlet.everything[:-256])  # all but the refused one


def test_what_is_owed_after_a_hold_up_is_not_held_against_the_disk(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(recording, "QUEUE_S", 0.1)

    class Held(Collecting):
        def pull(self, out: NDArray[np.float32], now_ns: int) -> None:
            super().pull(out, now_ns)
            if len(self.at_s) == 3:
                time.sleep(0.5)  # five times what the queue holds

    path, outlet = tmp_path / "take.wav", Held(2)
    sink = RecordingSink(path, RATE_HZ, outlet, 256)
    wait_for(lambda: outlet.callbacks > 700 or sink.trouble is not None, "0.9 s of samples")
    sink.close()
    back, _rate = soundfile.read(path, dtype="float32", always_2d=True)
    np.testing.assert_array_equal(back, outlet.everything)
