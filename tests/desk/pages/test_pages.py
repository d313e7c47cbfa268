"""The screens, what works on each, and the caution."""

from __future__ import annotations

import time
from collections import Counter
from dataclasses import replace

import pytest
from desk.driving import LIT_SHARE, SIZES, key_at, lit_share, on_desk, strips, text_of, until
from textual.pilot import Pilot

from beamctl.desk.app import READ_S
from beamctl.desk.pages.caution import CautionPage
from beamctl.desk.pages.desk import DeskPage
from beamctl.desk.pages.guard import GuardPage
from beamctl.desk.rows.glyphs import draw
from beamctl.desk.theme import Form


async def shows(pilot: Pilot, text: str) -> None:
    await until(pilot, lambda: text in text_of(pilot.app))


def test_f7_shows_the_guard_and_f2_the_desk(host) -> None:
    async def what(pilot: Pilot) -> None:
        for key, page, text in (
            ("f7", GuardPage, "- stage -"),
            ("f7", GuardPage, "- stage -"),
            ("f1", None, "Ultrasound:"),
            ("f7", GuardPage, "- stage -"),
            ("f1", None, "Ultrasound:"),
            ("f2", DeskPage, "Night Tram"),
        ):
            await pilot.press(key)
            await shows(pilot, text)
            assert page is None or isinstance(pilot.app.screen, page)
        assert len(pilot.app.screen_stack) == 2

    on_desk(host, what)
    assert host.acts == []


@pytest.mark.parametrize("screen", ["f1", "f2", "f7"])
@pytest.mark.parametrize("key", ["0", "insert", "f12"])
def test_hush_works_on_every_screen(host, screen: str, key: str) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press(screen)
        await pilot.pause(0.05)
        await pilot.press(key)
        await until(pilot, lambda: host.acts)

    on_desk(host, what)
    assert host.acts == [("hush", {})]


def test_the_guard_screen_says_what_enter_fires_and_fires_it(host) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("f7")
        await shows(pilot, "[=] stand by 12.5  whisper crosses row B")
        await pilot.press("plus")
        await shows(pilot, "[!] stand by 13")
        await pilot.press("enter")
        await until(pilot, lambda: len(host.acts) == 2)
        host.now = replace(host.now, output="SHUT")
        await until(pilot, lambda: pilot.app._view.snapshot.output == "SHUT")
        await pilot.press("asterisk")
        await shows(pilot, "READY: Enter arms  Ultrasound: local rules")

    on_desk(host, what)
    assert host.acts == [("next", {"by": 1}), ("go", {"ref": "13"}), ("ready", {})]


def test_levels_come_four_times_a_second_and_on_the_guard_screen_only(host) -> None:
    calls: list[float] = []
    seats = host.levels
    host.levels = lambda: calls.append(time.monotonic()) or seats()

    async def what(pilot: Pilot) -> None:
        await pilot.pause(0.5)
        assert calls == []
        await pilot.press("f7")
        await until(pilot, lambda: len(calls) == 9)

    on_desk(host, what)
    assert 1.5 < calls[8] - calls[0] < 4.0  # eight quarters of a second, on a busy machine too


def test_levels_move_and_those_that_stop_coming_are_not_trusted(host) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("f7")
        await shows(pilot, "3 stalls B4")
        host.seats = tuple(replace(seat, level_db=101.0) for seat in host.seats)
        await shows(pilot, "! stalls")
        host.levels = lambda: time.sleep(1.3) or ()
        await shows(pilot, "waiting for levels")

    on_desk(host, what)


def test_the_plan_on_the_screen_holds_every_seat(host) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("f7")
        await shows(pilot, "- stage -")
        plan = [row[:30] for row in text_of(pilot.app).splitlines()]
        end = next(n for n, row in enumerate(plan) if "- stage -" in row)
        signs = Counter("".join(plan[3:end]).replace(" ", ""))
        assert sum(signs.values()) == len(host.seats)
        assert signs["."] == 8
        assert signs["3"] == 1

    on_desk(host, what)


def test_a_tall_guard_screen_keeps_the_big_readings(host) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("f7")
        await shows(pilot, "- stage -")
        rows = [strip.text for strip in strips(pilot.app)]
        assert all(g in row for g, row in zip(draw("NEAR 2.4", "#"), rows[6:], strict=False))

    on_desk(host, what, (120, 40))


@pytest.mark.parametrize(
    ("state", "output"),
    [
        ("CLEAR", "OPEN"),
        ("NEAR", "OPEN"),
        ("CAPPING", "OPEN"),
        ("TRIPPED", "TRIPPED"),
        ("BLIND", "TRIPPED"),
    ],
)
@pytest.mark.parametrize("screen", ["f2", "f7"])
@pytest.mark.parametrize("size", SIZES)
def test_few_cells_are_lit_in_every_state_of_the_guard(
    host, size, screen: str, state: str, output: str
) -> None:
    held = {"prow": 3.0, "stern": 1.2} if state == "CAPPING" else {}
    guard = replace(host.now.guard, state=state, headroom_db=-0.4, held_db=held, signed="")
    guard = replace(guard, reason="14.2 kHz at -48 dB re carrier on panel prow")
    notice = "the guard: 14.2 kHz at -48 dB re carrier for a second on panel prow, feeds 1-9"
    host.now = replace(host.now, output=output, guard=guard, notices=(notice,))

    async def what(pilot: Pilot) -> None:
        await pilot.press(screen)
        await shows(pilot, "- stage -" if screen == "f7" else "Night Tram")
        share = lit_share(strips(pilot.app), size[0] * size[1])
        print(f"lit cells at {size}, {screen}, {state}: {share:.3f}")
        assert 0.01 < share <= LIT_SHARE

    on_desk(host, what, size, Form())


@pytest.mark.parametrize("size", SIZES)
def test_few_cells_are_lit_while_a_barred_cue_stands_by(host, size) -> None:
    why = "over its cap at stalls B4 by 3.2 dB (40 kHz band, 103.2 against 100) 4.2 s after GO; "
    why += "whisper at trim -25.2 dB fits"
    host.now = replace(host.now, standby="13", barred={"13": why})

    async def what(pilot: Pilot) -> None:
        await shows(pilot, "BARRED 13")
        assert lit_share(strips(pilot.app), size[0] * size[1]) <= LIT_SHARE

    on_desk(host, what, size, Form())


@pytest.mark.parametrize("size", [(20, 5), (40, 12), (79, 23), (200, 70)])
def test_odd_sizes_do_not_break_the_guard_screen(host, size) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("f7")
        await shows(pilot, "- stage -")
        await pilot.resize_terminal(*size)
        await pilot.pause(0.3)
        await pilot.resize_terminal(80, 24)
        await shows(pilot, "- stage -")

    on_desk(host, what)


class Read:
    """Counts how often the caution was closed."""

    def __init__(self) -> None:
        self.times = 0

    def __call__(self) -> None:
        self.times += 1


def test_the_caution_stands_until_it_was_read(host) -> None:
    read = Read()

    async def what(pilot: Pilot) -> None:
        begin_s = time.monotonic()
        for key in ("enter", "f2", "f7", "f1", "plus", "escape", "asterisk"):
            await pilot.press(key)
            await pilot.pause(0.03)
        assert time.monotonic() - begin_s < READ_S, "too slow a machine to try an early Enter"
        assert isinstance(pilot.app.screen, CautionPage)
        assert read.times == 0
        await shows(pilot, "Enter: I have read this")
        await pilot.press("enter")
        await shows(pilot, "Night Tram")
        assert read.times == 1
        await pilot.press("enter")  # within the guard of the Enter before
        await pilot.pause(0.1)

    on_desk(host, what, on_read=read)
    assert host.acts == []
    assert read.times == 1


def test_a_held_enter_neither_closes_the_caution_nor_fires_a_cue(host) -> None:
    read = Read()

    async def what(pilot: Pilot) -> None:
        begin_s = time.monotonic()
        pilot.app.post_message(key_at("enter", begin_s))
        await shows(pilot, "Enter: I have read this")
        for n in range(150):
            pilot.app.post_message(key_at("enter", begin_s + 0.5 + 0.033 * n))
        await pilot.pause(0.2)
        assert isinstance(pilot.app.screen, CautionPage)

    on_desk(host, what, on_read=read)
    assert read.times == 0
    assert host.acts == []


@pytest.mark.parametrize("key", ["0", "insert", "f12"])
def test_hush_works_under_the_caution(host, key: str) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press(key)
        await until(pilot, lambda: host.acts)
        await shows(pilot, "output HUSHED")
        assert isinstance(pilot.app.screen, CautionPage)

    on_desk(host, what, on_read=Read())
    assert host.acts == [("hush", {})]


@pytest.mark.parametrize("size", [*SIZES, (40, 12)])
def test_the_caution_is_whole_where_it_fits_and_keeps_the_way_on(host, size) -> None:
    async def what(pilot: Pilot) -> None:
        text = text_of(pilot.app)
        assert "Please read." in text
        assert size < (80, 24) or "stop when anyone asks" in text

    on_desk(host, what, size, on_read=Read())
