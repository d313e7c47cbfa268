"""Both routes through a real JACK server: every feed, sample for sample, and the server's loss."""

from __future__ import annotations

import json
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import jackplayer
import numpy as np
import pytest
from jackplayer import QUANTUM, count_signal, frame_of
from jackserver import SINK, JackServer, capture_ports, jack_server, ports, wait_for

pytestmark = pytest.mark.real

FEEDS = 64
RATE_HZ = 192_000
PERIOD = 1024
RING_MS = 32.0


@contextmanager
def player(server: JackServer, feeds: int, *options: str) -> Iterator[subprocess.Popen[str]]:
    """The count signal playing from another process."""
    with subprocess.Popen(
        [sys.executable, jackplayer.__file__, str(feeds), str(RING_MS), *options],
        env=server.env,
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
    ) as process:
        try:
            yield process
        finally:
            process.kill()


def line(process: subprocess.Popen[str]) -> dict[str, Any]:
    """The player's next report."""
    assert process.stdout is not None
    text = process.stdout.readline()
    if not text:
        pytest.fail(f"the player ended with {process.wait(10.0)}")
    report: dict[str, Any] = json.loads(text)
    return report


def longest_run(frames: np.ndarray) -> int:
    """How many recorded frames follow one another without a step."""
    breaks = np.flatnonzero(np.diff(frames) != 1)
    edges = np.concatenate(([-1], breaks, [len(frames) - 1]))
    return int(np.diff(edges).max())


@pytest.mark.parametrize(
    ("feeds", "options", "route", "period"),
    [(FEEDS, [], "compiled callback", PERIOD), (2, ["deaf"], "blocking writes", QUANTUM)],
)
def test_feeds_arrive_sample_for_sample(
    feeds: int, options: list[str], route: str, period: int
) -> None:
    with (
        jack_server(RATE_HZ, PERIOD, 2, feeds) as server,
        player(server, feeds, *options) as process,
    ):
        assert line(process) == {"route": route, "period": period}
        wait_for(lambda: len(ports(server, "PortAudio:out_")) == feeds, "the sink's ports")
        recorded = capture_ports(server, ports(server, "PortAudio:out_"), 1.0)
        assert process.stdin is not None
        process.stdin.close()
        report = line(process)
        assert process.wait(10.0) == 0
    print(report)

    assert recorded.shape[1] == feeds
    sounding = recorded[np.any(recorded != 0.0, axis=1)]
    frames = frame_of(sounding[:, 0])
    # Dry spells and lost periods may cut the stream on a busy machine, but never alter a frame.
    np.testing.assert_array_equal(sounding, count_signal(frames, feeds))
    assert longest_run(frames) >= RATE_HZ // 10
    assert (report["lost"], report["trouble"], report["faults"]) == (False, "", 0)
    assert report["close_s"] < 2.0
    expected = report["seconds"] * RATE_HZ / period
    assert report["callbacks"] >= 0.9 * expected - 10


@pytest.mark.parametrize("how", [signal.SIGSTOP, signal.SIGTERM])
@pytest.mark.parametrize(("feeds", "options"), [(FEEDS, []), (2, ["deaf"])])
def test_when_the_server_is_lost_the_callbacks_stop_and_the_process_can_leave(
    how: signal.Signals, feeds: int, options: list[str]
) -> None:
    with (
        jack_server(RATE_HZ, PERIOD, 2, feeds) as server,
        player(server, feeds, *options) as process,
    ):
        line(process)
        began_s = time.monotonic()
        server.process.send_signal(how)
        report = line(process)
        noticed_s = time.monotonic() - began_s
        assert process.wait(5.0) == 0
    print(report, noticed_s)
    assert report["lost"] or report["trouble"]
    assert jackplayer.LOST_S - 0.1 <= noticed_s < 1.0
    assert report["close_s"] < 0.1


def test_a_device_that_neither_asks_nor_can_be_written_is_refused() -> None:
    with jack_server(RATE_HZ, PERIOD, 2, 3) as server:
        done = subprocess.run(
            [sys.executable, jackplayer.__file__, "3", str(RING_MS), "deaf"],
            env=server.env,
            stdin=subprocess.DEVNULL,
            capture_output=True,
            text=True,
            timeout=60.0,
        )
    assert done.returncode == 1
    assert "DeviceError: system asks for no samples, and 3 channels cannot be" in done.stderr


@pytest.mark.parametrize(
    ("name", "rate_hz", "channels", "frames", "said"),
    [
        (SINK, 96_000, 8, 6144, "needed 8 channels at 96000 Hz, offered 192000 Hz"),
        (SINK, RATE_HZ, 9, 6144, "needed 9 channels at 192000 Hz, offered 8 channels"),
        ("syst", RATE_HZ, 8, 6144, "no sink is called 'syst'"),
        ("0", RATE_HZ, 8, 6144, "no sink is called '0'"),
        ("system", RATE_HZ, 8, 1792, "takes 1024 samples at once; the ring holds 1792"),
    ],
)
def test_what_cannot_be_had_exactly_is_refused(
    name: str, rate_hz: int, channels: int, frames: int, said: str
) -> None:
    program = (
        "from beamctl.engine.callback import ADDRESS\n"
        "from beamctl.engine.outlet import Outlet, Wire\n"
        "from beamctl.sinks.open import open_sink\n"
        f"outlet = Outlet.create(None, {frames}, {channels}, [Wire(0, {channels}, 1.0)], 1)\n"
        f"open_sink({name!r}, {rate_hz}, outlet, ADDRESS, 256)"
    )
    with jack_server(RATE_HZ, PERIOD, 2, 8) as server:
        done = subprocess.run(
            [sys.executable, "-c", program],
            env=server.env,
            capture_output=True,
            text=True,
            timeout=60.0,
        )
    assert done.returncode == 1
    assert ("ContractError" if "needed" in said else "DeviceError") in done.stderr
    assert said in done.stderr
