"""The compiled route through a real JACK server: every feed, sample for sample, and its loss."""

from __future__ import annotations

import json
import signal
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import jackplayer
import numpy as np
import pytest
from jackplayer import count_signal, frame_of
from jackserver import JackServer, capture_ports, jack_server, ports, wait_for

pytestmark = pytest.mark.real

FEEDS = 64
RATE_HZ = 192_000
PERIOD = 1024


@contextmanager
def player(server: JackServer, channels: int, ring_ms: float) -> Iterator[subprocess.Popen[str]]:
    """The count signal playing from another process."""
    with subprocess.Popen(
        [sys.executable, jackplayer.__file__, str(channels), str(ring_ms)],
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


def test_64_feeds_arrive_sample_for_sample() -> None:
    with jack_server(RATE_HZ, PERIOD, 2, FEEDS) as server, player(server, FEEDS, 32.0) as process:
        opened = line(process)
        assert opened["route"] == "compiled callback"
        assert opened["latency_s"] == pytest.approx(0.032)
        outputs = [f"PortAudio:out_{k}" for k in range(FEEDS)]
        wait_for(lambda: set(outputs) <= set(ports(server)), "the sink's ports")
        recorded = capture_ports(server, outputs, 1.0)
        assert process.stdin is not None
        process.stdin.close()
        report = line(process)
        assert process.wait(10.0) == 0
    print(report)

    assert recorded.shape[1] == FEEDS
    sounding = recorded[np.any(recorded != 0.0, axis=1)]
    frames = frame_of(sounding[:, 0])
    # Dry spells and lost periods may cut the stream on a busy machine, but never alter a frame.
    np.testing.assert_array_equal(sounding, count_signal(frames, FEEDS))
    assert longest_run(frames) >= RATE_HZ // 10
    assert report["lost"] == ""
    assert report["close_s"] < 2.0
    expected = report["seconds"] * RATE_HZ / PERIOD
    assert report["callbacks"] >= 0.9 * expected - 10


@pytest.mark.parametrize("how", [signal.SIGSTOP, signal.SIGTERM])
def test_a_lost_server_is_noticed_and_the_sink_still_closes(how: signal.Signals) -> None:
    with jack_server(RATE_HZ, PERIOD, 2, FEEDS) as server, player(server, FEEDS, 32.0) as process:
        line(process)
        server.process.send_signal(how)
        report = line(process)
        assert "is lost" in report["lost"]
        assert 0.3 <= report["lost_after_s"] < 1.0
        assert report["close_s"] < 2.0
        assert process.wait(10.0) == 0


@pytest.mark.parametrize(
    ("name", "rate_hz", "channels", "ring_ms", "said"),
    [
        ("system", 96_000, 8, 32.0, "needed 8 channels at 96000 Hz, offered 192000 Hz"),
        ("system", RATE_HZ, 9, 32.0, "needed 9 channels at 192000 Hz, offered 8 channels"),
        ("syst", RATE_HZ, 8, 32.0, "no sink is called 'syst'"),
        ("0", RATE_HZ, 8, 32.0, "no sink is called '0'"),
        ("system", RATE_HZ, 8, 6.0, "takes 1024 samples at once; the ring holds 1152"),
    ],
)
def test_what_cannot_be_had_exactly_is_refused(
    name: str, rate_hz: int, channels: int, ring_ms: float, said: str
) -> None:
    asked = f"open_sink({name!r}, {rate_hz}, {channels}, {ring_ms}, 256)"
    program = f"from beamctl.sinks.open import open_sink; {asked}"
    with jack_server(RATE_HZ, PERIOD, 2, 8) as server:
        done = subprocess.run(
            [sys.executable, "-c", program],
            env=server.env,
            capture_output=True,
            text=True,
            timeout=60.0,
        )
    assert done.returncode == 1
    assert "DeviceError" in done.stderr
    assert said in done.stderr
