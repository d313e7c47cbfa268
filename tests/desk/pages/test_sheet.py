"""The Sheet, driven by keys: what is edited, where the cursor goes, what is read."""

from __future__ import annotations

import time
from collections.abc import Awaitable, Callable
from dataclasses import replace

import pytest
from desk.driving import LIT_SHARE, SIZES, lit_share, on_desk, strips, text_of, until
from desk.writing import WritingHost
from textual import events
from textual.pilot import Pilot

from beamctl.desk.theme import Form
from beamctl.show.edits import Edit, Put, Set
from beamctl.show.sheet import Act, Cue

NAMES = {" ": "space", "-": "minus", ".": "full_stop"}


async def keys(pilot: Pilot, *pressed: str) -> None:
    """Press keys one by one, no faster than somebody types."""
    for key in pressed:
        await pilot.press(NAMES.get(key, key))
        await pilot.pause(0.015)


async def asked(pilot: Pilot, opens: str, title: str, *answer: str) -> None:
    """Press a key that opens a box, and once it is there answer it."""
    await keys(pilot, opens)
    await shows(pilot, f"+- {title} ")
    await keys(pilot, *answer)
    await pilot.pause(0.13)  # an Enter sooner than this after another is taken for one held down
    await keys(pilot, "enter")


async def shows(pilot: Pilot, *texts: str) -> None:
    for text in texts:
        await until(pilot, lambda text=text: text in text_of(pilot.app))


def on_sheet(
    what: Callable[[Pilot], Awaitable[None]],
    host: WritingHost | None = None,
    size: tuple[int, int] = (80, 24),
    form: Form | None = None,
) -> WritingHost:
    """Run `what` with the Sheet on the screen; the host afterwards."""
    host = host or WritingHost()

    async def main(pilot: Pilot) -> None:
        await pilot.press("f3")
        await shows(pilot, "cue 1 of")
        await what(pilot)

    on_desk(host, main, size, form)
    return host


def test_a_cue_is_written_taken_back_compared_and_saved() -> None:
    async def what(pilot: Pilot) -> None:
        await keys(pilot, "down", "down")
        await asked(pilot, "c", "A NEW CUE", *"dark")
        await shows(pilot, "> [ ] 3.5    dark", "1 edit not on disk", "no act yet")
        await asked(pilot, "a", "ACT 1 OF CUE 3.5", *"rep")
        await shows(pilot, "> target    --", "at 0.0 s reply does nothing yet")
        await asked(pilot, "right", "TARGET OF ACT 1 OF CUE 3.5", *"B4")
        await shows(pilot, "at 0.0 s reply goes to seat B4", "> target    seat B4")
        await keys(pilot, *["down"] * 5)
        await asked(pilot, "right", "TRIM_DB OF ACT 1 OF CUE 3.5", *"-30")
        await shows(pilot, "at 0.0 s reply goes to seat B4, -30.0 dB")
        await keys(pilot, "u")
        await shows(pilot, "> trim_db   --")
        await keys(pilot, "y")
        await shows(pilot, "> trim_db   -30")
        await keys(pilot, "v")
        await shows(pilot, "1 difference from the show as saved", '+ cue 3.5 "dark", 1 act')
        await keys(pilot, "v", "left", "left", "w")
        await until(pilot, lambda: "not on disk" not in text_of(pilot.app))
        await shows(pilot, "> [ ] 3.5    dark")

    host = on_sheet(what)
    act = ("cue", "3.5", "act", 0)
    assert [edit.steps for edit in host.edits] == [
        (Put("sheet.toml", ("cue", "3.5"), {"title": "dark"}, "3"),),
        (Put("sheet.toml", act, {"beam": "reply"}),),
        (Set("sheet.toml", act, "seat", "B4"),),
        (Set("sheet.toml", act, "trim_db", -30),),
    ]
    assert host.histories == ["undo", "redo", "save"]
    assert host.written.unsaved == 0
    assert host.show.sheet.cue[3] == Cue(
        ref="3.5", title="dark", act=(Act(beam="reply", seat="B4", trim_db=-30.0),)
    )


def test_behind_an_open_comparison_nothing_is_done() -> None:
    async def what(pilot: Pilot) -> None:
        await keys(pilot, "v")
        await shows(pilot, "nothing differs from the show as saved")
        await keys(pilot, "delete")
        await shows(pilot, "Take away: close the comparison first")
        await keys(pilot, "right", "t")
        await shows(pilot, "Title: close the comparison first")
        await keys(pilot, "v")

    assert on_sheet(what).edits == []


def test_the_reader_s_refusal_stands_in_the_box_until_it_is_put_right() -> None:
    async def what(pilot: Pilot) -> None:
        await keys(pilot, "down", "right", "right", *["down"] * 4)
        await asked(pilot, "right", "TARGET OF ACT 1 OF CUE 2", *"seat Z9")
        await shows(pilot, "no such seat", "seat Z9_")
        await keys(pilot, *["backspace"] * 2, *"B5")
        await pilot.pause(0.13)
        await keys(pilot, "enter")
        await shows(pilot, "> target    seat B5")

    host = on_sheet(what)
    assert [edit.steps[0].value for edit in host.edits] == ["Z9", "B5"]


def test_keys_that_come_before_the_last_edit_was_taken_up_wait() -> None:
    host = WritingHost()
    take = host.edit

    def slow(edit: Edit):
        time.sleep(0.3)
        return take(edit)

    host.edit = slow

    async def what(pilot: Pilot) -> None:
        await keys(pilot, "delete", "delete")
        await shows(pilot, "One moment: the edit before")
        await shows(pilot, "cue 1 of 8")
        assert "[ ] 2 " in text_of(pilot.app)

    assert [edit.label for edit in on_sheet(what, host).edits] == ["delete cue 1"]


def test_edited_cues_are_marked_in_write_and_named_in_walk() -> None:
    host = WritingHost()

    async def what(pilot: Pilot) -> None:
        await keys(pilot, "l")
        await asked(pilot, "t", "TITLE OF CUE 1", "x")
        await shows(pilot, ">^[ ] 1      the shed humsx", "*")
        assert strips(pilot.app)[2].text.rstrip().endswith(" *")
        host.now = replace(host.now, mode="WALK")
        await until(pilot, lambda: strips(pilot.app)[2].text.rstrip().endswith("edited"))
        await keys(pilot, "h", "f4", "f3")
        assert pilot.app.cursor.ref == "1"

    assert on_sheet(what, host).acts == [("standby", {"ref": "1"})]


def test_in_show_the_sheet_shows_the_stand_by_and_takes_no_edit() -> None:
    host = WritingHost()
    host.now = replace(host.now, mode="SHOW", standby="5")

    async def what(pilot: Pilot) -> None:
        await pilot.press("f3")
        await shows(pilot, "> [=] 5      wheels bite", "6 follows by itself", "SHOW")
        await keys(pilot, "c", "delete", "down", "right", "u", "w")
        await pilot.click(offset=(10, 3))
        await shows(pilot, "> [=] 5      wheels bite")
        assert "New cue" not in text_of(pilot.app)
        await keys(pilot, "plus")
        await shows(pilot, "> [=] 6      the clock over the buffer")

    on_desk(host, what)
    assert host.edits == []
    assert host.histories == []
    assert [name for name, _ in host.acts] == ["next"]


def test_a_click_puts_the_cursor_there_and_the_wheel_moves_it() -> None:
    async def click(pilot: Pilot, x: int, text: str) -> None:
        y = next(n for n, strip in enumerate(strips(pilot.app)) if text in strip.text)
        await pilot.click("#sheet", (x, y - 2))

    async def what(pilot: Pilot) -> None:
        await click(pilot, 10, "6A")
        await shows(pilot, "cue 8 of 9")
        await click(pilot, 60, "at 0.0 s")
        await shows(pilot, "> at 0.0 s reply plays")
        await click(pilot, 60, "depth ")
        await shows(pilot, "> depth")
        page = pilot.app.screen
        turned = (page, 60, 5, 0, 0, 0, False, False, False)
        page.post_message(events.MouseScrollDown(*turned))
        await shows(pilot, "> trim_db")

    assert on_sheet(what, size=(120, 40)).edits == []


def long_host(cues: int) -> WritingHost:
    acts = '[[cue.act]]\nbeam = "hum"\nseat = "B4"\nover_s = 2.0\n' * 2
    text = "".join(f'\n[[cue]]\nref = "{n}"\ntitle = "cue {n}"\n{acts}' for n in range(1, cues + 1))
    head = 'format = 1\ntitle = "Night Tram"\n[beam.hum]\npanel = "lantern"\n'
    return WritingHost({"sheet.toml": head + text})


def test_a_sheet_of_2000_cues_opens_and_scrolls_at_once() -> None:
    host = long_host(2000)
    took_s: dict[str, float] = {}

    async def timed(pilot: Pilot, key: str, text: str) -> None:
        begin_s = time.process_time()
        await pilot.press(key)
        await shows(pilot, text)
        took_s[f"{key} to {text}"] = time.process_time() - begin_s

    async def what(pilot: Pilot) -> None:
        await until(pilot, lambda: pilot.app._courier.draft is not None)
        await timed(pilot, "f3", "cue 1 of 2000")
        for key, at in (("down", 2), ("pagedown", 9), ("end", 2000), ("up", 1999), ("home", 1)):
            await timed(pilot, key, f"cue {at} of 2000")

    on_desk(host, what)
    print({what: f"{1000 * s:.0f} ms" for what, s in took_s.items()})
    assert max(took_s.values()) < 1.0


@pytest.mark.parametrize("size", [(20, 5), (40, 12), (79, 23), (100, 30), (200, 60)])
def test_odd_sizes_do_not_break_it(size: tuple[int, int]) -> None:
    async def what(pilot: Pilot) -> None:
        for pressed in ((), ("right", "right"), ("v",)):
            await keys(pilot, *pressed)
            await pilot.resize_terminal(*size)
            await pilot.pause(0.1)
            assert all(strip.cell_length == size[0] for strip in strips(pilot.app))
            await pilot.resize_terminal(80, 24)
            await shows(pilot, "cue 1 of 9")

    on_sheet(what)


@pytest.mark.parametrize("size", SIZES)
def test_few_cells_are_lit(size: tuple[int, int]) -> None:
    async def what(pilot: Pilot) -> None:
        for pressed in ((), ("right",), ("right",)):
            await keys(pilot, *pressed)
            share = lit_share(strips(pilot.app), size[0] * size[1])
            print(f"lit cells at {size}: {share:.3f}")
            assert 0.005 < share <= LIT_SHARE

    on_sheet(what, size=size, form=Form())
