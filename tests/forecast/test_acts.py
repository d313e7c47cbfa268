"""What acts find and lead to, against the sheet settled act by act."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from beamctl.files.reader import load_show
from beamctl.forecast.acts import after, before
from beamctl.show.settle import acts_of, state_after
from beamctl.show.settled import Settled
from beamctl.show.sheet import Act

SHOW = load_show(Path(__file__).parents[2] / "scenes" / "night-tram")
EVERY = [(cue.ref, n) for cue in SHOW.sheet.cue for n in range(len(cue.act))]


@pytest.mark.parametrize(("ref", "number"), EVERY)
def test_an_act_leads_to_what_the_sheet_settles_to(ref: str, number: int) -> None:
    act = SHOW.sheet.cue[SHOW.sheet.position(ref)].act[number]
    led = after(SHOW, before(SHOW, ref, number), act)
    moment = next(m for m in acts_of(SHOW) if m.ref == ref and m.at_s == act.at_s)
    assert led == moment.beams[act.beam]


def test_the_first_act_of_a_cue_finds_what_the_cue_before_left() -> None:
    refs = [cue.ref for cue in SHOW.sheet.cue]
    for ref in refs[1:]:
        act = SHOW.sheet.cue[refs.index(ref)].act[0]
        assert before(SHOW, ref, 0) == state_after(SHOW, refs[refs.index(ref) - 1])[act.beam]


def test_a_fresh_beam_and_an_act_that_is_tried() -> None:
    found = before(SHOW, "2", 0)
    assert found == Settled()
    tried = after(SHOW, found, Act(beam="whisper", seat="C1", depth=0.4, trim_db=-30.0))
    assert tried.target is not None
    assert (tried.target.label, tried.depth, tried.trim_db) == ("seat C1", 0.4, -30.0)


def test_what_is_not_there() -> None:
    with pytest.raises(KeyError):
        before(SHOW, "99", 0)
    with pytest.raises(IndexError):
        before(SHOW, "2", 1)
    with pytest.raises(KeyError):
        after(SHOW, Settled(), Act(beam="whisper", seat="Z9"))


def test_the_sheet_is_left_as_it_is() -> None:
    sheet = SHOW.sheet
    before(replace(SHOW), "3", 1)
    assert SHOW.sheet is sheet
    assert SHOW.sheet.cue[2].act[1].seat == "A8"
