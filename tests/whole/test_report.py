"""`beamctl report`: the figures are the journal's own, and whatever is whole of it is told."""

from __future__ import annotations

import csv
import json
import re
from datetime import UTC, datetime, timedelta
from itertools import pairwise
from pathlib import Path

import pytest
from support.journals import (
    BLOCKS,
    CAPS,
    CLASSES,
    HEADER,
    HOLDS,
    SECONDS,
    block,
    cap,
    evening,
    guard,
    left,
    lines,
    output,
    refused,
    run,
    write,
)
from support.running import beamctl, host, wait_for
from support.smallshow import write_show

from beamctl.show.records import Record


@pytest.fixture
def log(tmp_path: Path) -> Path:
    return write(tmp_path / "evening.jsonl", evening())


@pytest.fixture
def made(log: Path) -> Path:
    """The stem of a text, a table and a picture of that evening."""
    done = run(log, "-o", log.parent / "filed")
    assert done.exit_code == 0, done.output
    return log.parent / "filed"


def part(text: str, title: str) -> list[str]:
    """The lines of a part of the text, long ones joined again."""
    lines = text.splitlines()
    named = enumerate(pairwise(lines))
    start = next(
        n for n, (line, under) in named if under == "-" * len(line) and line.startswith(title)
    )
    rest = lines[start + 2 :]
    under = (n for n, line in enumerate(rest) if line and not line.strip("-"))
    body = rest[: next(under, len(rest) + 1) - 1]
    return re.sub(r"\n {15}(?! )", " ", "\n".join(body).strip("\n")).splitlines()


# -- figures ---------------------------------------------------------------------------------------


def test_the_table_holds_every_reading_of_every_block(made: Path) -> None:
    with made.with_suffix(".csv").open(newline="", encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    asked = [
        (record.sample, name, row)
        for record in evening()
        if record.what == "guard"
        for name, row in record.args["blocks"].items()
    ]
    assert len(rows) == len(asked) == 3 * SECONDS
    for row, (sample, name, figures) in zip(rows, asked, strict=True):
        assert (int(row["sample"]), row["block"], row["class"]) == (sample, name, CLASSES[name])
        assert float(row["second"]) == sample / 192_000
        level = figures["level_db"]
        assert row["level_db"] == ("" if level is None else str(level))
        headroom = "" if level is None else round(figures["cap_db"] - level, 3)
        assert row["headroom_db"] == str(headroom)
        assert float(row["cap_db"]) == figures["cap_db"]
        assert float(row["band_hz"]) == figures["band_hz"]
        assert float(row["dose_pct"]) == figures["dose_pct"]
        assert (row["seat"], row["dose_seat"]) == (figures["seat"], figures["dose_seat"])
    assert rows[0]["time"].endswith("+00:00") or rows[0]["time"][-6] in "+-"


def test_findings_are_sums_of_the_records(made: Path) -> None:
    told = [record.args["blocks"] for record in evening() if record.what == "guard"]
    heard = [row for blocks in told for row in blocks.values() if row["level_db"] is not None]
    worst = min(heard, key=lambda row: row["cap_db"] - row["level_db"])
    over = sum(
        any(b["level_db"] is not None and b["level_db"] > b["cap_db"] for b in blocks.values())
        for blocks in told
    )
    most = max((row["dose_pct"], row["dose_seat"]) for blocks in told for row in blocks.values())
    found = "\n".join(part(made.with_suffix(".txt").read_text(), "WHAT WAS FOUND"))
    headroom = worst["cap_db"] - worst["level_db"]
    side = "under" if headroom >= 0.0 else "OVER"
    assert f"{worst['seat']}, {worst['level_db']:.2f} dB in the 40 kHz band" in found
    assert f"{abs(headroom):.2f} dB {side} its cap of {worst['cap_db']:.1f} dB" in found
    assert f"Over cap   {over} of {SECONDS} readings" in found
    assert f"at most {most[0]:.1f} % of the cap for 1 h: {most[1]} at" in found
    for panel in ("prow", "stern"):
        those = [hold for hold in HOLDS if hold[0] == panel]
        total_s = sum(end - begin for _, begin, end, _ in those)
        most_db = max(held_db for *_, held_db in those)
        times = f"{len(those)} time{'' if len(those) == 1 else 's'}"
        assert f"{panel} {times}, {total_s:g} s in all; most {most_db:.1f} dB" in found
    assert "Refused    5 requests" in found
    assert "Cues       2 GOs" in found
    assert "Faults     2 (" in found
    assert f"open for {SECONDS // 60} min {SECONDS % 60} s, {SECONDS} readings" in found


def test_blocks_are_told_by_their_worst_reading_and_most_dose(made: Path) -> None:
    lines = part(made.with_suffix(".txt").read_text(), "LEVEL AND DOSE BY SEAT BLOCK")
    for name, line in zip(BLOCKS, lines[1:], strict=True):
        rows = [r.args["blocks"][name] for r in evening() if r.what == "guard"]
        heard = [row for row in rows if row["level_db"] is not None]
        worst = min(heard, key=lambda row: row["cap_db"] - row["level_db"])
        level_db, cap_db = worst["level_db"], worst["cap_db"]
        dose = max(row["dose_pct"] for row in rows)
        seat = BLOCKS[name][0]
        figures = [seat, "40", "kHz", f"{level_db:.2f}", f"{cap_db:.1f}"]
        words = line.split()
        assert words[:2] == [name, CLASSES[name]]
        assert words[3:] == [*figures, f"{cap_db - level_db:.2f}", f"{dose:.1f}", seat]


def test_the_course_is_told_by_the_worst_of_each_minute(made: Path) -> None:
    """A thousand seconds take stretches of a minute to stay within two dozen lines."""
    lines = part(made.with_suffix(".txt").read_text(), "LEVEL AND DOSE OVER TIME")
    assert "In every 1 min:" in lines[0]
    start = next(n for n, line in enumerate(lines) if line.split()[:1] == ["pit"])
    told = [line.split() for line in lines[start + 1 : start + 1 + -(-SECONDS // 60)]]
    readings = [r.args["blocks"]["pit"] for r in evening() if r.what == "guard"]
    for minute, words in enumerate(told):
        those = readings[60 * minute : 60 * minute + 60]
        heard = [row["level_db"] for row in those if row["level_db"] is not None]
        assert words[4:7] == [f"{max(heard):.2f}", "110.0", f"{110.0 - max(heard):.2f}"]
        assert words[7] == f"{max(row['dose_pct'] for row in those):.1f}"


def test_every_event_is_listed_with_its_time_cause_and_name(made: Path) -> None:
    text = made.with_suffix(".txt").read_text()
    held = part(text, "PANELS HELD UNDER THEIR CAP")
    assert len(held) == len(HOLDS)
    for line, (panel, begin, end, held_db) in zip(held, HOLDS, strict=True):
        said = f"{panel}, cue 12.5: held by up to {held_db:.1f} dB for {end - begin:g} s"
        assert said in line
        assert clock(begin) in line
        assert "stalls B4, 100.40 dB in the 40 kHz band" in line
    trip, cleared = part(text, "TRIPS")
    assert clock(400) in trip
    assert "prow sends sound below 17.8 kHz" in trip
    assert f"{clock(405)}" in cleared
    assert "cleared by anna with the typed word; not opened again" in cleared
    (refusal,) = part(text, "REFUSED")
    assert "go refused, not-armed: SHUT: * then Enter" in refusal
    assert "(10.0.0.4:5000); 5 times" in refusal
    first, second = part(text, "CUES")
    assert first.split() == [clock(200), "GO", "1", "rails", "hum", "(desk)"]
    assert second.split()[:3] == [clock(300), "GO", "12.5"]
    assert [line.split()[1] for line in part(text, "FAULTS AND DRY RINGS")] == ["the", "clip"]


def clock(second: float) -> str:
    """Time of day here, of a journal whose first sample left at 19:00:08 UTC."""
    moment = datetime(2026, 12, 1, 19, 0, 8, tzinfo=UTC) + timedelta(seconds=second)
    local = moment.astimezone()
    return f"{local:%H:%M:%S}.{local.microsecond // 100_000}"


def test_what_held_and_what_it_was_made_of_is_told(made: Path) -> None:
    text = made.with_suffix(".txt").read_text()
    caps = part(text, "CAPS")
    for name, seats, crew in (("20", "70.0", "75.0"), ("40", "100.0", "110.0")):
        assert [name, "kHz", seats, "dB", crew, "dB"] in [line.split() for line in caps]
    assert any("A. Venue, 2026-11-30" in line for line in caps)
    assert any("irpa-1984-public: IRPA/INIRC" in line and "Check" in line for line in caps)
    assert part(text, "PANELS") == [
        "  prow         measured: prow-2026-11-30.toml; no margin",
        "  stern        NOT MEASURED; counted 10.0 dB louder",
    ]
    assert "21.5 °C, 45.0 %, 101.2 kPa" in part(text, "AIR")[0]
    for digest in (*HEADER["digests"].values(), "e5" * 32):
        assert digest in text
    assert "Keep heads out of the beam" in text
    assert max(map(len, text.splitlines())) <= 100


def test_who_signed_and_why_not_is_found_first(tmp_path: Path) -> None:
    unsigned = {"signed_by": "", "signed_on": "", "unsigned": "never signed"}
    log = write(tmp_path / "log.jsonl", [Record(0, "caps", args={**CAPS, **unsigned}), left(3)])
    done = run(log, "-o", tmp_path / "a.txt")
    assert done.output.splitlines()[0] == "! Signature  UNSIGNED: never signed"
    assert "UNSIGNED: never signed" in part((tmp_path / "a.txt").read_text(), "CAPS")[0]


def test_time_open_without_a_reading_is_found(tmp_path: Path) -> None:
    row = {"stalls": block("B4", 90.0, 100.0, 0.0)}
    watched = [output(0, "SHUT", "OPEN", "arm"), *(guard(s, row) for s in range(60))]
    for name, until, asks in (("all", 60, False), ("most", 75, True)):
        end = output(until, "OPEN", "COLD", "sink-close")
        done = run(write(tmp_path / name, [*watched, end]), "-o", tmp_path / f"{name}.txt")
        assert ("15 s WITHOUT ONE" in done.output) is asks
        assert "10.00 dB under its cap" in done.output
        assert "  Over cap   0 of 60 readings" in done.output


def test_a_name_that_would_steer_a_terminal_is_made_plain(tmp_path: Path) -> None:
    log = write(tmp_path / "log.jsonl", [refused(1, "\x1b[31m\n\x9bevil"), left(3)])
    assert run(log, "-o", tmp_path / "a").exit_code == 0
    text = (tmp_path / "a.txt").read_text()
    assert "(?[31m??evil)" in text
    assert all(c.isprintable() or c == "\n" for c in text)


# -- what is left of a journal ---------------------------------------------------------------------


def test_a_journal_cut_at_any_byte_tells_what_is_whole(tmp_path: Path) -> None:
    whole = lines(
        [Record(0, "caps", args=CAPS), cap(1, "prow", 1, 0.5), refused(2, "desk"), left(3)]
    )
    ends = [n + 1 for n, byte in enumerate(whole) if byte == ord("\n")]
    log = tmp_path / "cut.jsonl"
    for length in range(len(whole) + 1):
        log.write_bytes(whole[:length])
        done = run(log, "-o", tmp_path / "cut.txt", "--force")
        assert done.exception is None or isinstance(done.exception, SystemExit), length
        if length < ends[0] - 1:
            assert done.exit_code == 2
            assert "not a journal" in done.output
            continue
        assert done.exit_code == (0 if length == len(whole) else 1)
        assert ("it ends in the middle of a line" in done.output) == (length not in ends)
        assert ("! Held" in done.output) == (length >= ends[2] - 1)
        assert f"Refused    {int(length >= ends[3] - 1)} request" in done.output
        assert ("! Journal    not closed" in done.output) == (length < ends[4] - 1)


def test_a_journal_damaged_in_its_middle_tells_what_comes_before(tmp_path: Path) -> None:
    log = tmp_path / "log.jsonl"
    log.write_bytes(lines([refused(1, "desk")]) + b"\0\0\n" + lines([refused(2, "desk")])[-200:])
    done = run(log, "-o", tmp_path / "a.txt")
    assert done.exit_code == 1
    assert "log.jsonl:3: not a record: all after that is NOT in this report" in done.output
    assert "Refused    1 request" in done.output


@pytest.mark.parametrize(
    "content",
    [None, b"", b"\n", b"hello\n", b'{"journal": 1}\n', b"[]\n", b'{"journal": 2}\n', b"\xff\xfe"],
)
def test_what_is_no_journal_gets_one_clear_line(tmp_path: Path, content: bytes | None) -> None:
    log = tmp_path / "what"
    if content is not None:
        log.write_bytes(content)
    done = run(log, "-o", tmp_path / "a")
    assert done.exit_code == 2
    assert done.output.startswith(f"beamctl: {log}")
    assert len(done.output.splitlines()) == 2
    assert sorted(tmp_path.iterdir()) == ([] if content is None else [log])


# -- journals of the program itself ----------------------------------------------------------------


def test_a_render_is_told_from_its_first_sample(tmp_path: Path) -> None:
    show, log = write_show(tmp_path / "small"), tmp_path / "kept.jsonl"
    rendered = beamctl(
        *("render", show, "--go=1@0", "--go=2@0.05", "--for=0.25"),
        *("-o", tmp_path / "a.wav", "--journal", log, "--json"),
    )
    assert rendered.returncode == 0, rendered.stderr
    done = beamctl("report", log, "-o", tmp_path / "r")
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    text = (tmp_path / "r.txt").read_text()
    assert "rendered without a clock" in text
    assert [line.split()[:3] for line in part(text, "CUES")] == [
        ["0:00:00.0", "GO", "1"],
        ["0:00:00.0", "GO", "2"],
    ]
    assert json.loads(rendered.stdout)["sha256"] in text
    for digest in json.loads(log.read_text().splitlines()[0])["digests"].values():
        assert digest in text


@pytest.mark.timeout(300)
def test_a_show_that_ran_is_told_in_its_own_time(tmp_path: Path) -> None:
    show, log = write_show(tmp_path / "small"), tmp_path / "live.jsonl"
    with host(show, "null", log) as running:
        running.open()
        running.act("go", ref="1")
        wait_for(lambda: running.snapshot().states.get("1") == "running", "cue 1")
        running.act("hush")
        assert running.stop() == 0
    done = beamctl("report", log, "-o", tmp_path / "r")
    assert done.returncode == 0, done.stdout + done.stderr
    text = (tmp_path / "r.txt").read_text()
    assert "Cues       1 GO" in done.stdout
    assert [line.split()[1:3] for line in part(text, "CUES")] == [["GO", "1"]]
    assert "OPEN to HUSHED: hush" in text
