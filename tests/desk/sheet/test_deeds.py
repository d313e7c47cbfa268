"""The verbs of the Sheet: which edit each makes, what it asks, and where the cursor goes."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest
from desk.conftest import NIGHT_TRAM, FakeHost

from beamctl.desk.asking import Asking
from beamctl.desk.box import Box
from beamctl.desk.sheet.changes import change
from beamctl.desk.sheet.deeds import DEEDS
from beamctl.desk.sheet.here import Here
from beamctl.desk.sheet.lifted import Lifted
from beamctl.desk.sheet.place import Place
from beamctl.desk.verbs import sheet as verbs
from beamctl.show.edits import Drop, Edit, Move, Put, Rename, Set
from beamctl.snapshot import Answer, CueLevel

SHEET = "sheet.toml"
CUES = {cue.ref: cue for cue in NIGHT_TRAM.sheet.cue}


class Paper:
    """A desk that writes down what it is asked, and refuses edits while `refuses` is not ""."""

    def __init__(self) -> None:
        self.box: Box | None = None
        self.edits: list[Edit] = []
        self.told: list[str] = []
        self.refuses = ""
        self.stood: list[tuple[str, Place]] = []
        self.lifted = Lifted()
        self.asking: Any = Asking(self)

    def open(self, box: Box) -> None:
        self.box = box

    def edit(self, edit: Edit, then: Callable[[Answer], None]) -> None:
        self.edits.append(edit)
        then(Answer(False, "bad-type", self.refuses) if self.refuses else Answer(True))

    def tell(self, text: str) -> None:
        self.told.append(text)

    def do(self, verb: Any, ref: str, act: int | None = None, key: str = "", **more: Any) -> str:
        """Do a verb with the cursor on a cue, an act or a field."""
        at = list(CUES).index(ref)
        place = Place(at) if act is None else Place(at).at_act(act, key)
        return DEEDS.get(verb.name, change)(self.here(place, **more))

    def here(self, place: Place, level: CueLevel | None = None) -> Here:
        stand = lambda ref, place: self.stood.append((ref, place))  # noqa: E731
        hold = lambda lifted: setattr(self, "lifted", lifted)  # noqa: E731
        draft = FakeHost().draft()
        return Here(draft, place, self.lifted, level, self.asking, stand, hold)

    def type(self, text: str) -> str:
        """Answer the box that is open, as hands do."""
        box, self.box = self.box, None
        assert box is not None
        assert box.use is not None
        why = box.use(text)
        if why:
            self.box = box.refused(why)
        return why


@pytest.fixture
def paper() -> Paper:
    return Paper()


def one(paper: Paper) -> Edit:
    (edit,) = paper.edits
    return edit


def test_a_new_cue_asks_for_its_title_and_gets_a_free_number(paper: Paper) -> None:
    paper.do(verbs.NEW_CUE, "3")
    assert "3.5" in paper.box.text
    assert paper.type("") == "It wants a title."
    paper.type("the lamp dies")
    step = Put(SHEET, ("cue", "3.5"), {"title": "the lamp dies"}, "3")
    assert one(paper) == Edit("new cue 3.5", (step,))
    assert paper.stood == [("3.5", Place())]


def test_a_new_act_asks_for_its_beam_and_stands_on_its_target(paper: Paper) -> None:
    paper.do(verbs.NEW_ACT, "3", 1)
    assert paper.box.choices == tuple(NIGHT_TRAM.sheet.beam)
    paper.type("reply")
    step = Put(SHEET, ("cue", "3", "act", 2), {"at_s": 0.4, "beam": "reply"})
    assert one(paper) == Edit("new act 3 in cue 3", (step,))
    ((ref, place),) = paper.stood
    assert (ref, place.act, place.key) == ("3", 2, "target")


def test_from_the_list_a_new_act_comes_last(paper: Paper) -> None:
    paper.do(verbs.NEW_ACT, "3")
    paper.type("hum")
    assert one(paper).steps == (Put(SHEET, ("cue", "3", "act", 2), {"beam": "hum"}),)


def test_copies_stand_after_what_they_copy(paper: Paper) -> None:
    paper.do(verbs.COPY, "3")
    paper.do(verbs.COPY, "3", 0)
    cue, act = paper.edits
    assert cue.steps[0].place == ("cue", "3.5")
    assert cue.steps[0].after == "3"
    assert len(cue.steps[0].table["act"]) == 2
    assert act.steps[0].place == ("cue", "3", "act", 1)
    assert act.steps[0].table["seat"] == "A1"
    assert [(ref, place.act) for ref, place in paper.stood] == [("3.5", None), ("3", 1)]


def test_a_split_gives_the_acts_from_the_cursor_on_a_cue_of_their_own(paper: Paper) -> None:
    paper.do(verbs.SPLIT, "3", 1)
    edit = one(paper)
    assert edit.label == "split cue 3 into 3 and 3.5"
    assert edit.steps[0] == Drop(SHEET, ("cue", "3", "act", 1))
    assert edit.steps[-1].table["act"] == [{"beam": "whisper", "seat": "A8", "over_s": 4.0}]
    assert paper.stood[0][0] == "3.5"
    assert "act" in paper.do(verbs.SPLIT, "3")
    with pytest.raises(ValueError, match="either side"):
        paper.do(verbs.SPLIT, "3", 0)


def test_renumbering_takes_the_lifted_or_all_from_here(paper: Paper) -> None:
    paper.do(verbs.RENUMBER, "6A")
    assert "All 2 from 6A on" in paper.box.text
    assert "expected a number" in paper.type("x 1")
    paper.type("20 5")
    assert one(paper).steps == (
        Rename(SHEET, ("cue", "6A"), "20"),
        Rename(SHEET, ("cue", "7"), "25"),
    )
    paper.lifted = Lifted(("4", "4.5"))
    paper.do(verbs.RENUMBER, "1")
    assert "The 2 lifted" in paper.box.text
    assert "would stand after" in paper.type("6.5")
    paper.type("4 0.2")
    assert paper.edits[-1].steps == (Rename(SHEET, ("cue", "4.5"), "4.2"),)
    assert paper.lifted == Lifted()


@pytest.mark.parametrize(
    ("verb", "after", "called"), [(verbs.LATER, "4", "4.2"), (verbs.EARLIER, "1", "1.5")]
)
def test_a_cue_that_is_moved_past_its_number_gets_another(
    paper: Paper, verb: Any, after: str, called: str
) -> None:
    paper.do(verb, "3")
    steps = (Move(SHEET, ("cue", "3"), after), Rename(SHEET, ("cue", "3"), called))
    assert one(paper).steps == steps
    assert paper.stood[0][0] == called


def test_an_act_moves_in_its_cue(paper: Paper) -> None:
    paper.do(verbs.EARLIER, "3", 1)
    drop, put = one(paper).steps
    assert drop == Drop(SHEET, ("cue", "3", "act", 1))
    assert put.place == ("cue", "3", "act", 0)
    assert paper.stood[0][1].act == 0
    assert "first already" in paper.do(verbs.EARLIER, "3", 0)
    assert "last already" in paper.do(verbs.LATER, "3", 1)
    assert "first already" in paper.do(verbs.EARLIER, "1")
    paper.do(verbs.LATER, "3", 0)
    assert paper.edits[-1].steps[1].place == ("cue", "3", "act", 1)


def test_lifted_cues_are_set_down_after_the_cursor(paper: Paper) -> None:
    assert paper.do(verbs.SET_DOWN, "1") == "nothing is lifted"
    for ref in ("2", "3", "5", "5"):
        paper.do(verbs.LIFT, ref)
    assert paper.lifted == Lifted(("2", "3"))
    paper.do(verbs.SET_DOWN, "6")
    moves = [step for step in one(paper).steps if isinstance(step, Move)]
    assert [step.place for step in moves] == [("cue", "2"), ("cue", "3")]
    assert moves[0].after == "6"
    assert paper.lifted == Lifted()
    last = [step.name for step in one(paper).steps if isinstance(step, Rename)][-1]
    assert paper.stood == [(last, Place())]


def test_lifted_acts_are_set_down_in_another_cue(paper: Paper) -> None:
    paper.do(verbs.LIFT, "3", 1)
    paper.do(verbs.SET_DOWN, "4", 0)
    drop, put = one(paper).steps
    assert drop == Drop(SHEET, ("cue", "3", "act", 1))
    assert put.place == ("cue", "4", "act", 1)
    assert put.table["seat"] == "A8"
    assert paper.stood == [("4", Place(3).at_act(1))]


def test_lifted_acts_are_set_down_further_on_in_their_own_cue(paper: Paper) -> None:
    paper.do(verbs.LIFT, "4.5", 0)
    paper.do(verbs.SET_DOWN, "4.5", 1)
    assert one(paper).steps[1].place == ("cue", "4.5", "act", 1)
    assert paper.stood[0][1].act == 1


def test_taking_away_asks_nothing(paper: Paper) -> None:
    paper.do(verbs.TAKE_AWAY, "4.5")
    paper.do(verbs.TAKE_AWAY, "4.5", 1)
    paper.do(verbs.TAKE_AWAY, "4.5", 1, "reach")
    paper.do(verbs.TAKE_AWAY, "4.5", 1, "fall_s")  # it is empty already
    act = ("cue", "4.5", "act", 1)
    assert [edit.steps for edit in paper.edits] == [
        (Drop(SHEET, ("cue", "4.5")),),
        (Drop(SHEET, act),),
        (Set(SHEET, act, "reach", None),),
    ]
    assert paper.box is None
    with pytest.raises(ValueError, match="cannot be empty"):
        paper.do(verbs.TAKE_AWAY, "4.5", 1, "beam")


def test_titles_and_notes_are_asked_for_from_anywhere_in_the_cue(paper: Paper) -> None:
    paper.do(verbs.TITLE, "3", 1, "depth")
    assert paper.box.typed == "the whisper walks along row A"
    paper.type("the whisper runs")
    paper.do(verbs.NOTE, "3")
    paper.type("on the word 'now'")
    assert [edit.steps[0] for edit in paper.edits] == [
        Set(SHEET, ("cue", "3"), "title", "the whisper runs"),
        Set(SHEET, ("cue", "3"), "note", "on the word 'now'"),
    ]


def test_another_number_is_followed(paper: Paper) -> None:
    paper.here(Place(5, 0))
    assert change(paper.here(Place(5, 0))) == ""
    assert "12A" in paper.type("x")
    paper.type("5.5")
    assert one(paper) == Edit("call cue 5 5.5", (Rename(SHEET, ("cue", "5"), "5.5"),))
    assert paper.stood == [("5.5", Place(5, 0))]


def test_a_field_is_changed_in_its_box_and_a_refusal_opens_it_again(paper: Paper) -> None:
    paper.refuses = "sheet.toml:40: a trim above its beam"
    paper.do(verbs.IN, "3", 0, "trim_db")
    assert paper.type("loud") != ""
    paper.type("-12")
    assert one(paper).steps == (Set(SHEET, ("cue", "3", "act", 0), "trim_db", -12),)
    assert paper.box is not None
    assert (paper.box.typed, paper.box.complaint) == ("-12", paper.refuses)
    paper.refuses = ""
    paper.type("-30")
    assert paper.edits[-1].steps[0].value == -30
    assert paper.box is None
    assert paper.asking.unanswered == 0


def test_a_refusal_without_a_box_is_told(paper: Paper) -> None:
    paper.refuses = "cue 6 follows cue 5"
    paper.do(verbs.TAKE_AWAY, "6")
    assert paper.told == ["delete cue 6: cue 6 follows cue 5"]


def test_the_trim_that_fits_is_taken(paper: Paper) -> None:
    level = CueLevel("4", "benches B4", 40_000.0, 103.2, 100.0, 0.4, "bell", -25.2)
    assert paper.do(verbs.FIT, "4", level=level) == ""
    assert one(paper).steps == (Set(SHEET, ("cue", "4", "act", 0), "trim_db", -25.2),)
    none = CueLevel("4", "benches B4", 40_000.0, 103.2, 100.0, 0.4, "bell")
    assert "no trim" in paper.do(verbs.FIT, "4", level=none)
    assert "no trim" in paper.do(verbs.FIT, "4")
    other = CueLevel("4", "benches B4", 40_000.0, 103.2, 100.0, 0.4, "hum", -40.0)
    assert "no act of this cue has hum above" in paper.do(verbs.FIT, "4", level=other)


def test_beams_are_begun_renamed_turned_to_another_panel_and_ended(paper: Paper) -> None:
    for answers in (
        ("a new beam", "steam", "prow"),
        ("whisper  on prow", "another name", "voice"),
        ("whisper  on prow", "another panel", "lantern"),
        ("whisper  on prow", "take it away"),
    ):
        paper.do(verbs.BEAMS, "1")
        for answer in answers:
            assert paper.type(answer) == ""
        assert paper.box is None
    assert [edit.steps for edit in paper.edits] == [
        (Put(SHEET, ("beam", "steam"), {"panel": "prow"}),),
        (Rename(SHEET, ("beam", "whisper"), "voice"),),
        (Set(SHEET, ("beam", "whisper"), "panel", "lantern"),),
        (Drop(SHEET, ("beam", "whisper")),),
    ]


@pytest.mark.parametrize("verb", verbs.DEEDS, ids=lambda verb: verb.name)
def test_an_empty_sheet_breaks_nothing(paper: Paper, verb: Any) -> None:
    here = paper.here(Place())
    empty = here.sheet.model_copy(update={"cue": ()})
    draft = replace(here.draft, show=replace(here.draft.show, sheet=empty))
    if verb.name in DEEDS:
        DEEDS[verb.name](replace(here, draft=draft))
    assert paper.edits == []
