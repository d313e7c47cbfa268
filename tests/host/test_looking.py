"""What an edit leaves in doubt, against the forecasts themselves, and what is known meanwhile."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from support.smallshow import write_show

from beamctl.files.reader import load_show
from beamctl.guard.bars import Level
from beamctl.host.barring import Kept, cue_levels
from beamctl.host.looking import BEING_LOOKED_AT, Looking, doubtful, sounding
from beamctl.show.sheet import Act, Cue
from beamctl.show.show import Show

REFS = ("1", "2", "3", "4")
AIMS: tuple[dict[str, Any], ...] = (
    {},
    {"seat": "A1"},
    {"seat": "A4", "reach": "aim"},
    {"azimuth_deg": 10.0},
)


@pytest.fixture(scope="module")
def small(tmp_path_factory: pytest.TempPathFactory) -> Show:
    return load_show(write_show(tmp_path_factory.mktemp("looking") / "small"))


def with_cues(show: Show, cues: tuple[Cue, ...]) -> Show:
    return replace(show, sheet=show.sheet.model_copy(update={"cue": cues}))


@st.composite
def acts(draw: st.DrawFn) -> Act:
    given_ = {
        "beam": draw(st.sampled_from(("drone", "voice"))),
        "at_s": draw(st.sampled_from((0.0, 0.2))),
    }
    if draw(st.integers(0, 3)) == 0:
        return Act(**given_, fall_s=0.1)
    sound = draw(st.sampled_from((None, "tone.wav", "burst.wav")))
    loop = sound is not None and draw(st.booleans())
    trim_db = draw(st.sampled_from((None, -20.0, -40.0)))
    over_s = draw(st.sampled_from((0.0, 0.3)))
    aim = draw(st.sampled_from(AIMS))
    return Act(**given_, sound=sound, loop=loop, trim_db=trim_db, over_s=over_s, **aim)


@st.composite
def sheets(draw: st.DrawFn) -> tuple[Cue, ...]:
    refs = draw(st.permutations(REFS)) if draw(st.booleans()) else REFS
    follows = draw(st.sampled_from((None, None, 0, 1, 2)))
    cues = []
    for place, ref in enumerate(refs):
        then = {"then": refs[place + 1], "then_at_s": 0.1} if place == follows else {}
        cues.append(Cue(ref=ref, title="t", act=draw(st.lists(acts(), max_size=2)), **then))
    return tuple(cues)


@st.composite
def edits(draw: st.DrawFn) -> tuple[tuple[Cue, ...], tuple[Cue, ...]]:
    """A sheet, and the same with one cue changed, gone or elsewhere."""
    before = draw(sheets())
    place = draw(st.integers(0, len(before) - 1))
    others = before[:place] + before[place + 1 :]
    kind = draw(st.sampled_from(("change", "change", "gone", "elsewhere")))
    if kind == "change":
        cue = before[place].model_copy(update={"act": tuple(draw(st.lists(acts(), max_size=2)))})
        return before, (*before[:place], cue, *before[place + 1 :])
    if before[place].then or any(cue.then == before[place].ref for cue in before):
        return before, before
    if kind == "gone":
        return before, others
    to = draw(st.integers(0, len(others)))
    return before, (*others[:to], before[place], *others[to:])


def found(level: Level | None) -> tuple[object, ...] | None:
    if level is None:
        return None
    return level.seat, level.band_hz, pytest.approx(level.level_db), level.bar is None


@settings(deadline=None, max_examples=25)
@given(edits())
def test_whatever_is_not_in_doubt_has_the_forecast_it_had(small: Show, edit: Any) -> None:
    before, after = (with_cues(small, cues) for cues in edit)
    kept = Kept()
    then, now = (cue_levels(show, lambda *_: None, kept) for show in (before, after))
    doubts = doubtful(before.sheet, sounding(before), after.sheet, sounding(after))
    for cue in after.sheet.cue:
        if cue.ref not in doubts:
            assert found(now.get(cue.ref)) == found(then.get(cue.ref)), cue.ref


def test_an_edit_of_one_cue_leaves_the_next_one_free(small: Show) -> None:
    cues = small.sheet.cue
    louder = cues[1].model_copy(
        update={"act": (cues[1].act[0].model_copy(update={"trim_db": -21.0}), *cues[1].act[1:])}
    )
    after = with_cues(small, (cues[0], louder, *cues[2:]))
    was, now = sounding(small), sounding(after)
    assert doubtful(small.sheet, was, after.sheet, now) == ("2",)
    words = with_cues(small, (cues[0].model_copy(update={"note": "softly"}), *cues[1:]))
    assert doubtful(small.sheet, was, words.sheet, sounding(words)) == ()


# -- what is known meanwhile ----------------------------------------------------------------------


def test_a_cue_in_doubt_is_barred_until_the_look_that_was_asked_for_it() -> None:
    looking = Looking()
    looking.take(0, {"3": "over its cap"}, [{"ref": "1"}])
    looking.doubt(("1", "2"), 1)
    looking.doubt(("2",), 2)
    assert looking.barred == {"3": "over its cap", "1": BEING_LOOKED_AT, "2": BEING_LOOKED_AT}
    looking.take(1, {"2": "over its cap"}, [])
    assert looking.barred == {"2": BEING_LOOKED_AT}, (
        "cue 2 was edited after that look was asked for"
    )
    looking.take(2, {}, [])
    assert looking.barred == {}


def test_a_look_that_comes_late_tells_nothing() -> None:
    looking = Looking()
    looking.doubt(("1",), 1)
    looking.take(1, {"1": "over its cap"}, [{"ref": "1"}])
    looking.take(0, {}, [])
    assert (looking.barred, looking.cues) == ({"1": "over its cap"}, [{"ref": "1"}])
