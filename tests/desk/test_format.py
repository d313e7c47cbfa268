"""Numbers, cutting and joining."""

from __future__ import annotations

import pytest
from rich.cells import cell_len

from beamctl.desk.format import (
    Span,
    clean,
    clock,
    cut,
    fit,
    length,
    level,
    pad,
    signed,
    two_ends,
    wrap,
)


@pytest.mark.parametrize(
    ("seconds", "text"),
    [
        (0.0, "0.0"),
        (-0.3, "0.0"),
        (3.2, "3.2"),
        (9.99, "9.9"),
        (59.99, "59.9"),
        (60.0, "1:00"),
        (83.44, "1:23"),
        (3599.9, "59:59"),
        (3600.0, "1:00:00"),
        (36_125.0, "10:02:05"),
    ],
)
def test_clock(seconds: float, text: str) -> None:
    assert clock(seconds) == text


def test_clock_never_runs_backwards() -> None:
    shown = [clock(tick / 20) for tick in range(1200)]
    assert sorted(shown, key=float) == shown


@pytest.mark.parametrize(
    ("value", "text"), [(2.0, "+2.0"), (-12.34, "-12.3"), (-0.04, "+0.0"), (0.0, "+0.0")]
)
def test_signed_has_no_minus_zero(value: float, text: str) -> None:
    assert signed(value) == text


@pytest.mark.parametrize(("value", "text"), [(None, "--"), (-0.04, "0.0"), (-12.36, "-12.4")])
def test_level(value: float | None, text: str) -> None:
    assert level(value) == text


@pytest.mark.parametrize("text", ["plain", "Straße", "終電の車掌", "a" * 60, "終" * 40, ""])
@pytest.mark.parametrize("width", [0, 1, 2, 3, 7, 40])
def test_cut_and_pad_keep_to_cells(text: str, width: int) -> None:
    assert cell_len(cut(text, width)) <= width
    assert cell_len(pad(text, width)) == width


def test_cut_marks_what_it_gave_up() -> None:
    assert cut("whisper crosses row B", 10) == "whisper.."
    assert cut("whisper", 7) == "whisper"


def test_no_text_can_steer_the_terminal() -> None:
    assert clean("a\x1b[2Jb\nc\x07\u202e") == "a?[2Jb?c??"
    assert "\x1b" not in "".join(span.text for span in fit([Span("x\x1b[31m")], 20))


def test_wrap_marks_what_does_not_fit() -> None:
    assert wrap("one two three four", 9, 2) == ["one two", "three f.."]
    assert wrap("one two", 9, 2) == ["one two"]
    assert wrap("one two", 0, 2) == []
    assert wrap("one two", 9, 0) == []


def test_fit_cuts_across_spans() -> None:
    row = fit([Span("abc"), Span("defgh", "live"), Span("never")], 6)
    assert length(row) <= 6
    assert row[0].text == "abc"
    assert "never" not in "".join(span.text for span in row)


def test_two_ends_fill_the_row_and_keep_the_right_end() -> None:
    row = two_ends((Span("a long title that will not fit"),), (Span("2.1 left"),), 20)
    text = "".join(span.text for span in row)
    assert len(text) == 20
    assert text.endswith("  2.1 left")
