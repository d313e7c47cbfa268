"""Sound files to mono samples at any rate."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import soundfile
import soxr
from numpy.typing import NDArray

from beamctl.errors import ShowError

LOWEST_RATE_HZ = 4_000
HIGHEST_RATE_HZ = 768_000


def read_sound(path: Path) -> tuple[NDArray[np.float64], int]:
    """Read a sound: ((n,) mono samples, full scale 1; sample rate in Hz). n is at least 1.

    Channels are mixed by their mean. Raises ShowError, naming the file, for anything that is not
    a sound with finite samples at a rate between 4 and 768 kHz.
    """
    try:
        channels, rate_hz = soundfile.read(str(path), dtype="float64", always_2d=True)
    except (soundfile.SoundFileError, OSError, TypeError) as error:  # TypeError: headerless .raw
        raise ShowError(
            f"{path}: not readable as sound ({error})",
            "Put a WAV, FLAC, AIFF, Ogg or MP3 file there, or name another in the sheet.",
        ) from error
    if len(channels) == 0:
        raise ShowError(f"{path}: holds no samples", "Export the sound again.")
    if not LOWEST_RATE_HZ <= rate_hz <= HIGHEST_RATE_HZ:
        raise ShowError(f"{path}: claims a rate of {rate_hz} Hz", "Export the sound at 48 kHz.")
    if not np.isfinite(channels).all():
        raise ShowError(f"{path}: holds samples that are not numbers", "Export the sound again.")
    return channels.mean(axis=1), int(rate_hz)


def resample(
    samples: NDArray[np.float64], rate_in_hz: float, rate_out_hz: float
) -> NDArray[np.float64]:
    """(n,) samples at another rate, band-limited (libsoxr's very high quality recipe)."""
    if rate_in_hz == rate_out_hz:
        return samples
    return np.asarray(soxr.resample(samples, rate_in_hz, rate_out_hz, quality="VHQ"))
