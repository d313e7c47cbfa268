"""Reading sounds: what is mixed, what is refused, what resampling keeps."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import soundfile

from beamctl.errors import ShowError
from beamctl.signal.reading import read_sound, resample


def test_channels_are_mixed_by_their_mean(tmp_path: Path) -> None:
    left = np.linspace(-0.5, 0.5, 1_000)
    right = np.full(1_000, 0.25)
    soundfile.write(tmp_path / "two.wav", np.stack([left, right], 1), 44_100, subtype="DOUBLE")
    samples, rate_hz = read_sound(tmp_path / "two.wav")
    assert rate_hz == 44_100
    np.testing.assert_allclose(samples, (left + right) / 2.0, atol=1e-15)


@pytest.mark.parametrize("content", [b"", b"\x00" * 40, b"RIFF\xff\xff\xff\xffWAVEjunk", b"fLaC!"])
@pytest.mark.parametrize("suffix", ["wav", "flac", "raw"])
def test_what_is_no_sound_is_named(tmp_path: Path, content: bytes, suffix: str) -> None:
    path = tmp_path / f"bell.{suffix}"
    path.write_bytes(content)
    with pytest.raises(ShowError, match=r"bell\."):
        read_sound(path)


def test_a_missing_file_is_named(tmp_path: Path) -> None:
    with pytest.raises(ShowError, match=r"gone\.wav"):
        read_sound(tmp_path / "gone.wav")


@pytest.mark.parametrize(
    ("samples", "rate_hz", "why"),
    [
        (np.zeros(0), 48_000, "no samples"),
        (np.array([0.0, np.nan]), 48_000, "not numbers"),
        (np.array([0.0, np.inf]), 48_000, "not numbers"),
        (np.zeros(8), 100, "rate of 100 Hz"),
    ],
)
def test_a_sound_that_cannot_be_played_is_named(
    tmp_path: Path, samples: np.ndarray, rate_hz: int, why: str
) -> None:
    soundfile.write(tmp_path / "odd.wav", samples, rate_hz, subtype="FLOAT")
    with pytest.raises(ShowError, match=why):
        read_sound(tmp_path / "odd.wav")


@pytest.mark.parametrize("rate_in_hz", [8_000, 44_100, 48_000, 192_000])
def test_resampling_keeps_a_tone(rate_in_hz: int) -> None:
    tone_hz = 3_000.0
    tone = np.sin(2.0 * np.pi * tone_hz * np.arange(rate_in_hz) / rate_in_hz)
    out = resample(tone, rate_in_hz, 96_000)
    assert len(out) == 96_000
    exact = np.sin(2.0 * np.pi * tone_hz * np.arange(96_000) / 96_000)
    middle = slice(9_600, -9_600)
    assert np.abs(out[middle] - exact[middle]).max() < 1e-6
