"""Finding cues by number and by words."""

from __future__ import annotations

import pytest

from beamctl.show.find import find
from beamctl.snapshot import CueText

CUES = (
    CueText("1", "The shed hums", "house lights at half"),
    CueText("2", "Somebody knows your seat", "on the word 'terminus'"),
    CueText("12", "Straße", "2 people wait"),
    CueText("12.5", "the whisper walks", "as the shed door opens"),
    CueText("12A", "a bell behind row C", "on the bell"),
    CueText("120", "half past", ""),
)


@pytest.mark.parametrize(
    ("asked", "found"),
    [
        ("12", ("12", "12.5", "12A", "120")),
        ("12a", ("12A",)),
        ("12.", ("12.5",)),
        ("2", ("2", "12")),
        ("the", ("1", "12.5", "2", "12A")),
        ("shed", ("1", "12.5")),
        ("SHED the", ("1", "12.5")),
        ("whisp shed", ("12.5",)),
        ("terminus", ("2",)),
        ("strasse", ("12",)),
        ("half", ("120", "1")),
        ("hed", ()),
        ("  bell   row ", ("12A",)),
    ],
)
def test_the_likeliest_comes_first(asked: str, found: tuple[str, ...]) -> None:
    assert find(CUES, asked) == found


def test_asked_for_nothing_all_are_there_in_their_order() -> None:
    assert find(CUES, " ") == tuple(cue.ref for cue in CUES)
