"""The mode of a show, kept on disk: a host that starts again in a locked show comes up locked."""

from __future__ import annotations

from pathlib import Path
from typing import get_args

from beamctl.host.places import show_key, state_folder
from beamctl.show.states import Mode


def remembered_mode(folder: Path) -> Mode:
    """The mode that the last host of a show was in; WRITE when there was none."""
    try:
        kept = _path(folder).read_text(encoding="ascii")
    except (OSError, ValueError):
        return "WRITE"
    return next((mode for mode in get_args(Mode) if mode == kept), "WRITE")


def remember_mode(folder: Path, mode: Mode) -> str:
    """Keep the mode; why that could not be done, "" when it was."""
    path = _path(folder)
    part = path.with_name(f"{path.name}.part")
    try:
        path.parent.mkdir(exist_ok=True)
        part.write_text(mode, encoding="ascii")
        part.replace(path)
    except OSError as error:
        return f"{path}: {error.strerror}; a host that is started again will not be in {mode}"
    return ""


def _path(folder: Path) -> Path:
    return state_folder() / "modes" / show_key(folder)
