"""Prepared sounds on disk, so that a show loads them instead of making them again.

A cache file is a .npy array followed by the SHA-256 of everything before it. It is checked
whole when it is opened, which also brings its pages into memory before they are needed.
"""

from __future__ import annotations

import hashlib
import json
import os
import tempfile
from collections.abc import Callable
from dataclasses import asdict
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from platformdirs import user_cache_dir

from beamctl.errors import DeviceError, ShowError
from beamctl.signal.conditioning import Preparation, condition
from beamctl.signal.reading import read_sound, resample

Progress = Callable[[str, int, int], None]
"""Called with a sound's name, steps done and steps in all."""

STEPS = 4  # read, resample, condition, store
DIGEST_BYTES = 32


def cache_directory() -> Path:
    """Where prepared sounds are kept: BEAMCTL_CACHE, or the user's cache folder."""
    named = os.environ.get("BEAMCTL_CACHE")
    return Path(named) if named else Path(user_cache_dir("beamctl")) / "sounds"


def prepared(
    path: Path,
    settings: Preparation,
    cache_dir: Path | None = None,
    progress: Progress | None = None,
) -> NDArray[np.float32]:
    """The (n, 2) analytic signal of a sound, read-only and memory-mapped; n is at least 1.

    Made when the cache does not hold it whole; several processes may ask for it at once. Raises
    ShowError for a file that is no sound, DeviceError when the cache cannot be used.
    """

    def tell(done: int) -> None:
        if progress is not None:
            progress(path.name, done, STEPS)

    kept = (cache_dir or cache_directory()) / f"{_key(path, settings)}.npy"
    found = _opened(kept)
    if found is None:
        _store(kept, _made(path, settings, tell))
        found = _opened(kept)
    if found is None:
        raise _unusable(kept.parent, "what was written does not read back")
    tell(STEPS)
    return found


def _made(path: Path, settings: Preparation, tell: Callable[[int], None]) -> NDArray[np.float32]:
    tell(0)
    samples, rate_hz = read_sound(path)
    tell(1)
    samples = resample(samples, rate_hz, settings.rate_hz)
    if len(samples) == 0:
        raise ShowError(f"{path}: too short to be heard", "Export the sound again.")
    tell(2)
    made = condition(samples, settings)
    tell(3)
    return made


def _key(path: Path, settings: Preparation) -> str:
    """Name of a cache entry: the content of the sound and every setting."""
    try:
        with path.open("rb") as sound:
            digest = hashlib.file_digest(sound, "sha256")
    except OSError as error:
        raise ShowError(
            f"{path}: cannot be read ({error.strerror})", "Check the sound's name in the sheet."
        ) from error
    digest.update(json.dumps(asdict(settings), sort_keys=True).encode())
    return digest.hexdigest()


def _opened(kept: Path) -> NDArray[np.float32] | None:
    """The array of a cache file, or None when the file is missing or not whole."""
    try:
        if kept.stat().st_size <= DIGEST_BYTES:
            return None
        content = np.memmap(kept, np.uint8, "r")
        digest = hashlib.sha256(content[:-DIGEST_BYTES].data).digest()
        if digest != content[-DIGEST_BYTES:].tobytes():
            return None
        array: NDArray[np.float32] = np.load(kept, mmap_mode="r")
    except OSError:
        return None
    return array


def _store(kept: Path, array: NDArray[np.float32]) -> None:
    """Write under a temporary name, then rename: a cache file is whole or not there."""
    temporary: Path | None = None
    try:
        kept.parent.mkdir(parents=True, exist_ok=True)
        with tempfile.NamedTemporaryFile(dir=kept.parent, suffix=".part", delete=False) as file:
            temporary = Path(file.name)
            np.save(file, array)
            file.flush()
            with temporary.open("rb") as written:
                file.write(hashlib.file_digest(written, "sha256").digest())
            file.flush()
            os.fsync(file.fileno())
        _rename(temporary, kept)
    except OSError as error:
        raise _unusable(kept.parent, error.strerror or str(error)) from error
    finally:
        if temporary is not None:
            temporary.unlink(missing_ok=True)


def _rename(temporary: Path, kept: Path) -> None:
    try:
        temporary.replace(kept)
    except PermissionError:
        # Windows keeps a file that another process has mapped. Theirs is as good, if whole.
        if _opened(kept) is None:
            raise


def _unusable(folder: Path, why: str) -> DeviceError:
    return DeviceError(
        f"{folder}: cannot keep prepared sounds ({why})",
        "Make room there, or set BEAMCTL_CACHE to a folder that can be written.",
    )
