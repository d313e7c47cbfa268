"""Writing files of a show so that a power cut leaves each of them whole: its old text or its new.

All new texts are on the disk before the first of them takes its name. A cut between two names
leaves one file new and another old: each is whole, and what the new one replaced is in NAME~.
"""

from __future__ import annotations

import os
import secrets
import shutil
from collections.abc import Mapping
from contextlib import suppress
from hashlib import sha256
from pathlib import Path

from beamctl.errors import DeviceError, ShowError


def save(
    folder: Path, texts: Mapping[str, str], expected_digests: Mapping[str, str] | None = None
) -> None:
    """Write the texts that are not on disk as they are; what was there stays as NAME~.

    texts             file name → text
    expected_digests  SHA-256 in hex of the files as they were read; None: whatever is there goes

    ShowError when somebody else changed one of the files since, DeviceError when the disk refuses.
    """
    changed: dict[Path, bytes] = {}
    for name, text in texts.items():
        path, data = folder / name, text.encode()
        _sweep(path)
        now = _now(path)
        if now == data:
            continue
        if expected_digests is not None and now is not None:
            _check_unchanged(path, now, expected_digests.get(name, ""))
        changed[path] = data
    write(changed, keep=True, do="make room on the disk, then save again")


def write(files: Mapping[Path, bytes], keep: bool = False, do: str = "") -> None:
    """Write files, each whole or not at all, in their order; DeviceError when the disk refuses.

    keep  what a file held before stays beside it as NAME~
    do    what to say when the disk refuses
    """
    parts: list[tuple[Path, Path]] = []  # written, and the name it will have
    path = Path()
    try:
        for path, data in files.items():
            place = path.resolve()  # a link stays a link
            if keep and place.exists():
                before = place.with_name(f"{place.name}~")
                _write_part(place, place.read_bytes(), before, parts)
            _write_part(place, data, place, parts)
        for part, path in parts:
            part.replace(path)
        if os.name == "posix":
            for parent in {place.parent for _, place in parts}:
                _sync_folder(parent)
    except OSError as error:
        reason = os.strerror(error.errno or 0).lower()
        raise DeviceError(f"{path} cannot be written: {reason}", do) from error
    finally:
        for part, _ in parts:
            with suppress(OSError):
                part.unlink()


def _now(path: Path) -> bytes | None:
    """What a file holds; None when there is none."""
    try:
        return path.read_bytes()
    except FileNotFoundError:
        return None
    except OSError as error:
        reason = os.strerror(error.errno or 0).lower()
        raise DeviceError(f"{path} cannot be read: {reason}", "nothing was saved") from error


def _sweep(path: Path) -> None:
    """Take away what a power cut left of earlier saves of a file."""
    place = path.resolve()
    beginnings = f".{place.name}-", f".{place.name}~-"
    for stale in place.parent.glob(".*.part"):
        if stale.name.startswith(beginnings):
            with suppress(OSError):
                stale.unlink()


def _check_unchanged(path: Path, now: bytes, expected_digest: str) -> None:
    if sha256(now).hexdigest() != expected_digest:
        raise ShowError(
            f"{path} was changed by somebody else since it was read: nothing was saved",
            "move it to another name, save again, and carry over what it has",
        )


def _write_part(like: Path, data: bytes, place: Path, parts: list[tuple[Path, Path]]) -> None:
    """The data on the disk under a name of its own, with the mode of `like`."""
    part = place.with_name(f".{place.name}-{secrets.token_hex(4)}.part")
    parts.append((part, place))
    with part.open("xb") as file:
        file.write(data)
        file.flush()
        os.fsync(file.fileno())
    if like.exists():
        shutil.copymode(like, part)


def _sync_folder(folder: Path) -> None:
    """The new names are on the disk too."""
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
