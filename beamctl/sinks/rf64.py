"""Samples into an RF64 file (EBU Tech 3306: RIFF/WAVE without the 4 GiB limit)."""

from __future__ import annotations

import os
from pathlib import Path

import soundfile

from beamctl.errors import DeviceError
from beamctl.sinks.sink import Block


class Rf64Writer:
    """Writes 32-bit float samples, unchanged, as fast as the disk takes them.

    They go to PATH.part, which takes the asked name only when it is complete and on the disk.
    Raises DeviceError when the place cannot be written.
    """

    def __init__(self, path: Path, rate_hz: int, channels: int) -> None:
        if path.is_dir():
            raise DeviceError(f"{path} is a folder", "name a file in it")
        self.path = path
        self.part = path.with_name(path.name + ".part")
        self._closed = False
        try:
            self._file = soundfile.SoundFile(
                self.part, "w", rate_hz, channels, subtype="FLOAT", format="RF64"
            )
        except (soundfile.SoundFileError, OSError) as error:
            raise DeviceError(
                f"{path} cannot be written: {_reason(error)}",
                "name a file in a folder that exists and may be written",
            ) from error

    def write(self, block: Block) -> None:
        """Append (n, channels) float32. Raises DeviceError when the disk refuses."""
        try:
            self._file.write(block)
        # soundfile asserts that every frame was taken; a full disk may take only some.
        except (soundfile.SoundFileError, OSError, AssertionError) as error:
            raise self._refusal(error) from error

    def close(self) -> None:
        """Complete the file and give it its name; a second call does nothing."""
        if self._closed:
            return
        self._closed = True
        try:
            self._file.close()
            with self.part.open("rb+") as file:
                os.fsync(file.fileno())
            self.part.replace(self.path)
        except (soundfile.SoundFileError, OSError) as error:
            raise self._refusal(error) from error

    def abandon(self) -> None:
        """Let go of the file and leave what there is under PATH.part."""
        if not self._closed:
            self._closed = True
            self._file.close()

    def _refusal(self, error: Exception) -> DeviceError:
        return DeviceError(
            f"the disk refused samples for {self.path}: {_reason(error)}",
            f"make room or choose another disk; {self.part} holds what was written",
        )


def _reason(error: Exception) -> str:
    """The library's own words, without its prefix and on one line."""
    text = getattr(error, "error_string", "") or str(error) or "not every sample was taken"
    return " ".join(text.split()).rstrip(".")
