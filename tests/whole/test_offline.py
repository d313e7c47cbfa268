"""Render and replay from the command line: the same samples each time, or one clear refusal."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
import soundfile
from support.running import COMMAND, STARTS_S, beamctl, last_hash
from support.smallshow import FEEDS, RATE_HZ, write_show

from beamctl.errors import ShowError
from beamctl.host.document import Document, Loaded
from beamctl.host.journal import Journal, read_journal
from beamctl.host.loading import Hashes
from beamctl.host.offline import left, play_through
from beamctl.show.records import Record

SHORT = ("--go=1@0", "--go=2@0.05", "--for=0.25")


@pytest.fixture
def show(tmp_path: Path) -> Path:
    return write_show(tmp_path / "small")


def render(show: Path, output: Path, *more: str | Path) -> dict[str, object]:
    """What `render --json` says of a short piece."""
    done = beamctl("render", show, *SHORT, "--json", "-o", output, *more)
    assert done.returncode == 0, done.stderr
    told: dict[str, object] = json.loads(done.stdout)
    return told


def test_rendering_twice_gives_the_same_file(show: Path, tmp_path: Path) -> None:
    first = render(show, tmp_path / "a.wav")
    second = render(show, tmp_path / "b.wav")
    assert first["sha256"] == second["sha256"]
    assert (tmp_path / "a.wav").read_bytes() == (tmp_path / "b.wav").read_bytes()
    assert soundfile.info(tmp_path / "a.wav").frames == first["samples"] == RATE_HZ // 4
    assert soundfile.read(tmp_path / "a.wav")[0].any()


def test_code_just_compiled_and_code_loaded_give_the_same_samples(
    show: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Else the first evening after an update could not be replayed."""
    monkeypatch.setenv("BEAMCTL_CACHE", str(tmp_path / "cache"))
    compiled = render(show, tmp_path / "a.wav")
    assert list((tmp_path / "cache").rglob("*.nbc")), "nothing was compiled"
    loaded = render(show, tmp_path / "b.wav")
    assert compiled["sha256"] == loaded["sha256"]


@pytest.mark.parametrize(
    ("length", "frames"), [("12345smp", 12_345), ("0.1", RATE_HZ // 10), ("1smp", 1)]
)
def test_the_length_is_exact(show: Path, tmp_path: Path, length: str, frames: int) -> None:
    done = beamctl("render", show, "--for", length, "-o", tmp_path / "out.wav")
    assert done.returncode == 0, done.stderr
    info = soundfile.info(tmp_path / "out.wav")
    assert (info.frames, info.channels, info.samplerate) == (frames, FEEDS, RATE_HZ)


def test_a_journal_of_a_render_replays(show: Path, tmp_path: Path) -> None:
    journal = tmp_path / "kept.jsonl"
    told = render(show, tmp_path / "a.wav", "--journal", journal)
    done = beamctl("replay", journal, "-o", tmp_path / "again.wav")
    assert done.returncode == 0, done.stderr
    assert done.stdout.split()[-1] == told["sha256"] == last_hash(journal)
    assert (tmp_path / "a.wav").read_bytes() == (tmp_path / "again.wav").read_bytes()


def test_a_journal_that_tells_other_samples_is_seen(show: Path, tmp_path: Path) -> None:
    journal = tmp_path / "kept.jsonl"
    render(show, tmp_path / "a.wav", "--journal", journal)
    text = journal.read_text()
    assert '"power":0.01,' in text
    journal.write_text(text.replace('"power":0.01,', '"power":0.02,'))
    done = beamctl("replay", journal)
    assert done.returncode == 1
    assert "DIFFERENT SAMPLES" in done.stdout


def test_a_journal_keeps_the_texts_it_was_made_from(show: Path, tmp_path: Path) -> None:
    journal = tmp_path / "kept.jsonl"
    told = render(show, tmp_path / "a.wav", "--journal", journal)
    for file in ("sheet.toml", "rig.toml", "house.toml", "strip.csv"):
        (show / file).write_text("format = 1\n")
    done = beamctl("replay", journal)
    assert done.returncode == 0, done.stderr
    assert done.stdout.split()[-1] == told["sha256"]


@pytest.mark.parametrize("file", ["sheet.toml", "rig.toml", "house.toml", "strip.csv"])
def test_of_an_older_journal_the_show_must_not_have_changed(
    show: Path, tmp_path: Path, file: str
) -> None:
    journal = tmp_path / "kept.jsonl"
    keep(show, journal)
    first, _, rest = journal.read_text().partition("\n")
    row = {key: value for key, value in json.loads(first).items() if key != "texts"}
    journal.write_text(f"{json.dumps(row)}\n{rest}")
    with (show / file).open("a") as text:
        text.write("\n")
    done = beamctl("replay", journal)
    assert done.returncode == 2
    assert f"{file} changed since kept.jsonl" in done.stderr
    assert "Traceback" not in done.stderr


def test_a_sound_changed_since_is_not_replayed(show: Path, tmp_path: Path) -> None:
    journal = tmp_path / "kept.jsonl"
    keep(show, journal)
    shutil.copy(show / "sounds/burst.wav", show / "sounds/tone.wav")
    done = beamctl("replay", journal)
    assert done.returncode == 2
    assert "tone.wav changed since kept.jsonl" in done.stderr


def keep(show: Path, journal: Path) -> None:
    """A journal of a short piece, with a hash of nothing, made without rendering."""
    document = Document.of(show)
    found = document.load()
    loaded = Loaded(found, Hashes().of(found))
    kept = Journal(journal, loaded, document.with_lists(found.rig), "null")
    kept.write([Record(0, "stream")])
    kept.write(play_through(found, [(0, "1"), (9_600, "2")], 48_000))
    kept.write([left(48_000, "0" * 64)])
    kept.close()


def test_a_journal_cut_anywhere_keeps_its_whole_lines(show: Path, tmp_path: Path) -> None:
    journal, cut = tmp_path / "kept.jsonl", tmp_path / "cut.jsonl"
    sheet = show / "sheet.toml"  # a letter of two bytes may be cut too
    sheet.write_text(sheet.read_text(encoding="utf-8").replace("burst", "möwe"), encoding="utf-8")
    (show / "sounds/burst.wav").rename(show / "sounds/möwe.wav")
    keep(show, journal)
    data = journal.read_bytes()
    header, records = read_journal(journal)
    whole = list(records)
    assert len(whole) > 10
    assert "möwe".encode() in data.split(b"\n", 1)[1]
    for size in range(len(data) + 1):
        cut.write_bytes(data[:size])
        lines = data[:size].count(b"\n")
        if size < data.index(b"\n"):
            with pytest.raises(ShowError, match="not a journal"):
                read_journal(cut)
            continue
        read, rest = read_journal(cut)
        assert read == header
        found = list(rest)
        ended = size < len(data) and data[size : size + 1] == b"\n"  # only its line end is missing
        assert found == whole[: max(lines - 1, 0) + (ended and lines > 0)], size


@pytest.mark.parametrize("gone", [20, 300])
def test_a_journal_without_its_end_is_rendered_and_not_compared(
    show: Path, tmp_path: Path, gone: int
) -> None:
    journal = tmp_path / "kept.jsonl"
    keep(show, journal)
    journal.write_bytes(journal.read_bytes()[:-gone])
    done = beamctl("replay", journal)
    assert done.returncode == 0, done.stderr
    assert "cut off, not compared" in done.stdout


@pytest.mark.parametrize("what", ["header only", "garbage", "empty", "missing", "folder"])
def test_what_cannot_be_replayed_is_refused(show: Path, tmp_path: Path, what: str) -> None:
    journal = tmp_path / "kept.jsonl"
    keep(show, journal)
    data = journal.read_bytes()
    if what == "header only":
        journal.write_bytes(data.splitlines(keepends=True)[0])
    elif what == "garbage":
        journal.write_bytes(bytes(range(256)) * 10)
    elif what == "empty":
        journal.write_bytes(b"")
    else:
        journal.unlink()
        if what == "folder":
            journal.mkdir()
    out = tmp_path / "out.wav"
    done = beamctl("replay", journal, "-o", out)
    assert done.returncode == 2
    refusal(done)
    assert str(journal) in done.stderr
    assert not out.exists()
    assert not (tmp_path / "out.wav.part").exists()


def test_damage_before_the_end_is_told_with_its_line(show: Path, tmp_path: Path) -> None:
    journal = tmp_path / "kept.jsonl"
    keep(show, journal)
    lines = journal.read_text().splitlines()
    lines[3] = lines[3][:-4]
    journal.write_text("\n".join(lines) + "\n")
    done = beamctl("replay", journal)
    assert done.returncode == 2
    assert refusal(done) == f"beamctl: {journal}:4: not a record"


def refusal(done: subprocess.CompletedProcess[str]) -> str:
    """The one line that says what is wrong; what to do follows it, indented."""
    assert "Traceback" not in done.stderr
    assert done.stdout == ""
    first, *rest = done.stderr.splitlines()
    assert first.startswith("beamctl: ")
    assert all(line.startswith("  ") for line in rest), done.stderr
    return first


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("--go=99@0", "--for=1"), "--go 99@0smp refused, unknown-ref"),
        (("--go=1", "--for=1"), "--go 1: no time"),
        (("--go=1@", "--for=1"), "'' is no time"),
        (("--go=1@soon", "--for=1"), "'soon' is no time"),
        (("--go=1@nan", "--for=1"), "'nan' is no time"),
        (("--go=1@inf", "--for=1"), "'inf' is no time"),
        (("--go=1@-1", "--for=1"), "'-1' is before the start"),
        (("--go=1@1.5smp", "--for=1"), "'1.5smp' is no time"),
        (("--for=long",), "'long' is no time"),
        (("--for=-1",), "'-1' is before the start"),
        (("--go=1@0", "--go=1@0.1", "--for=1"), "--go 1@19200smp refused, busy"),
    ],
)
def test_what_cannot_be_rendered_is_said_and_leaves_no_file(
    show: Path, tmp_path: Path, arguments: tuple[str, ...], said: str
) -> None:
    before = set(tmp_path.iterdir())
    journal = tmp_path / "kept.jsonl"
    out = tmp_path / "out.wav"
    done = beamctl("render", show, *arguments, "-o", out, "--journal", journal)
    assert done.returncode == 2
    assert said in refusal(done)
    assert set(tmp_path.iterdir()) == before


def test_an_output_that_cannot_be_written_is_said(show: Path, tmp_path: Path) -> None:
    for place in (tmp_path / "no such folder/out.wav", tmp_path, show / "rig.toml/out.wav"):
        done = beamctl("render", show, *SHORT, "-o", place)
        assert done.returncode == 4
        assert str(place) in refusal(done)


def test_a_full_disk_ends_a_render_with_one_line(show: Path, tmp_path: Path) -> None:
    resource = pytest.importorskip("resource")
    program = (
        "import resource, signal, sys; from beamctl.cli import main;"
        "signal.signal(signal.SIGXFSZ, signal.SIG_IGN);"
        "resource.setrlimit(resource.RLIMIT_FSIZE, (2_000_000, resource.RLIM_INFINITY));"
        "main(sys.argv[1:])"
    )
    assert resource.RLIMIT_FSIZE is not None
    out = tmp_path / "out.wav"
    done = subprocess.run(
        [sys.executable, "-c", program, "render", str(show), *SHORT, "-o", str(out)],
        capture_output=True,
        text=True,
        timeout=STARTS_S,
    )
    assert done.returncode == 4
    assert f"the disk refused samples for {out}" in refusal(done)
    assert not out.exists()


def test_inspect_tells_errors_and_warnings_by_its_exit_code(show: Path) -> None:
    assert beamctl("inspect", show).returncode == 0
    (show / "guard.toml").unlink()
    warned = beamctl("inspect", show)
    assert warned.returncode == 1
    assert warned.stdout.startswith("warning: guard.toml: missing")
    (show / "sounds/tone.wav").unlink()
    wrong = beamctl("inspect", show, "--json")
    assert wrong.returncode == 2
    problems = json.loads(wrong.stdout)
    assert {p["severity"] for p in problems} == {"error", "warning"}
    assert {"file", "line", "key", "what", "severity"} == set(problems[0])


def test_nothing_is_drawn_where_nobody_looks(show: Path, tmp_path: Path) -> None:
    done = subprocess.run(
        [*COMMAND, "render", str(show), *SHORT, "-o", str(tmp_path / "out.wav")],
        capture_output=True,
        timeout=STARTS_S,
        env={**os.environ, "TERM": "xterm"},
    )
    assert done.returncode == 0
    assert b"\x1b" not in done.stdout + done.stderr
    assert b"\r" not in done.stdout + done.stderr
