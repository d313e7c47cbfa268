"""Reading show folders: the shipped one, and every way to spoil it."""

from __future__ import annotations

import os
import re
from collections.abc import Callable
from hashlib import sha256
from pathlib import Path

import numpy as np
import pytest
import soundfile as sf

from beamctl.errors import ShowError
from beamctl.files.folder import MOST_BYTES
from beamctl.files.reader import load_show, read_show

UNSIGNED = "guard.toml:1: unsigned: the tables hold as they are"
TEXTS = ("sheet.toml", "rig.toml", "house.toml", "guard.toml", "wire.toml")


def told(folder: Path) -> list[str]:
    """Every problem but the missing signature; the folder must stay as it was."""
    before = picture(folder)
    _, problems = read_show(folder)
    assert picture(folder) == before
    return [str(problem) for problem in problems if str(problem) != UNSIGNED]


def picture(folder: Path) -> dict[str, tuple[int, int, bytes]]:
    """Size, time and bytes of every plain file; bytes of small ones only."""
    found = {}
    for path in sorted(folder.rglob("*")):
        status = path.lstat()
        small = path.is_file() and status.st_size < MOST_BYTES
        data = path.read_bytes() if small and not path.is_symlink() else b""
        found[str(path)] = (status.st_size, status.st_mtime_ns, data)
    return found


def edit(folder: Path, file: str, old: str, new: str) -> int:
    """Replaces the first `old` of a file; the line it stands in, from 1."""
    path = folder / file
    text = path.read_text(encoding="utf-8")
    before = text[: text.index(old)]
    path.write_text(text.replace(old, new, 1), encoding="utf-8")
    return before.count("\n") + 1


def test_the_copy_reads_without_an_error(folder: Path) -> None:
    show, problems = read_show(folder)
    assert [str(problem) for problem in problems] == [UNSIGNED]
    assert show is not None
    assert show.channels == 80
    assert show.folder == str(folder)
    assert {facts.rate_hz for facts in show.sounds.values()} == {48_000}
    for name in TEXTS:
        assert show.digests[name] == sha256((folder / name).read_bytes()).hexdigest()


def _replaced(file: str, data: bytes) -> Callable[[Path], object]:
    return lambda folder: (folder / file).write_bytes(data)


def _huge(folder: Path) -> None:
    with (folder / "sheet.toml").open("wb") as file:
        file.truncate(200_000_000)


def _circle(folder: Path) -> None:
    (folder / "rig.toml").unlink()
    (folder / "rig.toml").symlink_to("rig.toml")


def _pipe(folder: Path) -> None:
    (folder / "house.toml").unlink()
    os.mkfifo(folder / "house.toml")


def _folder_for_file(folder: Path) -> None:
    (folder / "house.toml").unlink()
    (folder / "house.toml").mkdir()


WHOLE_FILES: list[tuple[str, Callable[[Path], object], str]] = [
    ("huge", _huge, "sheet.toml: 200 MB, expected a text of 4 MB or less"),
    ("empty", _replaced("rig.toml", b""), "rig.toml: empty"),
    ("latin", _replaced("house.toml", b"format = 1\n# Stra\xdfe\n"),
     "house.toml: not UTF-8 text: byte 0xdf in line 2"),
    ("zeros", _replaced("sheet.toml", bytes(4096)),
     "sheet.toml: holds zero bytes, so it is no text"),
    ("syntax", _replaced("sheet.toml", b"format = 1\ntitle = \n"),
     "sheet.toml:2: not TOML: Invalid value"),
    ("open", _replaced("sheet.toml", b"format = 1\ntitle = 'x"),
     "sheet.toml:2: not TOML: Expected"),
    ("deep", _replaced("sheet.toml", b"a = " + b"[" * 100_000),
     "sheet.toml: values nest too deeply"),
    ("dotted", _replaced("sheet.toml", b"format = 1\n" + b"a." * 1_900_000 + b"a = 1\n"),
     "sheet.toml:2: more than 500 points in one line"),
    ("digits", _replaced("sheet.toml", b"format = 1\na = " + b"9" * 5000),
     "sheet.toml:2: a number of thousands of digits"),
    ("gone", lambda f: (f / "sheet.toml").unlink(), "sheet.toml: missing, expected"),
    ("no guard", lambda f: (f / "guard.toml").unlink(),
     "guard.toml: missing: unsigned, the tables hold as they are"),
    ("circle", _circle, "rig.toml: cannot be read: too many levels of symbolic links"),
    ("pipe", _pipe, "house.toml: a device or pipe, expected a file"),
    ("folder", _folder_for_file, "house.toml: a folder, expected a file"),
    ("later format", _replaced("sheet.toml", b"format = 2\nwhat = 3\n"),
     "sheet.toml:1 format: 2, expected 1"),
]  # fmt: skip


@pytest.mark.parametrize(
    ("spoil", "start"), [w[1:] for w in WHOLE_FILES], ids=[w[0] for w in WHOLE_FILES]
)
def test_a_spoilt_file_gives_one_message(
    folder: Path, spoil: Callable[[Path], object], start: str
) -> None:
    spoil(folder)
    problems = told(folder)
    assert len(problems) == 1
    assert problems[0].startswith(start)


def test_wire_has_defaults(folder: Path) -> None:
    (folder / "wire.toml").unlink()
    assert told(folder) == []
    assert load_show(folder).wire.listen == "127.0.0.1:61740"


@pytest.mark.parametrize(
    ("name", "what"), [("none", "there is no such folder"), ("file", "a file,")]
)
def test_what_is_no_folder(tmp_path: Path, name: str, what: str) -> None:
    (tmp_path / "file").write_text("x")
    show, problems = read_show(tmp_path / name)
    assert show is None
    assert len(problems) == 1
    assert what in str(problems[0])


def test_a_mark_before_the_text_is_let_pass(folder: Path) -> None:
    path = folder / "rig.toml"
    path.write_bytes(b"\xef\xbb\xbf" + path.read_bytes().replace(b"\n", b"\r\n"))
    assert told(folder) == []


EDITS = [
    ("sheet.toml", "depth = 0.5", "depth = 1.4",
     "cue 1 act 1 depth: 1.4, expected a number from 0 to 1"),
    ("sheet.toml", "depth = 0.5", "depth = nan",
     "cue 1 act 1 depth: nan, expected a number from 0 to 1"),
    ("sheet.toml", "depth = 0.5", "deph = 0.5",
     "cue 1 act 1 deph: unknown key, did you mean depth?"),
    ("sheet.toml", 'law = "dsb"', 'law = "am"',
     'cue 1 act 1 law: "am", expected "dsb", "root", "ssb" or "mam"'),
    ("sheet.toml", 'seat = "B4"', 'seat = "B44"',
     'cue 2 act 1 seat: "B44", no such seat; did you mean "B4"?'),
    ("sheet.toml", 'seat = "B4"', 'seat = "b4"',
     'cue 2 act 1 seat: "b4", no such seat; did you mean "B4"?'),
    ("sheet.toml", 'ref = "4.5"', "ref = 4.5", "cue #5 ref: 4.5, expected a text in quotes"),
    ("sheet.toml", 'ref = "4.5"', 'ref = "4,5"',
     'cue 4,5 ref: "4,5", expected a cue reference such as "12", "12.5" or "12A"'),
    ("sheet.toml", 'reach = 6.6', 'reach = "near"',
     'cue 4.5 act 2 reach: "near", expected a number above 0 or "far" or "aim"'),
    ("sheet.toml", "point_m = [-2.2, 5.4, 1.3]", "point_m = [-2.2, 5.4]",
     "cue 5 act 1 point_m: a list of 2, expected 3 numbers, in metres"),
    ("sheet.toml", "point_m = [-2.2, 5.4, 1.3]", 'point_m = [-2.2, "5.4", 1.3]',
     'cue 5 act 1 point_m y: "5.4", expected a number from -1000 to 1000, in metres'),
    ("sheet.toml", 'then = "6"', 'then = "66"', 'cue 5 then: "66", no such cue; did you mean "6"?'),
    ("sheet.toml", "bell.flac", "bel.flac",
     'cue 4 act 1 sound: "bel.flac", no such file in sounds/; did you mean "bell.flac"?'),
    ("sheet.toml", "bell.flac", "../rig.toml",
     'cue 4 act 1 sound: "../rig.toml": expected the name of a file in the folder'),
    ("sheet.toml", "bell.flac", "b\\u0000ell.flac",
     'cue 4 act 1 sound: "b\0ell.flac": expected the name of a file in the folder'),
    ("sheet.toml", "bell.flac", "make.py",
     'cue 4 act 1 sound: "make.py" is no sound that can be read'),
    ("rig.toml", "tilt_deg = -17.0", "tilt_deg = -170",
     "panel prow tilt_deg: -170, expected a number from -90 to 90, in degrees"),
    ("rig.toml", "pitch_mm = 10.0 }", 'pitch_mm = "10" }',
     'panel prow grid pitch_mm: "10", expected a number above 1, up to 100, in millimetres'),
    ("rig.toml", "rate_hz = 192000", "rate_hz = 192001",
     "rate_hz: 192001, expected a whole number from 88200 to 768000, a multiple of 4, in hertz"),
    ("rig.toml", "carrier_hz = 40000.0", "carrier_hz = 36000",
     "panel prow carrier_hz: 36000 leaves the programme 13600 Hz, less than 16000"),
    ("rig.toml", "first_feed = 65", "first_feed = 64",
     'panel lantern first_feed: feeds 64 to 79 overlap panel "prow", feeds 1 to 64'),
    ("rig.toml", "q = 20.0\n", 'measured = "prow.dat"\nq = 20.0\n',
     'panel prow measured: "prow.dat": missing'),
    ("house.toml", "temperature_c = 16.0", "temperature_c = 290",
     "air temperature_c: 290, expected a number from 0 to 30, in degrees Celsius"),
    ("guard.toml", "seats_db = 100", "seats_db = 120",
     "seats_db: 120, expected a number from 0 to 115, in decibels"),
    ("wire.toml", '"127.0.0.1:61740"', '"127.0.0.1:99999"',
     'listen: "127.0.0.1:99999", expected "ADDRESS:PORT" with a port from 1 to 65535'),
    ("wire.toml", '"127.0.0.1" =', '"stagebox" =',
     'allow stagebox: "stagebox", expected an address or a network'),
    ("wire.toml", '"aim", "hush"]', '"aim", "rest"]',
     'allow 127.0.0.1 4: "rest", expected "read", "trigger", "aim" or "hush"'),
]  # fmt: skip


@pytest.mark.parametrize(("file", "old", "new", "what"), EDITS)
def test_a_wrong_value_gives_its_line_and_what_was_expected(
    folder: Path, file: str, old: str, new: str, what: str
) -> None:
    line = edit(folder, file, old, new)
    problems = told(folder)
    assert len(problems) == 1
    assert problems[0].startswith(f"{file}:{line} {what}")


def test_two_keys_that_exclude_each_other_are_told_at_their_table(folder: Path) -> None:
    line = edit(folder, "sheet.toml", 'seat = "B4"', 'seat = "B4"\nspot = "buffer"')
    what = "cue 2 act 1: one target per act, not seat, spot"
    assert told(folder) == [f"sheet.toml:{line - 3} {what}"]


def test_a_wrong_unit_is_an_unknown_key_and_a_missing_one(folder: Path) -> None:
    line = edit(folder, "house.toml", "at_m = [1.2", "at_mm = [1.2")
    assert told(folder) == [
        f"house.toml:{line - 1} spot conductor at_m: missing, expected 3 numbers, in metres",
        f"house.toml:{line} spot conductor at_mm: unknown key, did you mean at_m?",
    ]


def test_everything_is_told_at_once(folder: Path) -> None:
    edit(folder, "sheet.toml", "depth = 0.5", "depth = 1.4")
    edit(folder, "sheet.toml", 'seat = "A2"', 'seat = "Z2"')
    edit(folder, "sheet.toml", 'sound = "bell.flac"', 'sound = "gong.flac"')
    edit(folder, "sheet.toml", 'then = "6"', "")
    edit(folder, "rig.toml", "tilt_deg = -17.0", "tilt_deg = true")
    edit(folder, "rig.toml", "first_feed = 65", "first_feed = 60")
    edit(folder, "house.toml", "humidity_pct = 60.0", "humidity_pct = 600")
    edit(folder, "wire.toml", "rate_per_s = 50", "rate_per_m = 50")
    (folder / "guard.toml").write_text("format = [")
    problems = told(folder)
    places = [re.sub(r":\d+", "", problem).partition(": ")[0] for problem in problems]
    assert places == [
        "sheet.toml cue 1 act 1 depth",
        "sheet.toml cue 4 act 1 sound",
        "sheet.toml cue 4.5 act 1 seat",
        "sheet.toml cue 5",
        "rig.toml panel prow tilt_deg",
        "rig.toml panel lantern first_feed",
        "house.toml air humidity_pct",
        "guard.toml",
        "wire.toml rate_per_m",
    ]


def test_an_entry_with_an_error_is_not_called_unknown(folder: Path) -> None:
    edit(folder, "rig.toml", "at_m = [0.0, 0.0, 3.0]", "at_m = [0.0, 0.0]")
    edit(folder, "house.toml", "first_m = [-1.925", 'first_m = ["-1.925"')
    problems = told(folder)
    assert [problem.split(":")[0] for problem in problems] == ["rig.toml", "house.toml"]


def test_load_show_lists_every_error(folder: Path) -> None:
    edit(folder, "sheet.toml", "depth = 0.5", "depth = 1.4")
    edit(folder, "rig.toml", "q = 20.0", "q = 0")
    with pytest.raises(ShowError) as caught:
        load_show(folder)
    assert "2 errors" in caught.value.what
    assert "cue 1 act 1 depth: 1.4" in caught.value.do
    assert "panel prow q: 0" in caught.value.do


@pytest.mark.parametrize(
    ("data", "what"),
    [
        (b"", '"bell.flac": empty'),
        (b"not a sound at all" * 10, '"bell.flac" is no sound that can be read'),
        (None, '"bell.flac" holds no sound'),
    ],
)
def test_a_bad_sound_is_told_once_where_it_is_first_used(
    folder: Path, data: bytes | None, what: str
) -> None:
    path = folder / "sounds" / "bell.flac"
    if data is None:
        sf.write(path, np.zeros(0), 48_000, format="WAV")
    else:
        path.write_bytes(data)
    problems = told(folder)
    assert len(problems) == 1
    assert f"cue 4 act 1 sound: {what}" in problems[0]


CELLS = "x_mm,z_mm,feed,polarity,trim_db,phase_deg,dead\n"


def test_a_panel_may_come_from_a_csv_file(folder: Path) -> None:
    edit(folder, "rig.toml", "grid = { columns = 8, rows = 8, pitch_mm = 10.0 }",
         'cells = "prow.csv"')  # fmt: skip
    edit(folder, "rig.toml", 'loom = "each"', 'loom = "csv"')
    lines = [f"{10 * (i % 8)},{10 * (i // 8)},{i + 1},1,0,0,0" for i in range(64)]
    (folder / "prow.csv").write_text(CELLS + "\n".join(lines))
    assert told(folder) == []
    show = load_show(folder)
    assert show.cells["prow"].feeds == 64
    assert "prow.csv" in show.digests
    lines[5] = "40,0,6,1,0,0,0"
    (folder / "prow.csv").write_text(CELLS + "\n".join(lines))
    assert told(folder) == ["prow.csv:7 x_mm, z_mm: the place of the cell in line 6"]
    (folder / "prow.csv").unlink()
    assert [p.partition(" ")[2] for p in told(folder)] == ['panel prow cells: "prow.csv": missing']
