"""A host in real time: what it sends is what its journal says, whatever desks do meanwhile."""

from __future__ import annotations

import contextlib
import os
import signal
import subprocess
import sys
import time
from multiprocessing.connection import Client
from pathlib import Path

import numpy as np
import pytest
import soundfile
from support.running import (
    SOON_S,
    Running,
    Samples,
    answers,
    beamctl,
    fired,
    host,
    last_hash,
    outputs,
    records_of,
    rendered,
    replayed,
    streams_of,
    told,
    wait_for,
)
from support.smallshow import FEEDS, FOLLOW_S, RATE_HZ, TRAVEL_AT_S, write_show

from beamctl.host.places import socket_address
from beamctl.show.records import Record

GATES = ["opened", "hushed", "opened", "hushed"]
RAMP = RATE_HZ // 50  # samples of the ramp that closes the output


@pytest.fixture
def show(tmp_path: Path) -> Path:
    return write_show(tmp_path / "small")


def recorded(path: Path) -> Samples:
    samples, rate_hz = soundfile.read(path, dtype="float32", always_2d=True)
    assert rate_hz == RATE_HZ
    return np.asarray(samples)


def bits(samples: Samples) -> np.ndarray:
    return samples.view(np.uint32)


def go(running: Running, ref: str) -> None:
    """Fire a cue and wait for its record."""
    running.act("go", ref=ref)
    wait_for(lambda: ref in fired(running.journal), f"cue {ref} in the journal")


def go_1_2_3(running: Running) -> None:
    """Fire all that is fired by hand, with time between, until the follow-on went too."""
    for ref in ("1", "2", "3"):
        go(running, ref)
        running.pass_by(0.15)
    wait_for(lambda: "4" in fired(running.journal), "the follow-on")
    running.pass_by(0.1)


def test_a_recording_equals_the_render_of_its_records(show: Path, tmp_path: Path) -> None:
    take, journal = tmp_path / "take.wav", tmp_path / "take.jsonl"
    with host(show, f"file:{take}", journal) as running:
        running.open()
        go_1_2_3(running)
        running.act("hush")
        running.pass_by(0.1)
        running.act("ready")
        running.act("confirm")
        running.pass_by(0.3)
        assert running.stop() == 0

    assert fired(journal) == ["1", "2", "3", "4"]
    assert [gate.args["why"] for gate in told(journal, "gate")] == GATES
    assert outputs(journal) == ["SHUT", "OPEN", "HUSHED", "OPEN", "COLD"]
    assert told(journal, "go")[3].who == "follow-on of 3"

    samples = recorded(take)
    assert records_of(journal)[-1].args["read"] == len(samples)
    np.testing.assert_array_equal(bits(samples), bits(rendered(*streams_of(journal))))
    assert np.ptp(samples, axis=0).min() > 0.001, "a feed that never sounded shows nothing"
    assert replayed(journal) == last_hash(journal)

    opened, hushed, restored, left = (gate.sample for gate in told(journal, "gate"))
    assert not samples[:opened].any()
    assert samples[restored:left].any()
    assert not samples[hushed + RAMP : restored].any()
    assert hushed + RAMP < restored


def test_the_command_line_renders_what_was_sent_live(show: Path, tmp_path: Path) -> None:
    """Live opens the output later than `render`, but nothing sounds before the first GO, by which
    both are open; from the closing ramp of the host on they differ, so that is left out.
    """
    take, journal = tmp_path / "take.wav", tmp_path / "take.jsonl"
    with host(show, f"file:{take}", journal) as running:
        running.open()
        go_1_2_3(running)
        assert running.stop() == 0

    opened, closing = told(journal, "gate")
    by_hand = told(journal, "go")[:3]
    assert by_hand[0].sample >= opened.sample + RAMP
    gos = [f"--go={record.cue}@{record.sample}smp" for record in by_hand]
    again = tmp_path / "again.wav"
    done = beamctl("render", show, *gos, f"--for={closing.sample}smp", "-o", again)
    assert done.returncode == 0, done.stderr

    live, offline = recorded(take)[: closing.sample], recorded(again)
    assert np.abs(offline[-RAMP:]).max() > 0.001
    np.testing.assert_array_equal(live, offline)


def test_acts_and_follow_ons_keep_their_distance_from_their_go(show: Path, tmp_path: Path) -> None:
    journal = tmp_path / "take.jsonl"
    with host(show, "null", journal) as running:
        running.open()
        go_1_2_3(running)
        assert running.stop() == 0
    at = {record.cue: record.sample for record in told(journal, "go")}
    travel = [r.sample for r in told(journal, "aim") if r.cue == "2" and r.args["n"] > 0]
    assert travel[-1] - at["2"] == round(TRAVEL_AT_S * RATE_HZ)
    assert at["4"] - at["3"] == round(FOLLOW_S * RATE_HZ)


def test_a_desk_that_dies_mid_cue_changes_no_sample(show: Path, tmp_path: Path) -> None:
    take, journal = tmp_path / "take.wav", tmp_path / "take.jsonl"
    looker = [sys.executable, "-c", LOOKER, str(show)]
    with host(show, f"file:{take}", journal) as running:
        running.open()
        began_s, before = time.monotonic(), running.snapshot().engine
        go(running, "1")
        with subprocess.Popen(looker, stdout=subprocess.PIPE) as desk:
            assert desk.stdout is not None
            assert desk.stdout.readline()
            desk.kill()
        go(running, "2")
        with Client(socket_address(show)) as cut:
            cut.send_bytes(b'{"do": "snapshot"}')  # and leaves without its answer
        go(running, "3")
        running.pass_by(0.3)
        after = running.snapshot().engine
        missed = (time.monotonic() - began_s) * RATE_HZ - (after.rendered - before.rendered)
        assert running.stop() == 0

    ring = after.ring_ms * RATE_HZ / 1000
    assert after.late > before.late or missed < 2 * ring, "it ran dry and did not say so"
    samples = recorded(take)
    np.testing.assert_array_equal(bits(samples), bits(rendered(*streams_of(journal))))
    assert replayed(journal) == last_hash(journal)


LOOKER = """
import sys
from pathlib import Path
from beamctl.host.link import Link
link = Link(Path(sys.argv[1]))
while True:
    print(link.snapshot().output, flush=True)
"""


def test_a_second_host_of_a_show_is_refused(show: Path, tmp_path: Path) -> None:
    with host(show, "null", tmp_path / "first.jsonl") as running:
        second = beamctl("host", show, "--journal", tmp_path / "second.jsonl")
        assert second.returncode == 4
        assert second.stdout == ""
        assert second.stderr.splitlines() == [
            f"beamctl: a host runs {show} already",
            f"  `beamctl desk {show}` joins it",
        ]
        assert not (tmp_path / "second.jsonl").exists()
        assert running.snapshot().output == "SHUT"
        assert running.stop() == 0


def test_what_a_killed_host_left_behind_stops_nobody(show: Path, tmp_path: Path) -> None:
    first, second = tmp_path / "first.jsonl", tmp_path / "second.jsonl"
    take = tmp_path / "take.wav"
    with host(show, f"file:{take}", first) as running:
        running.open()
        go(running, "1")
        running.process.kill()
        running.wait()
    socket = Path(os.environ["BEAMCTL_RUNTIME"])
    assert list(socket.glob("*.sock")), "nothing was left behind, so nothing was shown"
    assert not answers(show)
    wait_for(take.exists, "the engine to end by itself and complete its file")
    assert not recorded(take)[-1].any()

    with host(show, "null", second) as running:
        running.open()
        go(running, "1")
        assert running.stop() == 0
    assert replayed(second) == last_hash(second)
    cut_off = beamctl("replay", first)
    assert cut_off.returncode == 0
    assert "cut off, not compared" in cut_off.stdout


@pytest.mark.parametrize("how", [signal.SIGTERM, signal.SIGINT])
def test_a_signal_ends_the_host_by_a_ramp(show: Path, tmp_path: Path, how: signal.Signals) -> None:
    take, journal = tmp_path / "take.wav", tmp_path / "take.jsonl"
    with host(show, f"file:{take}", journal) as running:
        running.open()
        go(running, "1")
        running.pass_by(0.2)
        running.process.send_signal(how)
        assert running.wait() == 0
    assert not (tmp_path / "take.wav.part").exists()

    samples = recorded(take)
    assert samples.shape[1] == FEEDS
    closing = told(journal, "gate")[-1]
    assert (closing.args["open"], closing.args["n"]) == (0, RAMP)
    assert records_of(journal)[-1].args["read"] == len(samples)
    assert len(samples) > closing.sample + RAMP
    assert not samples[closing.sample + RAMP :].any()
    unclosed = rendered_without(journal, closing)
    np.testing.assert_array_equal(samples[: closing.sample], unclosed[: closing.sample])
    assert np.abs(unclosed[closing.sample + RAMP :]).max() > 0.001, "the cue was over already"

    sounding = np.abs(unclosed[closing.sample : closing.sample + RAMP]) > 0.001
    window = slice(closing.sample, closing.sample + RAMP)
    gain = samples[window][sounding] / unclosed[window][sounding]
    assert np.diff(gain).max() < 1e-4, "the ramp goes down only"
    assert gain[0] > 0.999
    assert gain[-1] < 0.01


def rendered_without(journal: Path, left_out: Record) -> Samples:
    """What would have left without one record."""
    loaded, (stream,) = streams_of(journal)
    stream.records.remove(left_out)
    return rendered(loaded, [stream])


def test_stopping_what_does_not_run_is_said(show: Path) -> None:
    done = beamctl("host", show, "--stop")
    assert done.returncode == 4
    assert done.stderr.splitlines()[0] == f"beamctl: no host runs {show}"


def test_nonsense_on_the_line_leaves_the_host_running(show: Path, tmp_path: Path) -> None:
    with host(show, "null", tmp_path / "take.jsonl") as running:
        for message in NONSENSE:
            # or the end of the line, of a message too long even while it is sent
            cut = contextlib.suppress(EOFError, ConnectionError)
            with cut, Client(socket_address(show)) as stranger:
                stranger.send_bytes(message)
                assert stranger.poll(SOON_S), message
                assert b"bad-type" in stranger.recv_bytes(), message
            assert running.snapshot().output == "SHUT", message
        assert running.stop() == 0
    assert not told(tmp_path / "take.jsonl", "tail")


NONSENSE = (
    b"",
    b"\xff\x00",
    b"[]",
    b"{}",
    b'{"do": "act"}',
    b'{"do": "act", "name": "go", "arguments": []}',
    b'{"do": "act", "name": "go", "arguments": {"ref": []}}',
    b'{"do": "act", "name": [], "arguments": {}}',
    b'{"do": "act", "name": "tail", "arguments": {"fall_s": "long"}}',
    b'{"do": "act", "name": "tail", "arguments": {"fall_s": NaN}}',
    b'{"do": "act", "name": "tail", "arguments": {"who": "\\ud800"}}',
    b'{"do": "nothing known"}',
    b'{"do": "edit", "edit": {"label": "none", "steps": []}}',
    b'{"do": "history", "what": "rewrite"}',
    b'{"do": "log", "most": "all"}',
    b"[" * 50_000,
    b" " * 100_000,
)
