"""Signing a show: what its seal covers, that every edit of that shows, and what is written."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path

import pytest
from support.smallshow import write_show

from beamctl.errors import DeviceError, ShowError
from beamctl.files.measurement import (
    MeasuredFeed,
    Measurement,
    panel_digest,
    write_measurement,
)
from beamctl.files.reader import load_show, read_show
from beamctl.files.signing import seal_of, sign
from beamctl.show.house import AirSpec
from beamctl.show.show import Show

BY, ON = "M. Rail, the Playhouse", "2031-02-03"
GUARD = """\
# what the venue allows
format = 1
seats_db = 100   # at any seat

# crew stand nearer
crew_table = "acgih-ceiling"
crew_db = 114
averaging_s = 5.0
uncalibrated_margin_db = 12
"""
EDITED = f"guard, rig or house edited since {BY} signed it on {ON}"


@pytest.fixture
def show(tmp_path: Path) -> Path:
    """A show of two panels, one of them from a cell list and one of them measured; signed."""
    folder = write_show(tmp_path / "small")
    (folder / "guard.toml").write_text(GUARD)
    _swap(folder, "house.toml", 'rows = ["A"]', 'rows = ["A", "B"]')
    written = _measure(load_show(folder), "square")
    _swap(folder, "rig.toml", "tilt_deg = -17.0\ngrid", f'measured = "{written}"\ngrid')
    sign(folder, BY, ON, seal_of(folder))
    return folder


def _measure(show: Show, panel: str) -> str:
    """Writes a measurement that the panel passes; its name in the folder."""
    feeds = tuple(MeasuredFeed(feed=n, level_db=90.0) for n in range(1, 17))
    measurement = Measurement(
        panel=panel, date="2031-02-01T15:00:00", by="A. Lamp", sink="a device", passes=True,
        of=panel_digest(show.rig.panel[panel], show.cells[panel]), drive_db=-30.0, mic_m=1.0,
        over_model_db=0.2, air=AirSpec(), feed=feeds,
    )  # fmt: skip
    path = write_measurement(Path(show.folder), measurement, "passed")
    return path.relative_to(show.folder).as_posix()


def _swap(folder: Path, file: str, old: str, new: str) -> None:
    text = (folder / file).read_text()
    assert text.count(old) >= 1
    (folder / file).write_text(text.replace(old, new, 1))


def _swap_last(folder: Path, file: str, old: str, new: str) -> None:
    head, found, tail = (folder / file).read_text().rpartition(old)
    assert found
    (folder / file).write_text(head + new + tail)


def _told(folder: Path) -> list[str]:
    _, problems = read_show(folder)
    return [str(problem) for problem in problems]


def test_a_signed_show_holds_what_was_signed(show: Path) -> None:
    assert _told(show) == []
    found = load_show(show)
    assert found.seal == seal_of(show) == found.guard.signed.digest  # type: ignore[union-attr]
    caps = found.caps
    assert (caps.unsigned, caps.signed_by, caps.signed_on) == ("", BY, ON)
    assert (caps.crew_db[40e3], caps.averaging_s) == (114.0, 5.0)
    assert caps.margin_db == {"square": 0.0, "strip": 12.0}


def test_nothing_but_the_signature_is_written(show: Path) -> None:
    text = (show / "guard.toml").read_text()
    head, own = text.split("\n[signed]\n")
    assert head == GUARD
    assert own == f'by = "{BY}"\non = "{ON}"\ndigest = "{seal_of(show)}"\n'
    assert not [path for path in show.iterdir() if path.name.startswith(".")]


def test_signing_twice_leaves_one_signature(show: Path) -> None:
    before = (show / "guard.toml").read_text()
    sign(show, BY, ON, seal_of(show))
    assert (show / "guard.toml").read_text() == before
    sign(show, 'O\'Neil "Ö" \\', "2031-02-04", seal_of(show))
    signed = load_show(show).guard.signed
    assert signed is not None
    assert (signed.by, signed.on) == ('O\'Neil "Ö" \\', "2031-02-04")
    assert _told(show) == []
    assert (show / "guard.toml").read_text().startswith(GUARD)


@pytest.mark.parametrize(
    "text",
    [
        "format = 1\r\n# eins\r\nseats_db = 90\r\n",
        "format = 1",
        "\ufeffformat = 1\n",
        "format = 1\n\n\n\n",
        'format = 1\n\n[signed]\nby = "a"\non = "b"\ndigest = "c"\n# a last word\n',
    ],
    ids=["CRLF", "no last line end", "byte order mark", "empty lines", "comment after"],
)
def test_the_rest_is_kept_byte_for_byte(show: Path, text: str) -> None:
    (show / "guard.toml").write_bytes(text.encode())
    seal = seal_of(show)
    sign(show, BY, ON, seal)
    written = (show / "guard.toml").read_bytes().decode()
    rest = text.replace('[signed]\nby = "a"\non = "b"\ndigest = "c"\n', "")
    assert written.startswith(rest)
    assert written[len(rest) :].lstrip("\n").startswith("[signed]\n")
    assert seal_of(show) == seal
    assert _told(show) == []


def _lines_of(file: str, line: str) -> Callable[[Path], None]:
    def append(folder: Path) -> None:
        with (folder / file).open("a") as text:
            text.write(line)

    return append


def _edit(file: str, old: str, new: str) -> Callable[[Path], None]:
    return lambda folder: _swap(folder, file, old, new)


EDITS: dict[str, Callable[[Path], None]] = {
    "a row deleted": _edit("house.toml", 'rows = ["A", "B"]', 'rows = ["A"]'),
    "seats turned into crew": _edit("house.toml", '"seats"', '"crew"'),
    "an ear moved": _edit("house.toml", "4.5, 1.2", "4.5, 1.3"),
    "the margin widened": _edit("guard.toml", "margin_db = 12", "margin_db = 10"),
    "the seats' figure raised": _edit("guard.toml", "seats_db = 100", "seats_db = 110"),
    "another table": _edit("guard.toml", "acgih-ceiling", "sweden-1978"),
    "a longer average": _edit("guard.toml", "averaging_s = 5.0", "averaging_s = 60.0"),
    "the level of the cells": lambda folder: _swap_last(folder, "rig.toml", "= 95.0", "= 93.0"),
    "a panel moved": _edit("rig.toml", "[0.5, 0.0, 3.0]", "[0.6, 0.0, 3.0]"),
    "a cell not dead": _edit("strip.csv", "0,0,1\n", "0,0,0\n"),
    "a comment of the guard": _edit("guard.toml", "# crew stand nearer", "# crew stand near"),
    "a comment after the signature": _lines_of("guard.toml", "# agreed\n"),
    "a comment of the rig": _lines_of("rig.toml", "# hung on Monday\n"),
    "a comment of the house": _lines_of("house.toml", "# the balcony is closed\n"),
    "another digest": _edit("guard.toml", 'digest = "', 'digest = "0'),
    "a signature in another form": _edit("guard.toml", '\nby = "', '\nby  = "'),
    "no signature": lambda f: (f / "guard.toml").write_text(GUARD),
    "no guard": lambda f: (f / "guard.toml").unlink(),
}


@pytest.mark.parametrize("what", EDITS)
def test_every_edit_unsigns_and_shows(show: Path, what: str) -> None:
    EDITS[what](show)
    (told,) = _told(show)
    missing = what in ("no signature", "no guard")
    assert ("unsigned" if missing else EDITED) in told
    assert "the tables hold as they are" in told
    caps = load_show(show).caps
    assert caps.unsigned == ("never signed" if missing else EDITED)
    assert caps.signed_by == ""
    assert (caps.seats_db[40e3], caps.averaging_s) == (100.0, 1.0)
    assert caps.crew_db[40e3] == 110.0 and caps.crew_db[20e3] == 75.0
    assert min(caps.margin_db.values()) >= 10.0


def test_what_is_no_part_of_it_unsigns_nothing(show: Path) -> None:
    _lines_of("sheet.toml", "# another note\n")(show)
    _swap(show, "sheet.toml", "trim_db = -20.0", "trim_db = -30.0")
    (show / "wire.toml").write_text("format = 1\n")
    assert _told(show) == []


def test_two_cell_lists_that_change_places_unsign(show: Path) -> None:
    other = (show / "strip.csv").read_text().replace(",0,0,1\n", ",0,0,0\n")
    (show / "other.csv").write_text(other)
    panel = (show / "rig.toml").read_text().split("[panel.strip]")[1]
    second = panel.replace("strip.csv", "other.csv").replace("= 17", "= 21")
    _lines_of("rig.toml", f"[panel.other]{second}")(show)
    sign(show, BY, ON, seal_of(show))
    assert _told(show) == []
    (show / "strip.csv").rename(show / "kept.csv")
    (show / "other.csv").rename(show / "strip.csv")
    (show / "kept.csv").rename(show / "other.csv")
    assert [EDITED in line for line in _told(show)] == [True]


def _measured_name(show: Path) -> Path:
    return show / load_show(show).rig.panel["square"].measured


# what is done, and what is told of the panel; the show cannot be played or signed until mended
CLAIMS: dict[str, tuple[Callable[[Path], object], str]] = {
    "no file": (lambda f: _measured_name(f).unlink(), "missing"),
    "another file": (
        lambda f: _measured_name(f).write_text("format = 1\n"),
        "no measurement of a panel: square-2031-02-01.toml:1 panel: missing",
    ),
    "no text": (lambda f: _measured_name(f).write_bytes(b"\xff"), "not UTF-8"),
    "another panel": (
        lambda f: _swap(f, _measured_name(f).relative_to(f).as_posix(), '"square"', '"strip"'),
        'measures panel "strip"',
    ),
    "the panel changed": (
        _edit("rig.toml", "level_db_30cm_10v = 95.0", "level_db_30cm_10v = 90.0"),
        'the panel was changed since; measure it again, or write measured = ""',
    ),
    "it did not pass": (
        lambda f: _write_rehearsal(_measured_name(f)),
        "a measurement that did not pass: a rehearsal",
    ),
}


def _write_rehearsal(path: Path) -> None:
    text = (
        path.read_text().replace('"a device"', '"null"').replace("passes = true", "passes = false")
    )
    path.write_text(text)


@pytest.mark.parametrize("what", CLAIMS)
def test_a_panel_cannot_be_claimed_measured(show: Path, what: str) -> None:
    breaks, said = CLAIMS[what]
    breaks(show)
    (error,) = [p for p in read_show(show)[1] if p.severity == "error"]
    assert (error.file, error.key) == ("rig.toml", "panel square measured")
    lines = (show / "rig.toml").read_text().splitlines()
    assert lines[(error.line or 0) - 1].startswith("measured = ")
    assert said in error.what
    assert "\n" not in str(error)
    with pytest.raises(ShowError, match="cannot be played: 1 error"):
        load_show(show)


def test_a_measurement_that_changes_in_any_byte_unsigns(show: Path) -> None:
    with _measured_name(show).open("a") as file:
        file.write("# typed\n")
    (told,) = _told(show)
    assert EDITED in told
    assert load_show(show).caps.margin_db == {"square": 12.0, "strip": 12.0}


def test_an_edit_while_it_is_signed_is_refused(show: Path) -> None:
    shown = seal_of(show)
    _swap(show, "house.toml", "seats = 4", "seats = 3")
    before = (show / "guard.toml").read_bytes()
    with pytest.raises(ShowError, match="edited while it was being signed"):
        sign(show, BY, ON, shown)
    assert (show / "guard.toml").read_bytes() == before


@pytest.mark.parametrize("by", ["", "  ", "a\nb", "x" * 201, "\udcff"])
def test_a_name_that_is_none_is_refused(show: Path, by: str) -> None:
    before = (show / "guard.toml").read_bytes()
    with pytest.raises(ShowError, match="is no name to sign with"):
        sign(show, by, ON, seal_of(show))
    assert (show / "guard.toml").read_bytes() == before


def test_a_signature_by_hand_is_not_written_over(show: Path) -> None:
    by_hand = 'signed = { by = "a", on = "b", digest = "c" }\n' + GUARD
    (show / "guard.toml").write_text(by_hand)
    with pytest.raises(ShowError, match="changed by hand"):
        sign(show, BY, ON, seal_of(show))
    assert (show / "guard.toml").read_text() == by_hand


def test_there_must_be_a_guard_to_sign(show: Path) -> None:
    (show / "guard.toml").unlink()
    with pytest.raises(ShowError, match=r"guard\.toml is missing"):
        sign(show, BY, ON, seal_of(show))
    assert not (show / "guard.toml").exists()


@pytest.mark.parametrize("fails", ["fsync", "replace"])
def test_a_disk_that_refuses_leaves_the_guard_as_it_was(
    show: Path, fails: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    seal, before = seal_of(show), (show / "guard.toml").read_bytes()

    def refuse(*_: object) -> None:
        raise OSError(28, "No space left on device")

    where = os if fails == "fsync" else Path
    with monkeypatch.context() as patch:
        patch.setattr(where, fails, refuse)
        with pytest.raises(DeviceError, match=r"guard\.toml cannot be written: no space left"):
            sign(show, "another", ON, seal)
    assert (show / "guard.toml").read_bytes() == before
    assert sorted(p.name for p in show.glob(".*")) == []


def test_the_new_text_is_on_the_disk_before_it_takes_the_name(
    show: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """fsync, then the rename; and the text that is synced is whole."""
    happened: list[str] = []
    fsync, replace = os.fsync, Path.replace

    def synced(handle: int) -> None:
        happened.append(f"sync {os.fstat(handle).st_size > len(GUARD)}")
        fsync(handle)

    def renamed(part: Path, path: Path) -> Path:
        happened.append(f"rename to {path.name}")
        return replace(part, path)

    monkeypatch.setattr(os, "fsync", synced)
    monkeypatch.setattr(Path, "replace", renamed)
    sign(show, BY, ON, seal_of(show))
    assert happened[:2] == ["sync True", "rename to guard.toml"]


def test_a_rig_that_cannot_be_read_has_no_seal(show: Path) -> None:
    (show / "rig.toml").write_text("format = [")
    with pytest.raises(ShowError, match=r"rig\.toml cannot be sealed"):
        seal_of(show)


@pytest.mark.parametrize(
    ("line", "said"),
    [
        ("seats_db = -1", "seats_db: -1, expected a number from 0 to 115, in decibels"),
        ("crew_db = nan", "crew_db: nan, expected a number from 0 to 115, in decibels"),
        ("seats_db = 140", "seats_db: 140, expected a number from 0 to 115, in decibels"),
        (
            'seats_table = "irpa-1984-publik"',
            'seats_table: "irpa-1984-publik", expected "irpa-1984-public"',
        ),
        ('crew_table = "none"', 'crew_table: "none", expected a table, one of irpa-1984-public, '),
    ],
)
def test_a_guard_that_is_wrong_is_told_in_one_line(show: Path, line: str, said: str) -> None:
    (show / "guard.toml").write_text(f"format = 1\n{line}\n")
    errors = [str(p) for p in read_show(show)[1] if p.severity == "error"]
    assert [error.startswith(f"guard.toml:2 {said}") for error in errors] == [True], errors
