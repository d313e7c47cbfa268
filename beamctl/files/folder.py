"""Looking at files without harm: sizes before contents, nothing but plain files, never a write."""

from __future__ import annotations

import os
import stat
from hashlib import sha256
from pathlib import Path, PurePosixPath

MOST_BYTES = 4_000_000
MISSING = "missing"


def folder_trouble(folder: Path) -> str:
    """Why a folder cannot be read; "" when it can."""
    try:
        if not stat.S_ISDIR(folder.stat().st_mode):
            return "a file, expected a show folder"
        next(folder.iterdir(), None)
    except FileNotFoundError:
        return "there is no such folder"
    except (OSError, ValueError) as error:  # ValueError: a zero byte in the name
        return _reason(error)
    return ""


def trouble(folder: Path, name: str) -> str:
    """Why the file `name` of a folder cannot be opened; "" when it can, MISSING when not there.

    Names stay inside the folder and are written with /, so that a show reads alike everywhere.
    """
    parts = PurePosixPath(name).parts
    if not parts or parts[0] == "/" or ".." in parts or "\\" in name or "\0" in name:
        return "expected the name of a file in the folder, without .. or \\"
    try:
        status = (folder / name).stat()
    except FileNotFoundError:
        return MISSING
    except OSError as error:  # a circle of links too
        return _reason(error)
    if stat.S_ISDIR(status.st_mode):
        return "a folder, expected a file"
    if not stat.S_ISREG(status.st_mode):
        return "a device or pipe, expected a file"
    return "" if status.st_size else "empty"


class Unreadable(Exception):
    """A text file that gives no text; the message says why."""


def read_text(folder: Path, name: str) -> tuple[str, str]:
    """A text file of the folder and the SHA-256 of its bytes in hex; Unreadable with the reason."""
    return text_of(read_bytes(folder, name))


def read_bytes(folder: Path, name: str) -> bytes:
    """The bytes of a text file of the folder; Unreadable with the reason."""
    if what := trouble(folder, name):
        raise Unreadable(what)
    try:
        with (folder / name).open("rb") as file:
            _check_size(os.fstat(file.fileno()).st_size)
            return file.read(MOST_BYTES)
    except OSError as error:
        raise Unreadable(_reason(error)) from None


def text_of(data: bytes) -> tuple[str, str]:
    """The text that bytes hold and their SHA-256 in hex; Unreadable with the reason."""
    _check_size(len(data))
    if b"\0" in data:
        raise Unreadable("holds zero bytes, so it is no text; a power cut while saving leaves such")
    try:
        text = data.decode("utf-8-sig")  # some editors put a mark before the text
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise Unreadable(f"not UTF-8 text: byte {data[error.start]:#04x} in line {line}") from None
    return text, sha256(data).hexdigest()


def _check_size(size: int) -> None:
    if size > MOST_BYTES:
        raise Unreadable(
            f"{size / 1e6:.0f} MB, expected a text of {MOST_BYTES / 1e6:.0f} MB or less"
        )


def _reason(error: OSError | ValueError) -> str:
    code = getattr(error, "errno", None)
    return f"cannot be read: {(os.strerror(code) if code else str(error)).lower()}"
