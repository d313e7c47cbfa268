"""The document: what a folder's texts are, to the byte, and that no other show is taken for it."""

from __future__ import annotations

from pathlib import Path

import pytest
from support.smallshow import write_show

from beamctl.errors import DeviceError, ShowError
from beamctl.files.reader import load_show
from beamctl.host.document import Document, Loaded, on_disk, stored, stored_show
from beamctl.host.loading import Hashes, news_in, wanted_sounds

AIR = {"temperature_c": 25.0, "humidity_pct": 40.0, "pressure_kpa": 100.0}


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    return write_show(tmp_path / "small")


def test_a_stored_document_gives_the_show_whatever_becomes_of_the_folder(
    folder: Path, tmp_path: Path
) -> None:
    (folder / "house.toml").write_bytes(b"\xef\xbb\xbf" + (folder / "house.toml").read_bytes())
    (folder / "sheet.toml").write_bytes(
        (folder / "sheet.toml").read_bytes().replace(b"\n", b"\r\n")
    )
    show = load_show(folder)
    document = Document.of(folder).with_lists(show.rig)
    document.store(tmp_path / "a.show")
    for name in (*on_disk(folder), "strip.csv"):
        (folder / name).write_text("")
    assert stored(tmp_path / "a.show") == document
    found = stored_show(tmp_path / "a.show", show.seal, None)
    assert (found.digests, found.seal, found.sheet) == (show.digests, show.seal, show.sheet)
    with pytest.raises(ShowError, match="changed on disk since the host started"):
        stored_show(tmp_path / "a.show", "another seal", None)


def test_no_room_for_a_document_is_said(folder: Path, tmp_path: Path) -> None:
    with pytest.raises(DeviceError):
        Document.of(folder).store(tmp_path / "no such folder" / "a.show")


def test_measured_air_is_the_houses_and_no_edit_of_it(folder: Path) -> None:
    show = load_show(folder)
    loaded = Loaded(show, {}).breathing(AIR)
    assert loaded.show.house.air.model_dump() == AIR
    assert (loaded.show.seal, loaded.show.caps.unsigned) == (show.seal, "")
    assert Document.of(folder).load(AIR).house == loaded.show.house


def test_digests_follow_a_sound_that_is_replaced(folder: Path) -> None:
    hashes, show = Hashes(), load_show(folder)
    before = hashes.of(show)
    (folder / "sounds/tone.wav").write_bytes((folder / "sounds/burst.wav").read_bytes())
    after = hashes.of(show)
    assert after["sounds/tone.wav"] == before["sounds/burst.wav"] != before["sounds/tone.wav"]
    assert before.keys() - after.keys() == set()


# -- what an engine that runs does not have -------------------------------------------------------


@pytest.mark.parametrize(
    ("file", "old", "new", "news"),
    [
        ("sheet.toml", "trim_db = -20.0", "trim_db = -21.0", ""),
        ("sheet.toml", 'title = "a loop"', 'title = "a round"', ""),
        ("rig.toml", "tilt_deg = -17.0", "tilt_deg = -16.0", "rig.toml"),
        ("house.toml", "seats = 4", "seats = 5", "house.toml"),
        ("guard.toml", "format = 1", "format = 1\nseats_db = 90.0", "guard.toml"),
        ("strip.csv", "-12.0,4.0,1", "-12.5,4.0,1", "strip.csv"),
        ("sheet.toml", "[beam.side]", '[beam.more]\npanel = "square"\n[beam.side]', "another set"),
        ("sheet.toml", 'sound = "burst.wav"', 'sound = "new.wav"', "sound new.wav"),
    ],
)
def test_only_cues_go_without_another_engine(
    folder: Path, file: str, old: str, new: str, news: str
) -> None:
    (folder / "sounds/new.wav").write_bytes((folder / "sounds/burst.wav").read_bytes())
    before = load_show(folder)
    text = (folder / file).read_text()
    assert old in text
    (folder / file).write_text(text.replace(old, new, 1))
    found = news_in(load_show(folder), before, wanted_sounds(before))
    assert found.startswith(news) and bool(found) == bool(news)
