"""Answers to the questions of a new show, and the texts and the sound they make."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import soundfile as sf

from beamctl.files.newshow import (
    HANG,
    PANEL,
    RATE_HZ,
    SEATS,
    SOUND,
    Answers,
    Question,
    knock,
    read_title,
    texts,
)
from beamctl.files.reader import read_show


@pytest.mark.parametrize(
    ("question", "text", "figures"),
    [
        (PANEL, "8x8 10", (8, 8, 10)), (PANEL, " 4 X 16, 7.5 ", (4, 16, 7.5)),
        (PANEL, "32×1 2", (32, 1, 2)), (HANG, "0 0 3 -10", (0, 0, 3, -10)),
        (HANG, "-1.5, 2e0, 0, 90", (-1.5, 2, 0, 90)), (SEATS, "26x200 0.5", (26, 200, 0.5)),
    ],
)  # fmt: skip
def test_figures_are_read(question: Question, text: str, figures: tuple[float, ...]) -> None:
    assert question.read(text) == figures


@pytest.mark.parametrize(
    ("question", "text", "said"),
    [
        (PANEL, "", "expected columns, rows, pitch, such as 8x8 10"),
        (PANEL, "8x8", "expected columns, rows, pitch"),
        (PANEL, "8x8 10 mm", "expected columns, rows, pitch"),
        (PANEL, "8.5x8 10", "columns: 8.5, expected a whole number from 1 to 32"),
        (PANEL, "8x33 10", "rows: 33, expected"),
        (PANEL, "8x8 nan", "pitch: nan, expected a number from 2 to 100"),
        (HANG, "0 0 inf 0", "z: inf, expected"), (HANG, "0 0 3 -91", "tilt: -91, expected"),
        (SEATS, "0x5 4", "rows: 0, expected"), (SEATS, "5x5 -4", "first row: -4, expected"),
    ],
)  # fmt: skip
def test_what_is_wrong_with_an_answer_is_one_line(question: Question, text: str, said: str) -> None:
    with pytest.raises(ValueError, match="^" + said.replace(".", r"\.")) as caught:
        question.read(text)
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize("text", ["", "  ", "a\x1b[0m", "x" * 201])
def test_a_title_is_one_line_of_letters(text: str) -> None:
    with pytest.raises(ValueError, match="expected 1 to 200 letters"):
        read_title(text)
    assert read_title(" Owl's \\ {Night} ") == "Owl's \\ {Night}"


@pytest.mark.parametrize(
    "answers",
    [
        Answers("plain", (8, 8, 10), (0, 0, 3, -15), (5, 10, 4)),
        Answers("the examples", *(q.read(q.example) for q in (PANEL, HANG, SEATS))),
        Answers('"{Owl}\'s" \\ Night', (1, 1, 2), (-2.5, 4, 1.2, 0), (1, 1, 0.5)),
        Answers("wide", (16, 4, 8), (1, 1, 6, -30), (26, 30, 5)),
    ],
    ids=lambda answers: answers.title.split()[0],
)
def test_the_texts_make_a_show_without_an_error(tmp_path: Path, answers: Answers) -> None:
    (tmp_path / "sounds").mkdir()
    sf.write(tmp_path / "sounds" / SOUND, knock(), RATE_HZ)
    show, problems = read_show(tmp_path, texts(answers, -30.0))
    assert [(p.file, p.severity) for p in problems] == [("guard.toml", "warning")]
    assert show is not None
    assert show.sheet.title == answers.title
    assert show.channels == answers.panel[0] * answers.panel[1]
    seats = np.array(list(show.house.seats().values()))
    assert len(seats) == answers.seats[0] * answers.seats[1]
    assert seats[:, 0].mean() == pytest.approx(answers.hang[0], abs=1e-3)
    assert seats[:, 1].min() == pytest.approx(answers.hang[1] + answers.seats[2])
    assert show.sheet.cue[0].act[0].trim_db == -30.0


def test_the_knock_is_heard_and_ends() -> None:
    sound = knock()
    assert np.max(np.abs(sound)) == pytest.approx(0.5)
    assert max(abs(sound[0]), np.max(np.abs(sound[-RATE_HZ // 2 :]))) < 1e-4
    spectrum = np.abs(np.fft.rfft(sound)) ** 2
    hz = np.fft.rfftfreq(len(sound), 1.0 / RATE_HZ)
    assert np.sum(spectrum[hz < 500.0]) < 0.05 * np.sum(spectrum)
