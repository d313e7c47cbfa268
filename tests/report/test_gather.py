"""A journal of known figures, gathered: every figure, total and count is found again."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from datetime import UTC, datetime
from typing import Any

import pytest
from support.journals import CAPS, HEADER, at, block, cap, guard, output

from beamctl.report.evening import Evening
from beamctl.report.gather import gather, heading
from beamctl.show.records import Record

STREAM = Record(0, "stream", args={"sink": "null"})


def evening(*records: Record, header: Mapping[str, Any] = HEADER) -> Evening:
    return gather(heading(json.dumps(header).encode()), records)


def clock(second: float, utc: str) -> Record:
    return Record(at(second), "clock", args={"utc": utc})


def test_the_heading_is_the_first_line() -> None:
    head = evening().heading
    assert (head.title, head.version, head.sink) == ("Night Tram", "0.4.0", "null")
    assert (head.rate_hz, head.feeds, head.folder) == (192_000, 20, "/shows/night-tram")
    assert head.began == datetime(2026, 12, 1, 19, tzinfo=UTC)
    assert head.digests == HEADER["digests"]


def test_a_show_without_a_title_is_called_by_its_folder() -> None:
    bare = {key: value for key, value in HEADER.items() if key not in ("title", "cues")}
    assert evening(header=bare).heading.title == "night-tram"


@pytest.mark.parametrize(
    "wrong",
    [{"rate_hz": 0}, {"rate_hz": "x"}, {"began": "yesterday"}, {"digests": 3}, {"cues": []}],
    ids=str,
)
def test_a_first_line_that_is_none_is_told(wrong: dict[str, object]) -> None:
    with pytest.raises((ValueError, LookupError, TypeError, AttributeError)):
        evening(header={**HEADER, **wrong})


# -- time ------------------------------------------------------------------------------------------


def walls(*records: Record) -> list[str]:
    """Times of day of the GOs."""
    return [f"{e.at.utc:%H:%M:%S}" for e in evening(*records).called]


def go(second: float) -> Record:
    return Record(at(second), "go", cue="1")


def test_without_a_clock_time_counts_from_the_beginning_of_the_journal() -> None:
    assert walls(STREAM, go(0), go(61.0)) == ["19:00:00", "19:01:01"]


def test_the_newest_clock_before_a_record_gives_its_time() -> None:
    """A clock holds until the next; what comes before the first one is counted back from it."""
    found = walls(
        STREAM,
        go(1),
        clock(2, "2026-12-01T19:00:12+00:00"),
        go(5),
        clock(5, "2026-12-01T21:30:00+01:00"),
        go(6),
    )
    assert found == ["19:00:11", "19:00:15", "20:30:01"]


def test_an_edited_show_of_another_rate_is_timed_by_it() -> None:
    half = 96_000
    found = evening(
        STREAM,
        clock(0.0, "2026-12-01T19:00:00+00:00"),
        output(1.0, "COLD", "SHUT", "sink-open"),
        Record(at(10.0), "texts", args={"rate_hz": half}),
        Record(at(10.0), "clock", args={"utc": "2026-12-01T19:00:12+00:00"}),
        Record(at(10.0) + 20 * half, "clock", args={"utc": "2026-12-01T19:00:32+00:00"}),
        Record(at(10.0) + 30 * half, "left", args={"read": 1, "written": 1}),
    )
    assert found.problems == ()
    assert found.last.second == pytest.approx(40.0)
    assert found.last.utc == datetime(2026, 12, 1, 19, 0, 42, tzinfo=UTC)


def test_a_render_has_no_time_of_day() -> None:
    found = evening(Record(0, "stream"), go(2.5))
    assert found.called[0].at.utc is None
    assert found.called[0].at.second == 2.5


@pytest.mark.parametrize(
    ("between", "told"),
    [
        ([], 1),
        ([output(1, "OPEN", "LOST", "sink-lost"), output(1, "LOST", "SHUT", "sink-open")], 0),
        ([Record(at(1), "stream", args={"sink": "null"})], 0),
    ],
    ids=["a jump", "samples stood still", "another engine"],
)
def test_a_jump_of_the_clock_is_told_unless_samples_stood_still(
    between: Sequence[Record], told: int
) -> None:
    found = evening(
        STREAM,
        output(0, "COLD", "SHUT", "sink-open"),
        clock(0, "2026-12-01T19:00:00+00:00"),
        *between,
        clock(10, "2026-12-01T20:00:10+00:00"),
    )
    assert sum("jumped by +3600 s" in problem for problem in found.problems) == told


def test_a_clock_that_keeps_time_is_not_told() -> None:
    found = evening(
        STREAM,
        output(0, "COLD", "SHUT", "sink-open"),
        clock(0, "2026-12-01T19:00:00+00:00"),
        clock(10, "2026-12-01T19:00:10.5+00:00"),
    )
    assert found.problems == ()


# -- the guard -------------------------------------------------------------------------------------


def test_caps_are_kept_once_however_often_they_are_told() -> None:
    other = {**CAPS, "averaging_s": 2.0}
    found = evening(
        Record(0, "caps", args=CAPS),
        Record(9, "caps", args=CAPS),
        Record(at(1), "caps", args=other),
    )
    assert [caps.averaging_s for caps in found.caps] == [1.0, 2.0]
    assert found.caps[0].limits_db["crew"][20_000.0] == 75.0
    assert found.caps[0].margin_db == {"prow": 0.0, "stern": 10.0}


def test_readings_are_the_records() -> None:
    row = block("B4", 97.25, 100.0, 12.5)
    found = evening(guard(1, {"stalls": row, "pit": block("X1", None, 110.0, 0.0)}, prow=1.5))
    (reading,) = found.readings
    assert reading.held_db == {"prow": 1.5}
    seats = reading.blocks["stalls"]
    assert (seats.seat, seats.level_db, seats.cap_db, seats.headroom_db) == (
        *("B4", 97.25, 100.0),
        2.75,
    )
    assert reading.blocks["pit"].headroom_db is None


def test_a_hold_lasts_from_its_beginning_to_its_end_and_keeps_the_most() -> None:
    found = evening(
        cap(1.0, "prow", 1, 0.5, "12.5"),
        guard(2.0, {}, prow=4.5, stern=9.0),
        guard(3.0, {}, prow=2.0),
        cap(3.5, "prow", 0, 0.25, "12.5"),
        guard(4.0, {}, prow=8.0),
    )
    (held,) = found.held
    assert (held.panel, held.cue, held.held_db, found.held_s(held)) == ("prow", "12.5", 4.5, 2.5)


def test_a_hold_that_nothing_ends_lasts_to_the_end_of_the_journal() -> None:
    found = evening(cap(1.0, "prow", 1, 0.5), cap(2.0, "stern", 1, 0.5), guard(9.0, {}))
    assert [(h.panel, h.ended, found.held_s(h)) for h in found.held] == [
        ("prow", None, 8.0),
        ("stern", None, 7.0),
    ]


def test_a_trip_is_cleared_by_the_next_clear_and_no_other() -> None:
    found = evening(
        Record(at(1), "trip", args={"reason": "one"}),
        Record(at(2), "clear", who="anna"),
        Record(at(3), "trip", args={"reason": "two"}),
    )
    first, second = found.trips
    assert (first.reason, first.cleared_by, first.cleared and first.cleared.second) == (
        *("one", "anna"),
        2.0,
    )
    assert (second.reason, second.cleared) == ("two", None)


def test_open_time_is_the_sum_of_its_stretches() -> None:
    found = evening(
        output(10, "SHUT", "OPEN", "arm"),
        output(70, "OPEN", "HUSHED", "hush"),
        output(80, "HUSHED", "OPEN", "restore"),
        Record(at(95), "dry", args={"n": 1}),
    )
    assert found.open_s == 60.0 + 15.0


@pytest.mark.parametrize(
    ("last", "closed"),
    [
        (Record(5, "left", args={}), True),
        (output(1, "HUSHED", "COLD", "sink-close"), True),
        (output(1, "SHUT", "OPEN", "arm"), False),
        (go(1), False),
    ],
    ids=lambda value: value.what if isinstance(value, Record) else "",
)
def test_a_journal_is_closed_by_its_last_words_only(last: Record, closed: bool) -> None:
    assert evening(STREAM, last).closed is closed


# -- what is not as it should be -------------------------------------------------------------------


@pytest.mark.parametrize(
    "odd",
    [
        Record(0, "guard", args={"state": "CLEAR"}),
        guard(0, {"stalls": block("B4", float("nan"), 100.0, 0.0)}),
        Record(0, "cap", args={"panel": "prow"}),
        cap(0, "prow", 0, 1.0),
        Record(0, "caps", args={**CAPS, "margin_db": "none"}),
        Record(0, "clock", args={"utc": 5}),
        Record(10**400, "go", cue="1"),
        Record(0, "refused", args=["not", "a", "table"]),  # type: ignore[arg-type]
    ],
    ids=lambda record: str(record.what),
)
def test_a_record_that_cannot_be_understood_is_counted_and_the_rest_is_kept(odd: Record) -> None:
    found = evening(STREAM, odd, go(1))
    assert found.problems == (f"1 '{odd.what}' records not understood",)
    assert len(found.called) == 1
