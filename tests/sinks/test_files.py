"""Samples into files: bit for bit, and under the asked name only when complete."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
import soundfile
from numpy.typing import NDArray

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


def test_the_recording_sink_keeps_what_was_written(tmp_path: Path) -> None:
    path = tmp_path / "take.wav"
    samples = noise(256 * 40, 64)
    sink = open_sink(f"file:{path}", RATE_HZ, 64, 32.0, 256)
    block = np.empty((256, 64), np.float32)
    for start in range(0, len(samples), 256):
        block[:] = samples[start : start + 256]  # one buffer, used again, as the renderer does
        sink.write(block)
    sink.close()
    sink.close()
    back, _rate = soundfile.read(path, dtype="float32", always_2d=True)
    np.testing.assert_array_equal(back, samples)


@pytest.mark.usefixtures("small_disk")
def test_the_recording_sink_says_that_the_disk_is_full(tmp_path: Path) -> None:
    sink = RecordingSink(tmp_path / "take.wav", RATE_HZ, 64, 32.0, 256)
    with pytest.raises(DeviceError, match="the disk refused samples"):
        for _ in range(2000):
            sink.write(noise(256, 64))
    with pytest.raises(DeviceError, match="the disk refused samples"):
        sink.close()
    assert [p.name for p in tmp_path.iterdir()] == ["take.wav.part"]


def test_a_slow_disk_stalls_nobody_until_the_queue_is_full(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    moving = threading.Event()
    write = Rf64Writer.write

    def stuck(self: Rf64Writer, block: NDArray[np.float32]) -> None:
        moving.wait()
        write(self, block)

    monkeypatch.setattr(Rf64Writer, "write", stuck)
    monkeypatch.setattr(recording, "QUEUE_S", 0.05)
    monkeypatch.setattr(recording, "CLOSE_S", 0.2)
    path = tmp_path / "take.wav"
    sink = RecordingSink(path, RATE_HZ, 4, 32.0, 256)
    blocks = 0
    with pytest.raises(DeviceError, match=r"more than 0\.05 s behind"):
        for _ in range(200):
            sink.write(noise(256, 4))
            blocks += 1
    assert blocks >= 37  # 0.05 s
    with pytest.raises(DeviceError, match="still behind"):
        sink.close()
    assert not path.exists()
    moving.set()
    sink._thread.join(5.0)
    assert not path.exists()
    assert soundfile.info(tmp_path / "take.wav.part").frames == blocks * 256
