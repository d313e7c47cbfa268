"""The designer's deeds, each made in a sheet's text and read again."""

from __future__ import annotations

import tomllib
from collections.abc import Callable
from itertools import pairwise
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from support.playing import cue, loop

from beamctl.files.edits import edited
from beamctl.show import writing
from beamctl.show.checks import SHEET
from beamctl.show.edits import Edit, Put
from beamctl.show.order import natural_key
from beamctl.show.sheet import Cue, Sheet

EMPTY = 'format = 1\ntitle = "test"\n[beam.a]\npanel = "p"\n[beam.b]\npanel = "p"\n'


class Written:
    """A sheet as text; deeds are made in it."""

    def __init__(self, *cues: dict[str, Any]) -> None:
        self.text = EMPTY
        after = ""
        for one in cues:
            self.make(Edit("", (Put(SHEET, ("cue", one["ref"]), one, after),)))
            after = one["ref"]

    def make(self, edit: Edit) -> str:
        self.text = edited({SHEET: self.text}, edit)[SHEET]
        return edit.label

    def do(self, deed: Callable[..., Edit], *arguments: Any) -> str:
        return self.make(deed(self.sheet, *arguments))

    @property
    def sheet(self) -> Sheet:
        return Sheet.model_validate(tomllib.loads(self.text))

    @property
    def refs(self) -> list[str]:
        return [one.ref for one in self.sheet.cue]

    def cue(self, ref: str) -> Cue:
        return self.sheet.cue[self.sheet.position(ref)]

    def acts(self, ref: str) -> list[tuple[float, str]]:
        """Place in time and beam of each act."""
        return [(act.at_s, act.beam) for act in self.cue(ref).act]


def three() -> Written:
    return Written(
        cue("1", loop(), then="2", then_at_s=4.0),
        cue("2", loop(), {"beam": "b", "at_s": 2.5, "depth": 0.1}, {"beam": "a", "at_s": 3.3}),
        cue("3", then="2", then_at_s=1.0),
    )


def test_a_new_cue_finds_its_number_and_place() -> None:
    w = three()
    assert w.do(writing.new_cue, "1", "more") == "new cue 1.5"
    assert (w.refs, w.cue("1.5").title) == (["1", "1.5", "2", "3"], "more")
    w.do(writing.new_cue, "3", "last")
    w.do(writing.new_cue, "", "first")
    assert w.refs == ["0", "1", "1.5", "2", "3", "4"]
    first = Written()
    first.do(writing.new_cue, "", "the only one")
    assert first.refs == ["1"]


def test_a_copy_has_all_that_was_written_and_its_own_number() -> None:
    w = three()
    assert w.do(writing.copy_cue, "1", "2") == "copy cue 1 as 2.5"
    assert w.refs == ["1", "2", "2.5", "3"]
    assert w.cue("2.5").model_copy(update={"ref": "1"}) == w.cue("1")


def test_a_split_gives_the_new_cue_the_later_acts_from_its_own_go_and_the_follow_on() -> None:
    w = Written(
        cue("1", loop(at_s=0.1), loop(at_s=3.3), loop("b", at_s=3.0), then="2", then_at_s=4.0)
    )
    w.make(Edit("", (Put(SHEET, ("cue", "2"), {"title": "x"}, "1"),)))
    assert w.do(writing.split_cue, "1", 1) == "split cue 1 into 1 and 1.5"
    assert (w.acts("1"), w.acts("1.5")) == ([(0.1, "a")], [(0.3, "a"), (0.0, "b")])
    assert (w.cue("1").then, w.cue("1").then_at_s) == (None, None)
    assert (w.cue("1.5").then, w.cue("1.5").then_at_s) == ("2", 1.0)
    assert w.cue("1.5").act[0].model_copy(update={"at_s": 0.1}) == w.cue("1").act[0]


@pytest.mark.parametrize("number", [0, 3, -1])
def test_a_split_leaves_an_act_on_either_side(number: int) -> None:
    with pytest.raises(ValueError, match="either side"):
        writing.split_cue(three().sheet, "2", number)


def test_what_is_deleted_is_followed_by_nothing() -> None:
    w = three()
    assert w.do(writing.delete_cues, ["2"]) == "delete cue 2"
    assert [(c.ref, c.then, c.then_at_s) for c in w.sheet.cue] == [
        ("1", None, None),
        ("3", None, None),
    ]


def test_cues_that_move_keep_a_number_that_fits_and_take_a_free_one_else() -> None:
    w = three()
    assert w.do(writing.move_cues, ["1"], "2") == "move cue 1 as 2.5 after 2"
    assert w.refs == ["2", "2.5", "3"]
    assert w.cue("2.5").then == "2"
    assert w.do(writing.move_cues, {"3", "2.5"}, "") == "move cues 2.5 as 1 and 3 as 1.5 to the top"
    assert w.refs == ["1", "1.5", "2"]
    assert (w.cue("1").then, w.cue("1.5").then) == ("2", "2")
    w = Written(*(cue(ref) for ref in ("1", "2", "7", "3")))
    assert w.do(writing.move_cues, ["7"], "3") == "move cue 7 after 3"
    assert w.refs == ["1", "2", "3", "7"]
    assert w.do(writing.move_cues, ["2", "7"], "7") == "move cues 2 as 4 and 7 after 3"


def test_a_run_is_renumbered_and_follow_ons_follow() -> None:
    w = three()
    assert (
        w.do(writing.renumber, ["1", "2", "3"], "2", "1") == "renumber cues 1, 2 and 3 from 2 by 1"
    )
    assert [(c.ref, c.then) for c in w.sheet.cue] == [("2", "3"), ("3", None), ("4", "3")]
    w.do(writing.renumber, ["3", "4"], "2.5", "0.1")
    assert w.refs == ["2", "2.5", "2.6"]


def test_a_sheet_out_of_order_is_put_in_order() -> None:
    w = Written(cue("3"), cue("1", then="3", then_at_s=1.0), cue("2"), cue("4"))
    w.do(writing.renumber, ["1", "2", "3"], "1", "1")
    assert (w.refs, w.cue("2").then) == (["1", "2", "3", "4"], "1")


@pytest.mark.parametrize(
    ("start", "step", "why"),
    [
        ("4", "1", "4 is another"),
        ("3.5", "1", "4 would stand after 4.5"),
        ("0.5", "1", "0.5 would stand after 1"),
        ("x", "1", "expected"),
    ],
)
def test_a_run_that_would_not_fit_is_not_renumbered_at_all(start: str, step: str, why: str) -> None:
    w = Written(cue("1"), cue("2"), cue("3"), cue("4"))
    with pytest.raises(ValueError, match=why):
        writing.renumber(w.sheet, ["2", "3"], start, step)


def test_acts_are_put_copied_and_deleted_by_number() -> None:
    w = three()
    assert w.do(writing.put_act, "2", 1, {"beam": "b", "at_s": 1.0}) == "new act 2 in cue 2"
    assert w.do(writing.copy_act, "2", 2) == "copy act 3 of cue 2"
    assert w.acts("2") == [(0.0, "a"), (1.0, "b"), (2.5, "b"), (2.5, "b"), (3.3, "a")]
    assert w.cue("2").act[2] == w.cue("2").act[3]
    assert w.do(writing.delete_acts, [("2", 0), ("2", 3)]) == "delete 2 acts"
    assert w.acts("2") == [(1.0, "b"), (2.5, "b"), (3.3, "a")]


def test_acts_move_within_a_cue_and_to_another() -> None:
    w = three()
    assert w.do(writing.move_acts, [("2", 0)], "2", 2) == "move act 1 of cue 2 to act 2 of cue 2"
    assert w.acts("2") == [(2.5, "b"), (0.0, "a"), (3.3, "a")]
    assert w.do(writing.move_acts, [("2", 2), ("1", 0)], "2", 1) == "move 2 acts to act 2 of cue 2"
    assert w.acts("2") == [(2.5, "b"), (0.0, "a"), (3.3, "a"), (0.0, "a")]
    assert w.acts("1") == []
    w.do(writing.move_acts, [("2", 0)], "3", 0)
    assert w.acts("3") == [(2.5, "b")]
    assert w.cue("3").act[0].depth == 0.1


@pytest.mark.parametrize(
    "deed",
    [
        lambda s: writing.new_cue(s, "9", "x"),
        lambda s: writing.copy_cue(s, "9", "1"),
        lambda s: writing.delete_cues(s, ["9"]),
        lambda s: writing.move_cues(s, [], "1"),
        lambda s: writing.put_act(s, "9", 0, {"beam": "a"}),
        lambda s: writing.delete_acts(s, [("1", 1)]),
        lambda s: writing.move_acts(s, [], "1", 0),
    ],
)
def test_what_is_not_there_is_said_in_one_line(deed: Callable[[Sheet], Edit]) -> None:
    with pytest.raises(ValueError, match=r"^no (such )?(cue|act)|cue 1 has no act 2"):
        deed(three().sheet)


def test_many_cues_are_told_by_the_first_and_the_last() -> None:
    w = Written(*(cue(str(n)) for n in range(1, 8)))
    assert w.do(writing.delete_cues, [str(n) for n in range(2, 7)]) == "delete 5 cues, 2 to 6"


refs = st.from_regex(r"[0-9]{1,2}(\.[0-9])?[AB]?", fullmatch=True)


@given(st.lists(refs, min_size=2, max_size=7, unique_by=natural_key), st.data())
@settings(max_examples=40, deadline=None)
def test_moves_hold_the_order_of_numbers_and_lose_nothing(
    some: list[str], data: st.DataObject
) -> None:
    order = sorted(some, key=natural_key)
    w = Written(*({**cue(ref), "title": f"was {ref}"} for ref in order))
    chosen = data.draw(st.sets(st.sampled_from(order), min_size=1))
    after = data.draw(st.sampled_from(["", *order]))
    try:
        w.do(writing.move_cues, chosen, after)
    except ValueError as error:
        assert "renumber first" in str(error)
        return
    titles = [one.title.removeprefix("was ") for one in w.sheet.cue]
    rest = [ref for ref in order if ref not in chosen]
    at = len([ref for ref in order[: order.index(after) + 1 if after else 0] if ref in rest])
    assert titles == [*rest[:at], *(ref for ref in order if ref in chosen), *rest[at:]]
    assert all(natural_key(a) < natural_key(b) for a, b in pairwise(w.refs))
