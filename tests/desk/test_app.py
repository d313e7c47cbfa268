"""The desk as a whole, driven by keys on a screen in memory."""

from __future__ import annotations

import asyncio
import time
from dataclasses import replace

import pytest
from desk.driving import LIT_SHARE, SIZES, key_at, lit_share, on_desk, strips, text_of, until
from textual import events
from textual.pilot import Pilot

from beamctl.desk.app import DeskApp
from beamctl.desk.courier import Courier
from beamctl.desk.pages.help import HelpPage
from beamctl.desk.rows.glyphs import draw
from beamctl.desk.theme import Form
from beamctl.snapshot import EditView

UNKNOWN = ["a", "z", "space", "escape", "tab", "shift+tab", "up", "pageup", "h"]
UNKNOWN += ["ctrl+p", "ctrl+z", "ctrl+j"]


@pytest.mark.parametrize(
    ("key", "asked"),
    [
        ("enter", ("go", {"ref": "12.5"})),
        ("0", ("hush", {})),
        ("insert", ("hush", {})),
        ("f12", ("hush", {})),
        ("asterisk", ("ready", {})),
        ("plus", ("next", {"by": 1})),
        ("minus", ("back", {"by": -1})),
        ("full_stop", ("tail", {})),
        ("delete", ("tail", {})),
        ("f10", ("hold", {})),
    ],
)
def test_keys_ask_for_their_actions(host, key: str, asked) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press(key)
        await until(pilot, lambda: host.acts)

    on_desk(host, what)
    assert host.acts == [asked]


def test_unknown_keys_ask_nothing_and_leave_nothing_open(host) -> None:
    async def what(pilot: Pilot) -> None:
        before = text_of(pilot.app)
        for key in UNKNOWN:
            await pilot.press(key)
            await pilot.pause(0.025)
        await pilot.click(offset=(10, 13))
        await pilot.pause(0.1)
        assert text_of(pilot.app) == before
        assert len(pilot.app.screen_stack) == 2

    on_desk(host, what)
    assert host.acts == []


def test_arming_takes_two_keys(host) -> None:
    host.now = replace(host.now, output="SHUT")

    async def what(pilot: Pilot) -> None:
        await pilot.press("asterisk")
        await until(pilot, lambda: "READY: Enter arms" in text_of(pilot.app))
        await pilot.press("enter")
        await until(pilot, lambda: len(host.acts) == 2)

    on_desk(host, what)
    assert [name for name, _ in host.acts] == ["ready", "confirm"]


def test_a_held_enter_is_one_go_and_the_next_press_another(host) -> None:
    async def what(pilot: Pilot) -> None:
        begin_s = time.monotonic()
        times = [0.0, *(0.5 + n * 0.033 for n in range(75)), 3.2]
        for at_s in times:
            pilot.app.post_message(key_at("enter", begin_s + at_s))
        await until(pilot, lambda: len(host.acts) == 2)
        await pilot.pause(0.1)

    on_desk(host, what)
    assert host.acts == [("go", {"ref": "12.5"})] * 2


def test_go_fires_what_the_eye_saw(host) -> None:
    async def what(pilot: Pilot) -> None:
        host.snapshot = lambda: time.sleep(0.3) or host.now  # the next picture is under way
        await pilot.pause(0.1)
        host.now = replace(host.now, standby="17")
        await pilot.press("enter")
        await until(pilot, lambda: host.acts)

    on_desk(host, what)
    assert host.acts == [("go", {"ref": "12.5"})]


def test_a_paste_asks_nothing(host) -> None:
    async def what(pilot: Pilot) -> None:
        pilot.app.post_message(events.Paste("\n+++\n-.*"))
        for key in ["enter", "plus", "asterisk", "enter", *["plus"] * 50]:
            pilot.app.post_message(events.Key(key, None))
        await pilot.pause(0.2)

    on_desk(host, what)
    assert host.acts == []


def test_hush_passes_even_within_a_slap_on_the_keys(host) -> None:
    async def what(pilot: Pilot) -> None:
        for key in ["enter", "plus", "minus", "0", "full_stop"]:
            pilot.app.post_message(events.Key(key, None))
        await until(pilot, lambda: host.acts)
        await pilot.pause(0.1)

    on_desk(host, what)
    assert host.acts == [("hush", {})]


def test_a_refusal_is_read_on_the_screen(host) -> None:
    host.now = replace(host.now, output="SHUT")

    async def what(pilot: Pilot) -> None:
        await pilot.press("enter")
        await until(pilot, lambda: "Go REFUSED" in text_of(pilot.app))
        assert "not-armed" in text_of(pilot.app)

    on_desk(host, what, size=(120, 40))


def test_hold_and_carry_on(host) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("f10")
        await until(pilot, lambda: "HOLDING" in text_of(pilot.app))
        await pilot.press("f10")
        await until(pilot, lambda: "HOLDING" not in text_of(pilot.app))

    on_desk(host, what)
    assert [name for name, _ in host.acts] == ["hold", "carry-on"]


def test_notices_are_acknowledged_one_by_one(host) -> None:
    host.now = replace(host.now, notices=("first", "second"))

    async def what(pilot: Pilot) -> None:
        assert strips(pilot.app)[-1].text.startswith("! 1 of 2: first")
        await pilot.press("asterisk")
        await until(pilot, lambda: "! 1 of 1: second" in text_of(pilot.app))
        await pilot.press("asterisk")
        await until(pilot, lambda: "no notices" in text_of(pilot.app))

    on_desk(host, what)
    assert [name for name, _ in host.acts] == ["acknowledge"] * 2


def test_host_gone_and_back(host) -> None:
    async def what(pilot: Pilot) -> None:
        host.gone = True
        await until(pilot, lambda: strips(pilot.app)[-1].text.startswith("HOST GONE"))
        gone = text_of(pilot.app)
        assert "STALE: as it was" in gone
        assert "whisper crosses row B" in gone
        await pilot.press("enter")
        await until(pilot, lambda: "Go: not sent" in text_of(pilot.app))
        await pilot.press("0")
        await until(pilot, lambda: "NOT SENT" in text_of(pilot.app))
        await pilot.press("f1")
        await until(pilot, lambda: "Ultrasound:" in text_of(pilot.app))
        await pilot.press("f1")
        host.gone = False
        await until(pilot, lambda: "no notices" in text_of(pilot.app))
        assert "STALE" not in text_of(pilot.app)

    on_desk(host, what)
    assert host.acts == []


def test_a_host_that_does_not_answer_makes_the_picture_stale(host) -> None:
    async def what(pilot: Pilot) -> None:
        host.snapshot = lambda: time.sleep(1.5) or host.now
        await until(pilot, lambda: "HOST SILENT for" in text_of(pilot.app))
        assert "STALE" in text_of(pilot.app)

    on_desk(host, what)


def test_leaving_asks_while_open_only(host) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("ctrl+q")
        await until(pilot, lambda: "Sound goes on" in text_of(pilot.app))
        assert pilot.app.is_running
        await pilot.press("ctrl+c")
        await until(pilot, lambda: not pilot.app.is_running or pilot.app._exit)

    assert on_desk(host, what).return_value == 0
    host.now = replace(host.now, output="SHUT")

    async def shut(pilot: Pilot) -> None:
        await until(pilot, lambda: pilot.app._view.snapshot.output == "SHUT")
        await pilot.press("ctrl+q")
        await until(pilot, lambda: pilot.app._exit)

    assert on_desk(host, shut).return_value == 0
    assert host.acts == []


def test_help_keeps_hush_and_nothing_else(host) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("f1")
        await until(pilot, lambda: "Ultrasound:" in text_of(pilot.app))
        for key in ("enter", "plus", "full_stop"):
            await pilot.press(key)
            await pilot.pause(0.03)
        await pilot.press("0")
        await until(pilot, lambda: host.acts)
        assert isinstance(pilot.app.screen, HelpPage)

    on_desk(host, what)
    assert host.acts == [("hush", {})]


@pytest.mark.parametrize("form", [Form(), Form("sixteen", ascii=True), Form("none", ascii=True)])
@pytest.mark.parametrize("size", SIZES)
def test_big_readings_stand_on_the_screen_in_every_form(host, size, form: Form) -> None:
    async def what(pilot: Pilot) -> None:
        rows = [strip.text for strip in strips(pilot.app)]
        for reading, top in (("12.5", 0), ("OPEN", 0), ("1:23", 6), ("NEAR 2.4", 6)):
            glyphs = draw(reading, form.dot)
            assert len(glyphs) >= 4
            assert all(g in row for g, row in zip(glyphs, rows[top:], strict=False)), reading

    on_desk(host, what, size, form)


@pytest.mark.parametrize("size", SIZES)
def test_the_ascii_form_is_ascii(host, size) -> None:
    host.text = replace(host.text, title="Night Tram – Straße")

    async def what(pilot: Pilot) -> None:
        assert text_of(pilot.app).isascii()

    on_desk(host, what, size)


def test_states_differ_on_the_screen_with_all_colour_taken_away(host) -> None:
    async def what(pilot: Pilot) -> None:
        text = text_of(pilot.app)
        for start, end in (
            ("[~] 11", "tailing, 2.1 left"),
            ("[#] 12", "running, 1:14 left"),
            ("[=] 12.5", "stand by, then 13"),
            ("[!] 13", "barred, follows in 3.2"),
            ("[.] 14", "done"),
            ("[ ] 15A", "last call"),
        ):
            rows = [row.rstrip() for row in text.splitlines() if row.startswith(start + " ")]
            assert len(rows) == 1, start
            assert rows[0].endswith(end)
        looks = [text]
        for output in ("COLD", "SHUT", "HUSHED", "TRIPPED", "LOST"):
            host.now = replace(host.now, output=output)
            await until(pilot, lambda o=output: pilot.app._view.snapshot.output == o)
            await pilot.pause(0.1)
            looks.append(text_of(pilot.app))
        assert len(set(looks)) == 6

    host.now = replace(host.now, states={**host.now.states, "14": "done"})
    on_desk(host, what, (120, 40), Form("none", ascii=True))


BUSY = {"states": dict.fromkeys(("11", "12", "13", "14", "15A", "16"), "running")}
QUIET = {"states": {"13": "barred"}, "beams": (), "left_s": {}, "follow": {}}


@pytest.mark.parametrize(
    "changes",
    [
        {"notices": ("panel stern: feed 3 draws no current",)},
        {"notices": ("panel stern: feed 3 draws no current since the interval, see",), **BUSY},
        {"output": "SHUT", "since_go_s": None, **QUIET},
        {"output": "HUSHED", **QUIET},
        {"output": "TRIPPED", "notices": ("the guard has tripped: seat B4 at 101.2 dB",), **QUIET},
    ],
    ids=["OPEN", "BUSY", "SHUT", "HUSHED", "TRIPPED"],
)
@pytest.mark.parametrize("size", SIZES)
def test_few_cells_are_lit(host, size, changes: dict[str, object]) -> None:
    host.now = replace(host.now, **changes)

    async def what(pilot: Pilot) -> None:
        rows = strips(pilot.app)
        assert len(rows) == size[1]
        share = lit_share(rows, size[0] * size[1])
        print(f"lit cells at {size}, {host.now.output}: {share:.3f}")
        assert 0.02 < share <= LIT_SHARE

    on_desk(host, what, size, Form())


@pytest.mark.parametrize("size", [(20, 5), (40, 12), (79, 23), (200, 70)])
def test_odd_sizes_do_not_break_it(host, size) -> None:
    courier = Courier(host)
    app = DeskApp(courier, Form())

    async def main() -> None:
        async with app.run_test(size=size) as pilot:
            await until(pilot, lambda: app._view is not None)
            await pilot.resize_terminal(80, 24)
            await until(pilot, lambda: "Night Tram" in text_of(app))
            assert "no notices" in strips(app)[-1].text

    courier.start()
    try:
        asyncio.run(main())
    finally:
        courier.stop()


def test_leaving_asks_while_edits_are_not_on_disk(host) -> None:
    host.now = replace(host.now, output="SHUT", edit=EditView(undo="new cue 2", unsaved=3))

    async def what(pilot: Pilot) -> None:
        await until(pilot, lambda: pilot.app._view.snapshot.output == "SHUT")
        await pilot.press("ctrl+q")
        await until(pilot, lambda: "3 edits are not on disk" in text_of(pilot.app))
        assert pilot.app.is_running
        await pilot.press("ctrl+q")
        await until(pilot, lambda: pilot.app._exit)

    assert on_desk(host, what).return_value == 0
