"""Where the local files of a running show are: its socket, its status block, its journals."""

from __future__ import annotations

import getpass
import hashlib
import os
import re
import tempfile
from datetime import datetime
from pathlib import Path

from platformdirs import user_state_path

from beamctl.errors import DeviceError


def runtime_folder() -> Path:
    """A folder that only this user may enter, for sockets and shared memory."""
    user = os.getuid() if hasattr(os, "getuid") else getpass.getuser()
    named = os.environ.get("BEAMCTL_RUNTIME")
    session = os.environ.get("XDG_RUNTIME_DIR")
    if named:
        folder = Path(named)
    elif session and os.access(session, os.W_OK):
        folder = Path(session) / "beamctl"
    else:
        folder = Path(tempfile.gettempdir()) / f"beamctl-{user}"
    return _private(folder)


def memory_folder() -> Path:
    """Where shared memory files are: in memory where the system has a place for that."""
    shared = Path("/dev/shm")
    if not shared.is_dir() or not os.access(shared, os.W_OK):
        return runtime_folder()
    key = hashlib.sha256(str(runtime_folder()).encode()).hexdigest()[:12]
    return _private(shared / f"beamctl-{key}")


def _private(folder: Path) -> Path:
    """Make a folder that only this user may enter; DeviceError when another owns it."""
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    if hasattr(os, "getuid") and folder.stat().st_uid != os.getuid():
        raise DeviceError(f"{folder} belongs to another user", "name your own in BEAMCTL_RUNTIME")
    folder.chmod(0o700)
    return folder


def show_key(show: Path) -> str:
    """Short name of a show folder, the same for every process."""
    return hashlib.sha256(str(show.resolve()).encode()).hexdigest()[:16]


def socket_address(show: Path) -> str:
    """Address of the host that runs `show`."""
    if os.name == "nt":
        return rf"\\.\pipe\beamctl-{show_key(show)}"
    return str(runtime_folder() / f"{show_key(show)}.sock")


def state_folder() -> Path:
    """Where journals and logs are kept."""
    named = os.environ.get("BEAMCTL_STATE")
    folder = Path(named) if named else user_state_path("beamctl")
    folder.mkdir(parents=True, exist_ok=True)
    return folder


def new_journal(title: str, now: datetime) -> Path:
    """A journal name that sorts by time and tells the show."""
    slug = re.sub(r"[^a-z0-9]+", "-", title.lower()).strip("-") or "show"
    folder = state_folder() / "journals"
    folder.mkdir(exist_ok=True)
    return folder / f"{now:%Y%m%d-%H%M%S}-{slug}-{os.getpid()}.jsonl"
