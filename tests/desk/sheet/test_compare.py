"""The show as edited against the show as saved."""

from __future__ import annotations

import time
from dataclasses import replace

import pytest
from desk.writing import WritingHost

from beamctl.desk.link import Draft
from beamctl.desk.sheet.compare import ComparePane, compared
from beamctl.show.edits import Drop, Edit, Put, Set


def draft_after(*steps) -> Draft:
    host = WritingHost()
    assert host.edit(Edit("steps", steps)).done
    return host.draft()


def text_of(pane: ComparePane, width: int = 76, height: int = 12) -> list[str]:
    return ["".join(span.text for span in row).rstrip() for row in pane.rows(width, height)]


def opened(draft: Draft) -> ComparePane:
    pane = ComparePane()
    pane.follow(draft)
    end_s = time.monotonic() + 5.0
    while "comparing" in text_of(pane)[0]:
        assert time.monotonic() < end_s
        time.sleep(0.005)
    return pane


def test_every_file_is_told_and_the_sheet_without_its_name() -> None:
    draft = draft_after(
        Set("sheet.toml", ("cue", "3", "act", 1), "over_s", 2.5),
        Set("rig.toml", ("panel", "prow"), "tilt_deg", -9.0),
        Put("house.toml", ("spot", "lamp"), {"at_m": [0.0, 5.0, 2.0]}),
    )
    lines = list(compared(draft))
    assert ("~", "cue 3 act 2 over_s 4 -> 2.5") in lines
    assert ("+", "house: spot lamp") in lines
    assert any(text.startswith("rig: panel prow tilt_deg") for _, text in lines)
    assert len(lines) == 3


def test_what_only_looks_different_is_told_as_that() -> None:
    draft = WritingHost().draft()
    texts = {**draft.texts, "wire.toml": draft.texts["wire.toml"] + "# later\n"}
    assert list(compared(replace(draft, texts=texts))) == [
        ("~", "wire: nothing but how it is written differs")
    ]


def test_nothing_differs_from_a_show_that_was_just_saved() -> None:
    assert text_of(opened(WritingHost().draft())) == ["  nothing differs from the show as saved"]


def test_a_long_list_scrolls_and_stops_at_its_ends() -> None:
    pane = opened(draft_after(*(Drop("sheet.toml", ("cue", ref)) for ref in ("1", "2", "3", "4"))))
    assert text_of(pane)[0] == "  4 differences from the show as saved"
    assert [row[2:11] for row in text_of(pane, height=3)[1:]] == ['- cue 1 "', '- cue 2 "']
    pane.scroll(1000, 3)
    assert [row[2:11] for row in text_of(pane, height=3)[1:]] == ['- cue 3 "', '- cue 4 "']
    pane.scroll(-1000, 3)
    assert "cue 1" in text_of(pane, height=3)[1]


def test_a_newer_draft_is_looked_at_anew_and_closing_begins_at_the_top() -> None:
    pane = opened(WritingHost().draft())
    newer = draft_after(Drop("sheet.toml", ("cue", "1")))
    pane.follow(newer)
    end_s = time.monotonic() + 5.0
    while "1 difference" not in text_of(pane)[0]:
        assert time.monotonic() < end_s
        time.sleep(0.005)
    pane.close()
    assert not pane.is_open


@pytest.mark.parametrize("height", [0, 1, 2])
def test_no_room_breaks_nothing(height: int) -> None:
    pane = opened(draft_after(Drop("sheet.toml", ("cue", "1"))))
    assert len(pane.rows(10, height)) <= max(height, 1)
