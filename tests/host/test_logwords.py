"""The journal in words: every record that an evening makes has its line, or shall have none."""

from __future__ import annotations

from support.journals import evening

from beamctl.host.logwords import KEPT, WORDS, Log
from beamctl.show.records import SOUNDING, Record

SILENT = SOUNDING | {"caps", "clock", "counters", "grant", "guard", "short"}


def said(record: Record) -> str:
    log = Log()
    log.take([record])
    (line,) = log.newest(10)
    return line.split(" ", 1)[1]


def test_every_kind_of_an_evening_is_said_or_meant_to_be_silent() -> None:
    log, records = Log(), evening()
    log.take(records)
    kinds = {record.what for record in records}
    assert kinds <= WORDS.keys() | SILENT
    telling = [record for record in records if record.what in WORDS]
    assert len(log.newest(KEPT)) == min(len(telling), KEPT)


def test_a_line_says_what_cue_who_and_why() -> None:
    args = {"asked": "go", "reason": "barred", "text": "cue 12: over its cap"}
    assert said(Record(0, "go", cue="12", who="desk")) == "GO 12 (desk)"
    assert said(Record(0, "refused", who="osc 10.0.0.4", args=args)) == (
        "go refused, barred: cue 12: over its cap (osc 10.0.0.4)"
    )
    mode = {"from": "SHOW", "to": "WALK", "name": "Ada"}
    assert said(Record(0, "mode", who="desk", args=mode)) == "mode SHOW to WALK, Ada (desk)"
    edit = {"label": "split {0} \x1b[2J", "version": 7, "mode": "WALK"}
    assert said(Record(0, "edit", who="desk", args=edit)) == "edit 7, WALK: split {0} ?[2J (desk)"


def test_only_the_newest_are_kept() -> None:
    log = Log()
    log.take(Record(n, "go", cue=str(n)) for n in range(KEPT + 10))
    assert len(log.newest(2 * KEPT)) == KEPT
    assert [line.split()[-1] for line in log.newest(2)] == [str(KEPT + 8), str(KEPT + 9)]
    assert log.newest(0) == log.newest(-1) == []
