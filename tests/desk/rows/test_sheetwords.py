"""Sentences of the Sheet, as they are read aloud."""

from __future__ import annotations

import pytest

from beamctl.desk.rows.sheetwords import (
    follow_on,
    found_words,
    remarks_of,
    seconds,
    sentence,
    target_words,
)
from beamctl.show.sheet import Act, Cue
from beamctl.snapshot import CueLevel

WHISPER = {"beam": "whisper", "sound": "whisper.flac", "law": "ssb", "depth": 0.7}


@pytest.mark.parametrize(
    ("act", "said"),
    [
        (
            {**WHISPER, "seat": "B4", "trim_db": -22.0, "over_s": 0.2},
            "at 0.0 s whisper plays whisper.flac at seat B4, ssb, depth 0.70, -22.0 dB, "
            "rises in 0.2 s",
        ),
        (
            {"at_s": 3.0, "beam": "whisper", "seat": "B9", "over_s": 4.0},
            "at 3.0 s whisper goes to seat B9 in 4.0 s",
        ),
        (
            {"at_s": 8.0, "beam": "whisper", "fall_s": 0.5},
            "at 8.0 s whisper falls silent in 0.5 s",
        ),
        ({"beam": "hum", "fall_s": 0.0}, "at 0.0 s hum falls silent at once"),
        (
            {"beam": "hum", "sound": "hum.flac", "loop": True, "azimuth_deg": 3.0},
            "at 0.0 s hum repeats hum.flac at angles 3 0",
        ),
        (
            {"beam": "bell", "sound": "bell.flac", "seat": "C3", "via": "back_wall"},
            "at 0.0 s bell plays bell.flac at seat C3 via back_wall",
        ),
        (
            {"beam": "hum", "at_s": 1.25, "spot": "pit", "trim_db": -23.0, "over_s": 3.0},
            "at 1.25 s hum goes to spot pit in 3.0 s, -23.0 dB",
        ),
        (
            {"beam": "hum", "depth": 0.5, "reach": "aim", "over_s": 2.0},
            "at 0.0 s hum changes in 2.0 s to depth 0.50, focused on the target",
        ),
        ({"beam": "hum", "reach": 6.6}, "at 0.0 s hum changes to focused at 6.6 m"),
        ({"beam": "hum"}, "at 0.0 s hum does nothing yet"),
    ],
)
def test_acts(act, said: str) -> None:
    assert sentence(Act.model_validate(act)) == said


@pytest.mark.parametrize(
    ("act", "words"),
    [
        ({"seat": "B4"}, "seat B4"),
        ({"spot": "pit"}, "spot pit"),
        ({"point_m": [1.5, 6.0, 1.2]}, "point 1.5 6 1.2"),
        ({"azimuth_deg": -3.5, "elevation_deg": 2.0}, "angles -3.5 2"),
        ({}, ""),
    ],
)
def test_targets(act, words: str) -> None:
    assert target_words(Act.model_validate({"beam": "hum", **act})) == words


def test_times_lose_nothing_that_was_written() -> None:
    assert [seconds(value) for value in (0.0, 4.0, 0.05, 12.5, 86_400.0)] == [
        "0.0 s",
        "4.0 s",
        "0.05 s",
        "12.5 s",
        "86400.0 s",
    ]


def test_what_follows() -> None:
    assert follow_on(Cue(ref="5", title="x")) == ""
    cue = Cue(ref="5", title="x", then="6", then_at_s=9.0)
    assert follow_on(cue) == "6 follows by itself 9.0 s after this GO"


@pytest.mark.parametrize(("level_db", "left"), [(96.2, "3.8 dB left"), (103.2, "3.2 dB over")])
def test_what_the_guard_found(level_db: float, left: str) -> None:
    words = found_words(CueLevel("12", "stalls B4", 40_000.0, level_db, 100.0, 2.13))
    assert words == f"{left} at stalls B4: {level_db} of 100 dB at 40 kHz, 2.1 s after GO"


def test_remarks_are_those_of_the_cue() -> None:
    remarks = (
        "sheet.toml:31 cue 1 act 1 azimuth_deg: 40.0° of steering: too wide",
        "sheet.toml:90 cue 12 then: follows cue 1 at once",
        "sheet.toml:99 cue 1: no acts: GO will change nothing",
        "guard.toml:1: unsigned: the tables hold as they are",
    )
    assert list(remarks_of(remarks, "1")) == [
        "act 1 azimuth_deg: 40.0° of steering: too wide",
        "no acts: GO will change nothing",
    ]
    assert list(remarks_of(remarks, "3")) == []
