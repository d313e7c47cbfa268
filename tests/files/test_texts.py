"""Texts that are not saved: read in place of the files, as those would be."""

from __future__ import annotations

from pathlib import Path

import pytest
from support.smallshow import write_show

from beamctl.errors import ShowError
from beamctl.files.reader import load_show, read_show
from beamctl.files.signing import seal_of, sign

TOML = ("sheet.toml", "rig.toml", "house.toml", "guard.toml")


@pytest.fixture
def show(tmp_path: Path) -> Path:
    """A signed show with a cell list; its house has a byte order mark, its rig Windows' lines."""
    folder = write_show(tmp_path / "small")
    (folder / "guard.toml").write_text("format = 1\nseats_db = 99\n")
    house = (folder / "house.toml").read_text()
    (folder / "house.toml").write_bytes(b"\xef\xbb\xbf" + house.encode())
    rig = (folder / "rig.toml").read_text()
    (folder / "rig.toml").write_bytes(rig.replace("\n", "\r\n").encode())
    sign(folder, "a venue", "2031-02-03", seal_of(folder))
    return folder


def texts_of(folder: Path) -> dict[str, str]:
    return {name: (folder / name).read_bytes().decode() for name in (*TOML, "strip.csv")}


def test_the_texts_of_a_folder_are_the_show_that_it_holds(show: Path) -> None:
    texts, there = texts_of(show), load_show(show)
    for name in texts:
        (show / name).write_bytes(b"another")
    found = load_show(show, texts)
    assert found.digests == there.digests
    assert found.seal == there.seal == found.guard.signed.digest  # type: ignore[union-attr]
    assert not found.caps.unsigned
    assert (found.sheet, found.rig, found.house) == (there.sheet, there.rig, there.house)
    assert found.cells["strip"].feed.tolist() == there.cells["strip"].feed.tolist()


@pytest.mark.parametrize(
    ("file", "old", "new", "said"),
    [
        ("sheet.toml", 'law = "ssb"', 'law = "ssd"', "sheet.toml:18 cue 1 act 1 law"),
        ("strip.csv", "0,0,1\n", "0,0,7\n", "strip.csv:9 dead"),
        ("house.toml", "format = 1", "\0", "house.toml: holds zero bytes"),
        ("rig.toml", "format = 1", "#" * 4_000_001, "rig.toml: 4 MB, expected a text of 4 MB"),
        ("sheet.toml", "format = 1", "format = ", "sheet.toml:1: not TOML"),
    ],
)
def test_what_is_wrong_with_a_text_is_said_as_of_a_file(
    show: Path, file: str, old: str, new: str, said: str
) -> None:
    texts = texts_of(show)
    assert old in texts[file]
    text = texts[file].replace(old, new, 1)
    found, problems = read_show(show, {**texts, file: text})
    assert found is None
    assert any(str(problem).startswith(said) for problem in problems)
    (show / file).write_bytes(text.encode())
    assert read_show(show) == (None, problems)
    with pytest.raises(ShowError):
        load_show(show, {**texts, file: text})


def test_what_no_text_stands_for_is_read_from_the_folder(show: Path) -> None:
    (show / "wire.toml").write_text("format = 1\nheartbeat_s = 7.0\n")
    sheet = (show / "sheet.toml").read_text().replace('title = "Small"', 'title = "Smaller"')
    found = load_show(show, {"sheet.toml": sheet})
    assert (found.sheet.title, found.wire.heartbeat_s) == ("Smaller", 7.0)
    assert found.seal == load_show(show).seal
