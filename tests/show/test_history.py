"""Undo and redo of texts, against copies of all of them."""

from __future__ import annotations

import tracemalloc

from hypothesis import given, settings
from hypothesis import strategies as st

from beamctl.show.edits import BEGUN
from beamctl.show.history import History

TEXT = st.text(alphabet="ab\n", max_size=12)
DEEDS = st.lists(
    st.one_of(
        st.dictionaries(st.sampled_from(["sheet", "rig", "guard"]), TEXT, min_size=1),
        st.sampled_from(["undo", "redo", "save"]),
    ),
    max_size=25,
)


@given(TEXT, DEEDS)
@settings(max_examples=200, deadline=None)
def test_it_goes_back_and_forth_like_a_list_of_copies(first: str, deeds: list[object]) -> None:
    history = History({"sheet": first, "rig": first})
    copies, at = [({"sheet": first, "rig": first, "guard": BEGUN}, "")], 0
    saved = copies[0][0]
    for number, deed in enumerate(deeds):
        if isinstance(deed, dict):
            texts = {**copies[at][0], **deed}
            history.do(f"edit {number}", {**history.texts, **deed})
            if texts != copies[at][0]:
                copies[at + 1 :] = [(texts, f"edit {number}")]
                at += 1
        elif deed == "undo":
            assert history.undo() == (copies[at][1] if at else None)
            at -= at > 0
        elif deed == "redo":
            assert history.redo() == (copies[at + 1][1] if at + 1 < len(copies) else None)
            at += at + 1 < len(copies)
        else:
            history.mark_saved()
            saved = copies[at][0]
        assert {"guard": BEGUN, **history.texts} == copies[at][0]
        assert {"guard": BEGUN, **history.saved} == saved
        assert history.undo_label == (copies[at][1] if at else None)
        assert history.redo_label == (copies[at + 1][1] if at + 1 < len(copies) else None)
        assert (history.unsaved == 0) == (copies[at][0] == saved)


def test_unsaved_counts_the_steps_between_the_texts_and_the_disk() -> None:
    history = History({"sheet": "0"})
    counts = []
    for number in range(1, 5):
        history.do("edit", {"sheet": str(number)})
        counts.append(history.unsaved)
    history.mark_saved()
    counts.append(history.unsaved)
    for _ in range(3):
        history.undo()
        counts.append(history.unsaved)
    history.do("another way", {"sheet": "x"})  # what was saved cannot be redone any more
    counts.append(history.unsaved)
    history.do("and back", {"sheet": "4"})
    counts.append(history.unsaved)
    assert counts == [1, 2, 3, 4, 0, 1, 2, 3, 4, 0]


def test_texts_that_are_the_same_make_no_step() -> None:
    history = History({"sheet": "a"})
    history.do("nothing", {"sheet": "a"})
    assert (history.undo_label, history.unsaved) == (None, 0)


def test_a_file_that_was_begun_is_emptied_and_not_taken_away() -> None:
    history = History({"sheet": "a"})
    history.do("set a cap", {"sheet": "a", "guard.toml": "format = 1\nseats_db = 90\n"})
    history.mark_saved()
    history.undo()
    assert history.texts == {"sheet": "a", "guard.toml": "format = 1\n"}


def test_a_thousand_edits_of_a_long_sheet_weigh_little() -> None:
    text = "a line of the sheet\n" * 20_000
    history = History({"sheet": text})
    tracemalloc.start()
    for number in range(1000):
        at = 20 * (number * 7 % 20_000)
        history.do("edit", {"sheet": text[:at] + f"{number:4}" + text[at + 4 :]})
    _, most = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert most < 8 * len(text)
    while history.undo():
        pass
    assert history.texts["sheet"] == text
