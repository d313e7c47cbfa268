"""Finding the host that runs a show, or starting one."""

from __future__ import annotations

import subprocess
import sys
import time
from pathlib import Path

from beamctl.errors import DeviceError
from beamctl.host.link import Link
from beamctl.host.places import state_folder

HOST_STARTS_S = 20.0


def answers(link: Link) -> bool:
    """True when a host is there."""
    try:
        link.snapshot()
    except (OSError, EOFError):
        return False
    return True


def start_host(show: Path, sink: str, journal: Path | None, link: Link) -> subprocess.Popen[bytes]:
    """Start a host of its own session, so that closing this terminal does not end it."""
    command = [sys.executable, "-m", "beamctl", "host", str(show), "--sink", sink]
    if journal is not None:
        command += ["--journal", str(journal)]
    log = state_folder() / "host.log"
    with log.open("wb") as out:
        process = subprocess.Popen(
            command, stdin=subprocess.DEVNULL, stdout=out, stderr=out, start_new_session=True
        )
    until = time.monotonic() + HOST_STARTS_S
    while not answers(link):
        if process.poll() is not None or time.monotonic() > until:
            raise said_by_host(process.poll())
        time.sleep(0.05)
    return process


def said_by_host(code: int | None) -> DeviceError:
    """What a host that ended by itself left in its log."""
    log = state_folder() / "host.log"
    code = code if code and code > 0 else DeviceError.exit_code  # below 0: killed by a signal
    said = [line for line in log.read_text(errors="replace").splitlines() if line.strip()]
    told = [i for i, line in enumerate(said) if line.startswith("beamctl: ")]
    if not told:
        return DeviceError("the host ended and said nothing", f"its log is {log}", code)
    what = said[told[-1]].removeprefix("beamctl: ")
    return DeviceError(what, " ".join(line.strip() for line in said[told[-1] + 1 :]), code)
