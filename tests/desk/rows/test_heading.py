"""The line above a screen that edits."""

from __future__ import annotations

from beamctl.desk.rows.heading import heading_row
from beamctl.snapshot import Answer, EditView


def line(view, width: int = 80) -> str:
    return "".join(span.text for span in heading_row(view, "cue 3 of 9", width))


def test_it_says_where_how_many_edits_and_which_mode(view) -> None:
    text = line(view(edit=EditView(unsaved=2, waits="looking through"), mode="WALK"))
    assert text.startswith("cue 3 of 9  Night Tram  ")
    assert text.endswith("looking through  2 edits not on disk  WALK")
    assert len(text) == 80
    assert line(view()).endswith("   WRITE")
    assert "  1 edit not on disk" in line(view(edit=EditView(unsaved=1)))


def test_what_became_of_the_newest_deed_takes_the_place_of_the_title(view) -> None:
    answered = view(about={"answer": ("Save", Answer(True))})
    assert line(answered).startswith("cue 3 of 9  Save: done")
    told = view(about={"answer": ("", Answer(False, "", "nothing is lifted"))})
    assert line(told).startswith("cue 3 of 9  nothing is lifted")


def test_the_mode_is_never_cut(view) -> None:
    for width in (5, 20, 40):
        assert line(view(mode="SHOW"), width).endswith("SHOW")
