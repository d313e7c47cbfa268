"""Boxes: what they take, what they ask for, and how they look."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from beamctl.desk.box import LONGEST, Box, box_for, trip_box, vouch_box
from beamctl.desk.format import Row, length
from beamctl.desk.keys import Ask
from beamctl.desk.rows.box import box_height, box_rows

BOXES = [trip_box("14.2 kHz at -48 dB re carrier on panel prow"), vouch_box()]


def typed(box: Box, text: str) -> Box:
    for sign in text:
        box = box.with_sign(sign)
    return box


def text_of(rows: list[Row]) -> str:
    return "\n".join("".join(span.text for span in row) for row in rows)


@pytest.mark.parametrize("text", ["clear", "CLEAR", " Clear "])
def test_the_word_clears(text: str) -> None:
    assert typed(trip_box(""), text).ask() == Ask("clear", {"word": "clear"})


@pytest.mark.parametrize("text", ["", " ", "clea", "clear!", "c l e a r", "yes", "restore"])
def test_no_other_word_does(text: str) -> None:
    assert typed(trip_box(""), text).ask() is None


def test_a_name_is_whatever_is_typed() -> None:
    assert typed(vouch_box(), " Ann  Lee ").ask() == Ask("vouch", {"name": "Ann Lee"})
    assert typed(vouch_box(), "   ").ask() is None


@pytest.mark.parametrize("sign", ["", "\r", "\t", "\x1b", "\x7f", "ab"])
def test_only_single_printable_signs_are_typed(sign: str) -> None:
    assert vouch_box().with_sign(sign) == vouch_box()


def test_it_holds_so_many_signs_and_rubs_them_out() -> None:
    full = typed(vouch_box(), "n" * (LONGEST + 60))
    assert full.typed == "n" * LONGEST
    assert full.without_last().typed == "n" * (LONGEST - 1)
    assert vouch_box().without_last() == vouch_box()


def test_a_complaint_goes_with_the_next_sign() -> None:
    wrong = typed(trip_box(""), "claer").wrong()
    assert wrong.typed == ""
    assert "the word clear" in wrong.complaint
    assert wrong.with_sign("c").complaint == ""
    kept = typed(vouch_box(), "Ann").refused("not now")
    assert (kept.typed, kept.complaint) == ("Ann", "not now")


@pytest.mark.parametrize("count", [1, 2, 3, 8])
@pytest.mark.parametrize("text", ["", "One line of text."])
def test_every_choice_shows_where_there_is_room(count: int, text: str) -> None:
    box = Box("PICK", text, "one of them", choices=tuple(f"choice {n}" for n in range(count)))
    rows = text_of(box_rows(box, 80, box_height(box, 80)))
    assert all(choice in rows for choice in box.choices)
    assert text in rows


def test_what_is_typed_first_replaces_what_was_filled_in() -> None:
    box = Box("PLACE", "", "3 numbers", typed="0 0 3", prefilled=True)
    assert box.with_sign("1").typed == "1"
    assert box.with_sign("1").with_sign("2").typed == "12"
    assert box.without_last().with_sign("4").typed == "0 0 4"
    assert box.chosen == "0 0 3"
    assert "Typing replaces it" in text_of(box_rows(box, 100, 8))


def test_a_long_complaint_is_told_in_full() -> None:
    why = "sheet.toml:40 cue[3].act[1].seat: " + " ".join(f"word{n}" for n in range(14))
    text = " ".join(text_of(box_rows(vouch_box().refused(why), 80, 12)).replace("|", " ").split())
    assert why in text


def test_which_box_enter_opens(host) -> None:
    tripped = replace(host.now, output="TRIPPED")
    unvouched = replace(host.now, output="SHUT", unvouched=True, arming=True)
    assert box_for(tripped, True) == trip_box(tripped.guard.reason)
    assert box_for(tripped, False) is None
    assert box_for(unvouched, False) == vouch_box()
    for other in (
        replace(unvouched, arming=False),
        replace(unvouched, unvouched=False),
        replace(unvouched, output="OPEN"),
        replace(unvouched, output="HUSHED"),
    ):
        assert box_for(other, True) is None


@given(
    st.sampled_from(BOXES),
    st.text(max_size=LONGEST),
    st.text(max_size=120),
    st.integers(0, 200),
    st.integers(0, 30),
)
def test_any_box_fits_any_room(
    box: Box, said: str, complaint: str, width: int, height: int
) -> None:
    rows = box_rows(replace(box, typed=said, complaint=complaint), width, height)
    assert len(rows) == height
    assert all(length(row) <= width for row in rows)


@pytest.mark.parametrize("box", BOXES, ids=lambda box: box.action)
@pytest.mark.parametrize("height", [1, 3, 4, 5, 8, 20])
def test_the_line_that_is_typed_in_is_never_given_up(box: Box, height: int) -> None:
    text = text_of(box_rows(typed(box, "Ann"), 80, height))
    assert f"Type {box.wants}: Ann_" in text
    assert height < 4 or ("Escape closes the box" in text and box.title in text)


@pytest.mark.parametrize("box", BOXES, ids=lambda box: box.action)
def test_the_whole_box_fits_80_by_24(box: Box) -> None:
    text = " ".join(text_of(box_rows(box, 80, 8)).replace("|", " ").split())
    assert box.text in text
    assert "local rules and qualified people" in vouch_box().text.lower()
