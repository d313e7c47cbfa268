"""The cache of prepared sounds: kept, remade, shared, refused."""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import soundfile

from beamctl.errors import DeviceError, ShowError
from beamctl.signal import cache
from beamctl.signal.cache import cache_directory, prepared
from beamctl.signal.conditioning import Preparation, condition
from beamctl.signal.reading import read_sound, resample

SETTINGS = Preparation.at(40_000.0, 192_000.0)


@pytest.fixture
def bell(tmp_path: Path) -> Path:
    at_s = np.arange(24_000) / 48_000.0
    path = tmp_path / "bell.wav"
    soundfile.write(path, 0.5 * np.exp(-6.0 * at_s) * np.sin(2.0 * np.pi * 880.0 * at_s), 48_000)
    return path


@pytest.fixture
def kept(tmp_path: Path) -> Path:
    return tmp_path / "kept"


def test_holds_what_the_chain_makes(bell: Path, kept: Path) -> None:
    samples, rate_hz = read_sound(bell)
    expected = condition(resample(samples, rate_hz, SETTINGS.rate_hz), SETTINGS)
    found = prepared(bell, SETTINGS, kept)
    assert isinstance(found, np.memmap)
    assert found.dtype == np.float32
    assert not found.flags.writeable
    np.testing.assert_array_equal(found, expected)
    assert [path.suffix for path in kept.iterdir()] == [".npy"]


def test_second_call_makes_nothing(bell: Path, kept: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    first = np.array(prepared(bell, SETTINGS, kept))
    monkeypatch.setattr(cache, "condition", None)
    np.testing.assert_array_equal(prepared(bell, SETTINGS, kept), first)


def test_content_and_every_setting_are_the_key(bell: Path, kept: Path) -> None:
    prepared(bell, SETTINGS, kept)
    prepared(bell, replace(SETTINGS, lower_hz=600.0), kept)
    prepared(bell, replace(SETTINGS, version=SETTINGS.version + 1), kept)
    assert len(list(kept.iterdir())) == 3
    renamed = bell.rename(bell.with_name("gong.wav"))
    prepared(renamed, SETTINGS, kept)
    assert len(list(kept.iterdir())) == 3
    soundfile.write(renamed, np.random.default_rng(1).uniform(-0.5, 0.5, 4_000), 48_000)
    assert len(prepared(renamed, SETTINGS, kept)) == 8_000
    assert len(list(kept.iterdir())) == 4


@pytest.mark.parametrize("damage", ["empty", "short", "header", "sample", "long", "garbage"])
def test_a_damaged_file_is_remade(bell: Path, kept: Path, damage: str) -> None:
    expected = np.array(prepared(bell, SETTINGS, kept))
    (entry,) = kept.iterdir()
    content = bytearray(entry.read_bytes())
    if damage == "header":
        content[20] ^= 0x01
    if damage == "sample":
        content[len(content) // 2] ^= 0x40
    changed = {
        "empty": b"",
        "short": bytes(content[:-1_000]),
        "long": bytes(content) + b"more",
        "garbage": b"PK\x03\x04" * 100,
    }
    entry.write_bytes(changed.get(damage, bytes(content)))
    np.testing.assert_array_equal(prepared(bell, SETTINGS, kept), expected)
    assert list(kept.iterdir()) == [entry]


@pytest.mark.parametrize("content", [b"", b"no sound at all" * 50])
def test_a_file_that_is_no_sound_is_named(tmp_path: Path, kept: Path, content: bytes) -> None:
    path = tmp_path / "torn.wav"
    path.write_bytes(content)
    with pytest.raises(ShowError, match=r"torn\.wav"):
        prepared(path, SETTINGS, kept)
    assert not kept.exists()


def test_a_missing_sound_is_named(tmp_path: Path, kept: Path) -> None:
    with pytest.raises(ShowError, match=r"gone\.wav"):
        prepared(tmp_path / "gone.wav", SETTINGS, kept)


def test_a_cache_that_cannot_be_written_is_the_machines_fault(bell: Path, kept: Path) -> None:
    kept.write_text("a file where the folder should be")
    with pytest.raises(DeviceError, match="BEAMCTL_CACHE"):
        prepared(bell, SETTINGS, kept)


def test_a_failed_write_leaves_nothing_behind(
    bell: Path, kept: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(descriptor: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(DeviceError, match="No space left"):
        prepared(bell, SETTINGS, kept)
    assert list(kept.iterdir()) == []


def test_progress_counts_up_to_its_total(bell: Path, kept: Path) -> None:
    told: list[tuple[str, int, int]] = []
    prepared(bell, SETTINGS, kept, lambda *step: told.append(step))
    assert told == [("bell.wav", done, 4) for done in range(5)]
    told.clear()
    prepared(bell, SETTINGS, kept, lambda *step: told.append(step))
    assert told == [("bell.wav", 4, 4)]


def test_the_environment_names_the_folder(bell: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("BEAMCTL_CACHE", str(bell.parent / "elsewhere"))
    assert cache_directory() == bell.parent / "elsewhere"
    prepared(bell, SETTINGS)
    assert len(list(cache_directory().iterdir())) == 1
    monkeypatch.delenv("BEAMCTL_CACHE")
    assert cache_directory().name == "sounds"


PREPARE = """
import hashlib, sys
from pathlib import Path
from beamctl.signal import cache
from beamctl.signal.cache import prepared
from beamctl.signal.conditioning import Preparation

store = cache._store
def store_together(kept, array):
    print("made", flush=True)
    sys.stdin.readline()  # until both have made the same sound
    store(kept, array)
cache._store = store_together

found = prepared(Path(sys.argv[1]), Preparation.at(40_000.0, 192_000.0), Path(sys.argv[2]))
print(hashlib.sha256(found.tobytes()).hexdigest(), flush=True)
"""


def test_two_processes_make_the_same_sound_at_once(bell: Path, kept: Path) -> None:
    command = [sys.executable, "-W", "error", "-c", PREPARE, str(bell), str(kept)]
    pipe = subprocess.PIPE
    with (
        subprocess.Popen(command, stdin=pipe, stdout=pipe, text=True) as one,
        subprocess.Popen(command, stdin=pipe, stdout=pipe, text=True) as other,
    ):
        assert one.stdout is not None
        assert other.stdout is not None
        assert one.stdout.readline() == other.stdout.readline() == "made\n"
        for process in (one, other):
            assert process.stdin is not None
            process.stdin.write("\n")
            process.stdin.flush()
        results = [one.communicate(timeout=60)[0], other.communicate(timeout=60)[0]]
    assert (one.returncode, other.returncode) == (0, 0)
    assert len(results[0].strip()) == 64
    assert results[0] == results[1]
    assert len(list(kept.iterdir())) == 1
