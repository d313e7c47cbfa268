"""The journal in rows, and the window on it."""

from __future__ import annotations

from beamctl.desk.format import length
from beamctl.desk.rows.log import Window, dropped, line_rows, narrowed, window_rows

LOG = tuple(f"20:04:{n:02}.0 GO {n} (desk)" for n in range(40))


def texts(window: Window, height: int, word: str = "") -> list[str]:
    rows = window_rows(line_rows(LOG, 80), window, word, 80, height)
    assert len(rows) == height
    return ["".join(span.text for span in row).rstrip() for row in rows]


def test_the_newest_line_stands_at_the_bottom_and_few_stand_there_too() -> None:
    assert texts(Window(), 11)[-2] == LOG[-1]
    few = window_rows(line_rows(LOG[:2], 80), Window(), "", 80, 6)
    assert ["".join(span.text for span in row) for row in few][-3:-1] == list(LOG[:2])


def test_the_window_moves_and_follows_again_at_the_end() -> None:
    back = Window().moved(-5, 40, 10)
    assert back == Window(25)
    assert texts(back, 11)[0] == LOG[25]
    assert texts(back, 11)[-1] == "rows 26 to 35 of 40  newer ones below"
    assert back.moved(-99, 40, 10) == Window(0)
    assert back.moved(5, 40, 10) == Window()
    assert Window().moved(-1, 5, 10) == Window()  # all of it shows


def test_what_shows_keeps_its_place_when_old_lines_go() -> None:
    now = (*LOG[3:], "20:05:00.0 done 39")
    assert dropped(LOG, now) == 3
    assert dropped(LOG, LOG) == 0
    assert dropped((), LOG) == 0
    assert dropped(LOG, ("nothing of it",)) == 40
    assert Window(25).kept(3) == Window(22)
    assert Window().kept(3) == Window()


def test_a_long_line_is_folded_and_stands_under_its_words() -> None:
    rows = line_rows(("20:04:11.0 GO refused, busy: " + "word " * 30,), 40)
    assert len(rows) > 3
    assert all(length(row) <= 40 for row in rows)
    assert rows[1][0].text.startswith("          word")


def test_what_went_wrong_is_lit() -> None:
    refused, went = line_rows(("20:04 GO 1 refused, busy: x", "20:05 GO 1"), 80)
    assert (refused[0].role, went[0].role) == ("text", "dim")


def test_a_word_narrows_whatever_its_case() -> None:
    assert narrowed(("20:04 GO 1 (desk)", "20:05 done 1"), "go desk") == ("20:04 GO 1 (desk)",)
    assert narrowed(LOG, "") == LOG
    assert texts(Window(), 3, "go")[-1].endswith('only with "go"')


def test_no_line_and_no_room_are_no_trouble() -> None:
    assert line_rows((), 80) == []
    assert window_rows([], Window(), "", 80, 1)[0][0].text == "no row"
    assert window_rows(line_rows(LOG, 1), Window(3), "", 1, 0) == []
