"""A real JACK server without hardware, and a recorder of ports that is a process of its own."""

from __future__ import annotations

import itertools
import os
import shutil
import signal
import subprocess
import tempfile
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import NamedTuple

import numpy as np
import pytest
import soundfile
from numpy.typing import NDArray

TOOLS = ("jackd", "jack_lsp", "jack_rec")
SINK = "JACK Audio Connection Kit: system"  # what PortAudio calls the server's own ports
_numbers = itertools.count(1)


class JackServer(NamedTuple):
    """A running server. `env` is what a client process needs to find it."""

    name: str
    process: subprocess.Popen[bytes]
    env: dict[str, str]


def wait_for(condition: Callable[[], bool], what: str, timeout_s: float = 20.0) -> None:
    """Return once the condition holds; fail the test, naming `what`, if it never does."""
    deadline_s = time.monotonic() + timeout_s
    while not condition():
        if time.monotonic() > deadline_s:
            pytest.fail(f"waited {timeout_s:g} s for {what}")
        time.sleep(0.02)


@contextmanager
def jack_server(
    rate: int,
    period: int,
    capture: int,
    playback: int,
    name: str | None = None,
    synchronous: bool = True,
) -> Iterator[JackServer]:
    """Run jackd with its dummy driver, by default under a new name; this process finds it too.

    No real-time scheduling and no locked memory, so that it runs in a container; synchronous, so
    that a late client delays a period instead of losing it: such a server waits ten seconds for a
    client that died. Skips the test, with the reason, where JACK is not installed; fails it there
    under CI=true.
    """
    missing = [tool for tool in TOOLS if shutil.which(tool) is None]
    if missing:
        reason = f"not installed: {', '.join(missing)} (apt install jackd2)"
        if os.environ.get("CI") == "true":
            pytest.fail(reason)
        pytest.skip(reason)
    name = name or f"beamctl-test-{os.getpid()}-{next(_numbers)}"
    # fmt: off
    command = [
        "jackd", "-n", name, "-r", "-m", *(["-S"] if synchronous else []), "-d", "dummy",
        "-r", str(rate), "-p", str(period), "-C", str(capture), "-P", str(playback),
    ]
    # fmt: on
    before = os.environ.get("JACK_DEFAULT_SERVER")
    os.environ["JACK_DEFAULT_SERVER"] = name
    env = {**os.environ, "JACK_NO_START_SERVER": "1"}
    with tempfile.TemporaryFile() as log:
        process = subprocess.Popen(command, stdout=log, stderr=subprocess.STDOUT)
        server = JackServer(name, process, env)
        try:
            wait_for(lambda: process.poll() is not None or bool(ports(server)), "the JACK server")
            if process.poll() is not None:
                log.seek(0)
                pytest.fail(f"jackd ended: {log.read().decode(errors='replace')[-2000:]}")
            yield server
        finally:
            _end(process)
            if before is None:
                del os.environ["JACK_DEFAULT_SERVER"]
            else:
                os.environ["JACK_DEFAULT_SERVER"] = before


def ports(server: JackServer, of: str = "") -> list[str]:
    """The ports whose full name begins with `of`, in the order of their numbers."""
    listing = subprocess.run(
        ["jack_lsp"], env=server.env, capture_output=True, text=True, timeout=20.0
    )
    if listing.returncode != 0:
        return []
    return [line for line in listing.stdout.splitlines() if ":" in line and line.startswith(of)]


def capture_ports(server: JackServer, names: list[str], seconds: float) -> NDArray[np.float32]:
    """Record output ports, (n, ports). Exact for samples within ±1 that are multiples of 2^-31."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "capture.wav"
        # fmt: off
        command = [
            "jack_rec", "-f", str(path), "-d", f"{max(1, round(seconds))}", "-b", "32",
            "-B", "262144", *names,
        ]
        # fmt: on
        done = subprocess.run(
            command, env=server.env, capture_output=True, text=True, timeout=seconds + 60.0
        )
        if not path.exists():
            pytest.fail(f"jack_rec recorded nothing: {done.stdout}{done.stderr}")
        whole, _rate = soundfile.read(path, dtype="int32", always_2d=True)
    return np.asarray(whole / 2.0**31, np.float32)


def _end(process: subprocess.Popen[bytes]) -> None:
    """Let the server leave by itself: killed, it would keep one of the machine's eight places."""
    process.send_signal(signal.SIGCONT)
    process.terminate()
    try:
        process.wait(20.0)  # it waits some seconds for clients that died
    except subprocess.TimeoutExpired:
        process.kill()
        process.wait(5.0)
