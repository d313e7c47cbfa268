"""How times and lengths are said."""

from __future__ import annotations

import json
from datetime import UTC, timedelta, timezone, tzinfo

import pytest
from support.journals import HEADER, at

from beamctl.report.evening import Evening
from beamctl.report.gather import gather, heading
from beamctl.report.words import Times, band, length, place, plain, seat_in
from beamctl.show.records import Record

EAST = timezone(timedelta(hours=5, minutes=30))


def evening(*seconds: float, live: bool = True) -> Evening:
    """GOs at these seconds of a journal that begins at 19:00 UTC."""
    stream = Record(0, "stream", args={"sink": "null"} if live else {})
    gos = (Record(at(second), "go", cue="1") for second in seconds)
    return gather(heading(json.dumps(HEADER).encode()), [stream, *gos])


@pytest.mark.parametrize(
    ("seconds", "zone", "said"),
    [
        ((61.25,), UTC, ["19:01:01.2"]),
        ((3600.0,), EAST, ["01:30:00.0"]),
        ((0.0, 5 * 3600.0), UTC, ["12-01 19:00:00.0", "12-02 00:00:00.0"]),
        ((0.0, 5 * 3600.0), EAST, ["00:30:00.0", "05:30:00.0"]),
    ],
)
def test_times_are_the_venues_with_the_day_where_there_are_two(
    seconds: tuple[float, ...], zone: tzinfo, said: list[str]
) -> None:
    found = evening(*seconds)
    times = Times(found, zone)
    assert [times.clock(entry.at) for entry in found.called] == said


def test_a_time_in_the_table_has_its_offset() -> None:
    found = evening(1.5)
    assert Times(found, EAST).stamp(found.called[0].at) == "2026-12-02T00:30:01.500+05:30"
    assert Times(found, EAST).offset(found.called[0].at) == "UTC+05:30"


def test_a_render_counts_from_its_first_sample() -> None:
    found = evening(3661.25, live=False)
    times = Times(found, UTC)
    assert times.clock(found.called[0].at) == "1:01:01.2"
    assert (times.stamp(found.called[0].at), times.date(found.called[0].at)) == ("", "")


@pytest.mark.parametrize(
    ("seconds", "said"),
    [
        (0.0, "0 s"),
        (12.44, "12.4 s"),
        (59.96, "1 min"),
        (65.0, "1 min 5 s"),
        (3600.0, "1 h"),
        (7385.4, "2 h 3 min 5 s"),
    ],
)
def test_lengths(seconds: float, said: str) -> None:
    assert length(seconds) == said


def test_small_words() -> None:
    assert [band(hz) for hz in (12_500.0, 31_500.0, 40_000.0)] == ["12.5 kHz", "31.5 kHz", "40 kHz"]
    assert plain("a\x1b[1mb\nc\u200bd") == "a?[1mb?c?d"
    assert place("stalls", "stalls B4") == place("stalls", "B4") == "stalls B4"
    assert seat_in("stalls", "stalls B4") == seat_in("stalls", "B4") == "B4"
