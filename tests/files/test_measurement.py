"""The measurement file comes back as it was written, and says itself whether it counts."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from beamctl.acoustics.cells import cell_map, grid_positions, loom
from beamctl.errors import DeviceError, ShowError
from beamctl.files.levels import COLUMNS, Levels, read_levels
from beamctl.files.measurement import (
    MeasuredFeed,
    Measurement,
    panel_digest,
    read_measurement,
    reasons_against,
    write_measurement,
)
from beamctl.show.house import AirSpec
from beamctl.show.rig import PanelSpec

GOOD = tuple(
    MeasuredFeed(feed=n, heard_at=n, level_db=57.25, with_reference_db=63.0 if n > 1 else None)
    for n in range(1, 6)
)


def measurement(**other: Any) -> Measurement:
    """Five good feeds, 0.3 dB over the model, but for what is named."""
    facts: dict[str, Any] = {
        "panel": "prow",
        "date": "2026-12-01T14:05:00+01:00",
        "by": "A. Technician",
        "sink": "",
        "of": "0123abcd",
        "drive_db": -40.0,
        "mic_m": 1.0,
        "reference": 1,
        "over_model_db": 0.3,
        "air": AirSpec(temperature_c=21.5),
        "feed": GOOD,
    } | other
    against = reasons_against(facts["feed"], facts["sink"], facts["over_model_db"])
    return Measurement(**({"passes": not against} | facts))


def test_it_comes_back_as_it_was_written(tmp_path: Path) -> None:
    written = measurement()
    path = write_measurement(tmp_path, written, "the report\n")
    assert path == tmp_path / "measured/prow-2026-12-01.toml"
    assert read_measurement(path) == written
    assert path.with_suffix(".txt").read_text() == "the report\n"
    assert written.passes
    assert written.against == ()


def test_a_second_one_of_a_day_leaves_the_first_alone(tmp_path: Path) -> None:
    first = write_measurement(tmp_path, measurement(), "one")
    before = first.read_bytes()
    second = write_measurement(tmp_path, measurement(by="B"), "two")
    assert second.name == "prow-2026-12-01.2.toml"
    assert second.with_suffix(".txt").name == "prow-2026-12-01.2.txt"
    assert first.read_bytes() == before
    assert sorted(p.name for p in first.parent.iterdir()) == [
        "prow-2026-12-01.2.toml",
        "prow-2026-12-01.2.txt",
        "prow-2026-12-01.toml",
        "prow-2026-12-01.txt",
    ]


def test_a_folder_that_takes_no_file_is_said(tmp_path: Path) -> None:
    (tmp_path / "measured").write_text("in the way")
    with pytest.raises(DeviceError, match="measured cannot be written: file exists"):
        write_measurement(tmp_path, measurement(), "")


SPOILT = (*GOOD[:4], MeasuredFeed(feed=5, found=("weak", "reversed"), heard_at=5, level_db=50.0))
BY_EAR = tuple(MeasuredFeed(feed=n, heard_at=n) for n in range(1, 6))
FEW = (*GOOD[:3], *BY_EAR[3:])


@pytest.mark.parametrize(
    ("other", "said"),
    [
        ({"feed": SPOILT}, "1 of 5 feeds have a fault"),
        ({"sink": "null"}, "a rehearsal: nothing sounds from null"),
        ({"sink": "file:take.wav"}, "a rehearsal: nothing sounds from file:take.wav"),
        ({"feed": BY_EAR, "over_model_db": None}, "0 feeds with a level, 4 are needed"),
        ({"feed": FEW}, "3 feeds with a level, 4 are needed"),
        ({"over_model_db": 1.2}, "1.2 dB louder than the model"),
        ({"over_model_db": -95.0}, "95.0 dB quieter than the model, or not in dB re 20 µPa"),
    ],
)
def test_what_makes_no_panel_measured(tmp_path: Path, other: dict[str, Any], said: str) -> None:
    made = measurement(**other)
    assert not made.passes
    (reason,) = made.against
    assert reason.startswith(said)
    assert read_measurement(write_measurement(tmp_path, made, "")) == made


def test_one_feed_needs_no_more_levels_than_it_has() -> None:
    assert measurement(feed=GOOD[:1]).passes


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ("passes = false", "passes = true", "passes = true, but 1 of 5 feeds have a fault"),
        ("level_db = 57.25", "level_db = nan", "level_db: nan, expected a number"),
        ('panel = "prow"', "", "panel: missing"),
        ("format = 1", "format = 2", "format: 2, expected 1"),
        ('date = "2026-12-01', 'date = "the 1st', "expected a date such as"),
        ("mic_m = 1.0", "mic_m = 1.0\nmic_cm = 100", "mic_cm: unknown key"),
        ('"weak"', '"loud"', "expected"),
        ("[air]", "[air", "not TOML"),
    ],
)
def test_what_was_edited_into_nonsense_is_refused(
    tmp_path: Path, old: str, new: str, said: str
) -> None:
    path = write_measurement(tmp_path, measurement(feed=SPOILT), "")
    text = path.read_text()
    assert old in text
    path.write_text(text.replace(old, new, 1))
    with pytest.raises(ShowError) as raised:
        read_measurement(path)
    assert str(raised.value).startswith(f"{path} is no measurement of a panel\n  {path.name}")
    assert said in str(raised.value)


def test_what_is_no_file_is_refused(tmp_path: Path) -> None:
    with pytest.raises(ShowError, match="missing"):
        read_measurement(tmp_path / "none.toml")
    with pytest.raises(ShowError, match="a folder, expected a file"):
        read_measurement(tmp_path)


def spec(**other: Any) -> PanelSpec:
    facts = {
        "at_m": (0.0, 0.0, 3.0),
        "grid": {"columns": 2, "rows": 2, "pitch_mm": 10.0},
        "volts_at_full_scale": 5.0,
        "max_volts": 7.0,
        "level_db_30cm_10v": 115.0,
        "cell_mm": 9.0,
        "resonance_hz": 40e3,
        "q": 20.0,
    }
    return PanelSpec.model_validate(facts | other)


def test_the_digest_holds_for_the_panel_as_it_is_wired() -> None:
    at_m = grid_positions(2, 2, 0.01)
    cells = cell_map(at_m, loom(at_m, "each"))
    here = panel_digest(spec(), cells)
    assert panel_digest(spec(at_m=(1.0, 0.0, 3.0), tilt_deg=-5.0, measured="m.toml"), cells) == here
    assert panel_digest(spec(), cells._replace(trim_db=cells.trim_db - 3.0)) == here
    assert panel_digest(spec(level_db_30cm_10v=110.0), cells) != here
    assert panel_digest(spec(first_feed=2), cells) != here
    assert panel_digest(spec(), cells._replace(polarity=-cells.polarity)) != here
    assert panel_digest(spec(), cells._replace(feed=cells.feed[::-1].copy())) != here
    assert panel_digest(spec(), cells._replace(at_m=1.01 * at_m)) != here


HEAD = ",".join(COLUMNS)


def levels_in(folder: Path, text: str) -> list[Levels]:
    path = folder / "levels.csv"
    path.write_text(text)
    return read_levels(path, (5, 6), 80)


def test_levels_are_read_in_the_order_of_feeds(tmp_path: Path) -> None:
    text = "level_db, feed, with_reference_db, heard_at\n57.1,6,63,70\n\n-3e1,5,,5\n"
    assert levels_in(tmp_path, text) == [Levels(5, 5, -30.0, None), Levels(6, 70, 57.1, 63.0)]
    assert levels_in(tmp_path, f"{HEAD}\n5,,,\n6,70,,\n") == [
        Levels(5, None, None, None),
        Levels(6, 70, None, None),
    ]


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", ": empty"),
        ("feed,level\n5,1\n", ':1 columns: "feed,level", expected a first line feed,heard_at,'),
        (f"{HEAD}\n5,5,57,\n", ": no line for feed 6"),
        (f"{HEAD}\n5,5,57,\n6,6,57,63\n7,7,57,63\n", ':4 feed: "7" is no live feed of the panel'),
        (f"{HEAD}\n5,5,57,\n5,5,57,\n", ":3 feed: 5 has an earlier line"),
        (f"{HEAD}\n5,5,nan,\n", ':2 level_db: "nan", expected a level in decibels'),
        (f"{HEAD}\n5,5,57,inf\n", ':2 with_reference_db: "inf", expected a level in decibels'),
        (f"{HEAD}\n5,5,loud,\n", ':2 level_db: "loud", expected a level in decibels'),
        (f"{HEAD}\n5,81,57,\n", ':2 heard_at: "81", expected a feed from 1 to 80'),
        (f"{HEAD}\n5.0,5,57,\n", ':2 feed: "5.0", expected a feed from 1 to 80'),
        (f"{HEAD}\n,5,57,\n", ':2 feed: "" is no live feed of the panel'),
        (f"{HEAD}\n5,5,57\n", ":2: 3 values, expected 4"),
        (f"{HEAD}\n5,5,,63\n", ":2 level_db: empty, but with_reference_db is not"),
        (f"{HEAD}\n5,5,,\n", ":2 level_db: empty, but heard at 5"),
        (f'{HEAD}\n"5,5,57,\n', ":2: not CSV"),
        ("\0\0", ": holds zero bytes"),
    ],
)
def test_levels_that_cannot_be_are_refused_in_one_line(
    tmp_path: Path, text: str, said: str
) -> None:
    with pytest.raises(ShowError) as raised:
        levels_in(tmp_path, text)
    assert raised.value.what.startswith(f"{tmp_path}/levels.csv{said}")
    assert "\n" not in raised.value.what
