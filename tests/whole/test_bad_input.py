"""What people get wrong in a show folder: every command says it in one way, and touches nothing."""

from __future__ import annotations

import hashlib
import os
import subprocess
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pytest
from jackserver import SINK, jack_server
from support.running import COMMAND, STARTS_S
from support.smallshow import RATE_HZ, write_show

Breaks = Callable[[Path], object]


def swap(file: str, old: str, new: str) -> Breaks:
    """Replaces the only `old` of a file."""

    def breaks(show: Path) -> None:
        text = (show / file).read_text()
        assert text.count(old) == 1
        (show / file).write_text(text.replace(old, new))

    return breaks


def zeros(file: str, size: int) -> Breaks:
    """Makes a file of `size` zero bytes."""

    def breaks(show: Path) -> None:
        (show / file).write_bytes(b"")
        os.truncate(show / file, size)

    return breaks


# name: what is done to the show, and the one line that must be said of it
CASES: dict[str, tuple[Breaks, str]] = {
    "a missing sound": (
        swap("sheet.toml", 'sound = "tone.wav"\nloop', 'sound = "tune.wav"\nloop'),
        'sheet.toml:15 cue 1 act 1 sound: "tune.wav", no such file in sounds/; '
        'did you mean "tone.wav"?',
    ),
    "an unknown key": (
        swap("sheet.toml", 'law = "ssb"', 'lay = "ssb"'),
        "sheet.toml:18 cue 1 act 1 lay: unknown key, did you mean law?",
    ),
    "an unknown seat": (
        swap("sheet.toml", 'seat = "A4"', 'seat = "F4"'),
        'sheet.toml:35 cue 2 act 2 seat: "F4", no such seat; '
        'expected one of "A1", "A2", "A3", "A4"',
    ),
    "a reference used twice": (
        swap("sheet.toml", 'ref = "2"', 'ref = "1"'),
        'sheet.toml:23 cue 1 ref: "1" is the name of an earlier cue',
    ),
    "two polarities on one feed": (
        swap("strip.csv", "-4.0,-4.0,2,-1", "-4.0,-4.0,2,1"),
        "strip.csv:5 polarity: 1, expected -1 as in line 4 on the same feed 2",
    ),
    "a number that is none": (
        swap("strip.csv", "4.0,4.0,3,1,0,30,0\n4.0", "4.0,4.0,3,1,0,nan,0\n4.0"),
        'strip.csv:6 phase_deg: "nan", expected a number from -360 to 360, in degrees',
    ),
    "an empty text": (zeros("rig.toml", 0), "rig.toml: empty"),
    "an empty sound": (
        zeros("sounds/tone.wav", 0),
        'sheet.toml:15 cue 1 act 1 sound: "tone.wav": empty',
    ),
    "an enormous text": (
        zeros("house.toml", 200_000_000),
        "house.toml: 200 MB, expected a text of 4 MB or less",
    ),
    "no text at all": (zeros("sheet.toml", 1000), "sheet.toml: holds zero bytes, so it is no text"),
}


def state_of(folder: Path) -> dict[str, tuple[int, str]]:
    """Time of change and content of everything in a folder."""
    found = {}
    for path in sorted(folder.rglob("*")):
        content = b"" if path.is_dir() else path.read_bytes()
        found[str(path)] = path.stat().st_mtime_ns, hashlib.sha256(content).hexdigest()
    return found


def run_all(show: Path, output: Path) -> dict[str, subprocess.CompletedProcess[str]]:
    """Every command that opens a show, two at a time."""
    commands = {
        "inspect": ["inspect", str(show)],
        "render": ["render", str(show), "--for", "1", "-o", str(output)],
        "host": ["host", str(show)],
        "desk": ["desk", str(show)],
    }

    def run(arguments: list[str]) -> subprocess.CompletedProcess[str]:
        return subprocess.run(
            [*COMMAND, *arguments],
            stdin=subprocess.DEVNULL,
            capture_output=True,
            text=True,
            timeout=STARTS_S,
        )

    with ThreadPoolExecutor(2) as pool:
        return dict(zip(commands, pool.map(run, commands.values()), strict=True))


@pytest.mark.parametrize("case", CASES)
def test_every_command_says_what_is_wrong(tmp_path: Path, case: str) -> None:
    show = write_show(tmp_path / "small")
    breaks, said = CASES[case]
    breaks(show)
    before = state_of(show)
    for command, done in run_all(show, tmp_path / "out.wav").items():
        assert done.returncode == 2, command
        assert "Traceback" not in done.stdout + done.stderr
        if command == "inspect":
            lines = [line for line in done.stdout.splitlines() if line.startswith("error: ")]
            errors = [line.removeprefix("error: ") for line in lines]
        else:
            assert done.stdout == "", f"{command} drew before it refused"
            first, *lines = done.stderr.splitlines()
            assert first.startswith(f"beamctl: {show} cannot be played: "), command
            errors = [line.removeprefix("  ") for line in lines]
        assert [e for e in errors if e.startswith(said)], f"{command}: {errors}"
        assert len(errors) == 1, f"{command}: {errors}"
    assert state_of(show) == before
    assert sorted(path.name for path in tmp_path.iterdir()) == ["small"]


def test_a_folder_that_is_not_there_is_said(tmp_path: Path) -> None:
    show = tmp_path / "no such show"
    for command, done in run_all(show, tmp_path / "out.wav").items():
        assert done.returncode == 2, command
        assert f"{show}: there is no such folder" in done.stdout + done.stderr, command
        assert "Traceback" not in done.stderr
    assert not list(tmp_path.iterdir())


def refused_sink(show: Path, sink: str, code: int, env: dict[str, str] | None = None) -> list[str]:
    """What `host` says of a sink that it cannot have; it must end by itself, with `code`."""
    done = subprocess.run(
        [*COMMAND, "host", str(show), "--sink", sink],
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        timeout=STARTS_S,
        env=env,
    )
    assert done.returncode == code, done.stdout + done.stderr
    assert "Traceback" not in done.stderr
    return done.stderr.splitlines()


def test_a_sink_that_is_not_there_ends_the_host(tmp_path: Path) -> None:
    show = write_show(tmp_path / "small")
    first, *_ = refused_sink(show, "no such sink", 4)
    assert first == "beamctl: no sink is called 'no such sink'"
    first, *_ = refused_sink(show, f"file:{tmp_path}/none/take.wav", 4)
    assert first.startswith(f"beamctl: {tmp_path}/none/take.wav cannot be written")


@pytest.mark.real
def test_a_rate_that_the_sink_does_not_offer_ends_the_host(tmp_path: Path) -> None:
    show = write_show(tmp_path / "small")
    before = state_of(show)
    with jack_server(96_000, 1024, 2, 32) as server:
        first, *rest = refused_sink(show, SINK, 6, server.env)
    assert first.startswith(
        f"beamctl: {SINK}: needed 20 channels at {RATE_HZ} Hz, offered 96000 Hz"
    )
    assert len(rest) == 1
    assert state_of(show) == before
