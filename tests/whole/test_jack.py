"""A real stream through a real JACK server, caught at its ports by another client."""

from __future__ import annotations

import threading
from pathlib import Path

import numpy as np
import pytest
from jackserver import SINK, JackServer, capture_ports, jack_server, ports, wait_for
from support.running import STARTS_S, Running, Samples, host, rendered, streams_of, told
from support.smallshow import RATE_HZ, write_steady_show

pytestmark = pytest.mark.real

CARRIER_HZ = 40_000
TONE_HZ = 1_000
FEEDS = range(0, 64, 4)
CAPTURE_S = 3.0
WINDOW = RATE_HZ // 4  # 4 Hz a line: carrier and tone fall on lines exactly
STEP = 2.0**-31  # of what the recorder keeps
NEAR_DB = 0.1


def test_the_ports_carry_what_is_rendered_offline(tmp_path: Path) -> None:
    show, journal = write_steady_show(tmp_path / "steady", TONE_HZ), tmp_path / "take.jsonl"
    with jack_server(RATE_HZ, 1024, 2, 64) as server:
        with host(show, SINK, journal, server.env) as running:
            assert running.snapshot().engine.route == "compiled callback"
            running.open()
            caught, ran_dry = capture_a_go(server, running)
            assert running.stop() == 0
        offline = rendered(*streams_of(journal))[:, FEEDS]

    go = told(journal, "go")[0].sample
    assert not offline[:go].any()
    shift = alignment(caught, offline, go)
    spectra_agree(steady_part(caught), offline[go + RATE_HZ : go + RATE_HZ + WINDOW])
    if not ran_dry:  # else zeros went in between, and samples have moved
        same_samples(caught, offline, shift)


def capture_a_go(server: JackServer, running: Running) -> tuple[Samples, int]:
    """What the ports carried around the GO of cue 1, and how often they ran dry meanwhile."""
    outputs = [f"PortAudio:out_{feed}" for feed in FEEDS]
    wait_for(lambda: set(outputs) <= set(ports(server)), "the sink's ports")
    others = set(ports(server))
    before = running.snapshot().engine.late
    found: list[Samples] = []
    recorder = threading.Thread(
        target=lambda: found.append(capture_ports(server, outputs, CAPTURE_S))
    )
    recorder.start()
    try:
        wait_for(lambda: len(set(ports(server)) - others) >= len(outputs), "the recorder's ports")
        running.act("go", ref="1")
    finally:
        recorder.join(STARTS_S)
    assert found, "nothing was recorded"
    return found[0], running.snapshot().engine.late - before


def alignment(caught: Samples, offline: Samples, go: int) -> int:
    """By how many samples `offline` is ahead of `caught`: the best match while the level rises.

    A steady tone matches itself once a period; a rise matches once.
    """
    heard = np.flatnonzero(np.abs(caught).max(axis=1) > 1e-3)
    assert len(heard), "silence was recorded"
    onset = go + int(np.argmax(np.abs(offline[go:]).max(axis=1) > 1e-3))
    piece = caught[heard[0] : heard[0] + RATE_HZ // 10]

    def miss(shift: int) -> float:
        start = int(heard[0]) + shift
        return float(np.abs(offline[start : start + len(piece)] - piece).max())

    near = onset - int(heard[0])
    return min(range(near - 64, near + 65), key=miss)


def steady_part(caught: Samples) -> Samples:
    """A window after the rise in which no frame is missing: the device got no zeros for feeds."""
    heard = int(np.flatnonzero(np.abs(caught).max(axis=1) > 1e-3)[0])
    for start in range(heard + RATE_HZ, len(caught) - WINDOW, WINDOW // 8):
        window = caught[start : start + WINDOW]
        if np.abs(window).max(axis=1).all() and np.ptp(carrier_phase(window)) < 0.01:
            return window
    pytest.fail("no quarter of a second without a gap")


def carrier_phase(window: Samples) -> np.ndarray:
    """Phase of the first feed's carrier in eighths of a window, radians around the first one's."""
    eighths = window[:, 0].reshape(8, -1)
    at_s = np.arange(eighths.shape[1]) / RATE_HZ
    lines = eighths @ np.exp(-2j * np.pi * CARRIER_HZ * at_s)
    return np.angle(lines / lines[0])


def same_samples(caught: Samples, offline: Samples, shift: int) -> None:
    """Every frame that both hold is the same, to what the recorder keeps of a sample."""
    start, end = max(0, -shift), min(len(caught), len(offline) - shift)
    assert end - start > 2 * RATE_HZ
    difference = np.abs(caught[start:end] - offline[start + shift : end + shift])
    assert difference.max() <= STEP


def spectra_agree(caught: Samples, offline: Samples) -> None:
    """Carrier and both sidebands of every feed within 0.1 dB."""
    assert caught.shape == offline.shape == (WINDOW, len(FEEDS))
    lines = [
        f * WINDOW // RATE_HZ for f in (CARRIER_HZ - TONE_HZ, CARRIER_HZ, CARRIER_HZ + TONE_HZ)
    ]
    heard, expected = (np.abs(np.fft.rfft(s, axis=0))[lines] / WINDOW for s in (caught, offline))
    assert expected.min() > 1e-3, "a line that is not there cannot be compared"
    off_db = 20.0 * np.log10(heard / expected)
    assert np.abs(off_db).max() <= NEAR_DB, off_db
