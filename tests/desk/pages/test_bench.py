"""The Bench by keys: trials, taking them, sounding them, and the picture that follows."""

from __future__ import annotations

import random
import time
from collections.abc import Awaitable, Callable
from dataclasses import replace

from desk.driving import LIT_SHARE, lit_share, on_desk, strips, text_of, until
from textual.pilot import Pilot

from beamctl.desk.theme import Form
from beamctl.desk.verbs.bench import VERBS
from beamctl.show.edits import Set

Drive = Callable[[Pilot], Awaitable[None]]
WIDE = 100, 30
PATIENCE_S = 60.0  # a look is worked out beside whatever else the machine does


async def shows(pilot: Pilot, *texts: str) -> None:
    """Wait until all of the texts are on the screen."""
    end_s = time.monotonic() + PATIENCE_S
    while not all(text in text_of(pilot.app) for text in texts):
        assert time.monotonic() < end_s, text_of(pilot.app)
        await pilot.pause(0.02)


async def press(pilot: Pilot, *keys: str) -> None:
    """Keys as they are typed: apart, so that none is taken for a paste."""
    for key in keys:
        await pilot.press(key)
        await pilot.pause(0.03)


def on_bench(host, what: Drive, ref: str = "2", act: int = 0, size: tuple[int, int] = WIDE) -> None:
    """Run `what` on the Bench with an act of a cue under the cursor, once it has been drawn."""

    async def begin(pilot: Pilot) -> None:
        pilot.app.cursor.ref, pilot.app.cursor.act = ref, act
        await pilot.press("f4")
        await shows(pilot, f"cue {ref}  act {act + 1}", " dB under ")
        await what(pilot)

    on_desk(host, begin, size)


def sets(host) -> dict[str, object]:
    """What the one edit sets, in the act it was made on."""
    (edit,) = host.edits
    assert all(isinstance(step, Set) and step.file == "sheet.toml" for step in edit.steps)
    assert len({step.place for step in edit.steps}) == 1
    return {step.key: step.value for step in edit.steps}


def test_the_act_under_the_cursor_is_drawn_with_its_figures(host) -> None:
    found = replace(host.cue_levels()[0], ref="2")
    host.cue_levels = lambda: (found,)

    async def what(pilot: Pilot) -> None:
        await shows(pilot, "to    seat B4", "law   ssb 0.70", "stage -", "@", "Sound it now")
        await shows(pilot, "the whole cue, ")
        await press(pilot, "u", "y", "w")
        await until(pilot, lambda: len(host.histories) == 3)

    on_bench(host, what)
    assert host.acts == host.edits == []
    assert host.histories == ["undo", "redo", "save"]


def test_bounces_spots_and_a_target_from_a_box(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "v")
        await shows(pilot, "* to    seat B4 via back_wall")
        await press(pilot, "v")
        await shows(pilot, "to    seat B4  5.7 m")
        await press(pilot, "o")
        await shows(pilot, "* to    spot conductor")
        await press(pilot, "O")
        await shows(pilot, "* to    spot buffer")
        await press(pilot, "g", *"C6", "enter")
        await shows(pilot, "* to    seat C6")
        await press(pilot, "g", *"seat Z9", "enter")
        await shows(pilot, '"Z9", no such seat')
        await press(pilot, "escape", "right", "v")
        await shows(pilot, "A bounce needs a seat, a spot or a point")

    on_bench(host, what)


def test_the_section_the_height_of_the_plan_and_a_click_on_it(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "h", *"2.5", "enter")
        await shows(pilot, "plan at 2.5 m")
        await press(pilot, "x")
        await shows(pilot, "section along the beam", "floor")
        await press(pilot, "x", "h", "enter")
        await shows(pilot, "plan at 1.3 m")
        rows = text_of(pilot.app).splitlines()
        y = next(n for n, row in enumerate(rows) if "conductor" in row[:60])
        await pilot.click("#bench", offset=(rows[y].index("x"), y - 2))
        await shows(pilot, "* to    spot conductor")
        await pilot.click("#bench", offset=(2, 2))
        await shows(pilot, "* to    point ")

    on_bench(host, what)


def test_odd_sizes_do_not_break_it(host) -> None:
    async def what(pilot: Pilot) -> None:
        for size in ((20, 5), (40, 12), (80, 24), (200, 60)):
            await pilot.resize_terminal(*size)
            await press(pilot, "x", "right", "e", "escape", "x")
        await pilot.resize_terminal(*WIDE)
        await shows(pilot, "* tried", "plan at")

    on_bench(host, what)


def test_without_a_cursor_it_is_the_cue_that_stands_by(host) -> None:
    host.now = replace(host.now, standby="6A")

    async def what(pilot: Pilot) -> None:
        await pilot.press("f4")
        await shows(pilot, "cue 6A  act 1 of 1", "spot conductor")

    on_desk(host, what, WIDE)


def test_arrows_turn_from_where_it_points_and_the_map_follows(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "right", "right", "up")
        await shows(pilot, "* to    plain angles", "aim   az -1.8 el +0.0", "* tried")
        await press(pilot, "s", "left")
        await shows(pilot, "aim   az -1.9 el +0.0")
        await press(pilot, "s", "right")
        await shows(pilot, "aim   az +3.1 el +0.0")
        await press(pilot, "escape")
        await shows(pilot, "to    seat B4", "aim   az -2.8 el -0.5")

    on_bench(host, what)
    assert host.edits == []


def test_a_trial_is_taken_as_one_edit_of_the_act(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "n", "N", "l", "plus")
        await shows(pilot, "* to    seat C5", "* law   mam", "* trim  -26.5 dB")
        await press(pilot, "enter")
        await until(pilot, lambda: host.edits)
        await shows(pilot, "Taken")

    on_bench(host, what)
    assert sets(host) == {"seat": "C5", "law": "mam", "trim_db": -26.5}
    assert host.edits[0].steps[0].place == ("cue", "2", "act", 0)


def test_angles_in_place_of_a_seat_take_the_seat_and_the_bounce_away(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "right", "enter")
        await until(pilot, lambda: host.edits)

    on_bench(host, what, "4")
    assert sets(host) == {"seat": None, "via": None, "azimuth_deg": -4.3, "elevation_deg": 7.6}


def test_a_trial_is_gone_once_the_sheet_has_it(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "l", "enter")
        await until(pilot, lambda: host.edits)
        host.version += 1
        host.now = replace(host.now, sheet_version=host.version)
        await until(pilot, lambda: "* tried" not in text_of(pilot.app))

    on_bench(host, what)


def test_what_is_refused_is_said_and_stays_tried(host) -> None:
    host.refuses = "SHOW is locked"

    async def what(pilot: Pilot) -> None:
        await press(pilot, "l", "enter")
        await shows(pilot, "Not taken: SHOW is locked", "* law")

    on_bench(host, what)


def test_fields_are_asked_for_in_boxes(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "e", *"2", "enter")
        await shows(pilot, "2: expected a number from 0 to 1")
        await press(pilot, "backspace", *".4", "enter")
        await shows(pilot, "* law   ssb 0.40")
        await press(pilot, "k", *"2.5", "enter")
        await shows(pilot, "* over  2.5 s")
        await press(pilot, "r", *"aim", "enter")
        await shows(pilot, "* reach on the target")
        await press(pilot, "a", *"5 2", "enter")
        await shows(pilot, "needs a seat, a spot or a point_m, not angles")
        await press(pilot, "escape", "enter")
        await until(pilot, lambda: host.edits)

    on_bench(host, what)
    assert sets(host) == {"depth": 0.4, "over_s": 2.5, "reach": "aim"}


def test_sound_it_now_asks_for_a_trim_and_wants_the_trial_taken_first(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "l", "p")
        await shows(pilot, "Enter takes the trial first")
        await press(pilot, "escape", "p")
        await shows(pilot, "SOUND IT NOW", "Its own trim is")
        await press(pilot, "enter")
        await until(pilot, lambda: host.acts)
        host.now = replace(host.now, trying=("whisper",))
        await shows(pilot, "sounding now: whisper")
        await press(pilot, "q")
        await until(pilot, lambda: len(host.acts) == 2)

    on_bench(host, what)
    assert host.acts == [
        ("sound-now", {"ref": "2", "act": 0, "trim_db": -33.0}),
        ("sound-off", {"beam": "whisper"}),
    ]


def test_from_act_to_act_and_from_cue_to_cue(host) -> None:
    async def what(pilot: Pilot) -> None:
        await press(pilot, "l", "pagedown")
        await shows(pilot, "cue 3  act 1 of 2", "is forgotten")
        await press(pilot, "pagedown", "pagedown")
        await shows(pilot, "cue 4  act 1 of 1")
        await press(pilot, "pageup")
        await shows(pilot, "cue 3  act 2 of 2")
        assert (pilot.app.cursor.ref, pilot.app.cursor.act) == ("3", 1)

    on_bench(host, what)
    assert host.edits == []


def test_in_show_it_is_looked_at_and_nothing_else(host) -> None:
    host.now = replace(host.now, mode="SHOW")

    async def what(pilot: Pilot) -> None:
        await press(pilot, "right", "l", "p", "e")
        await pilot.pause(0.1)
        assert "* tried" not in text_of(pilot.app)

    on_bench(host, what)
    assert host.acts == host.edits == []


def test_an_empty_sheet_and_a_cue_without_acts_say_what_to_do(host) -> None:
    cue = host.show.sheet.cue[0].model_copy(update={"act": ()})
    sheet = host.show.sheet.model_copy(update={"cue": (cue,)})
    host.show = replace(host.show, sheet=sheet)

    async def what(pilot: Pilot) -> None:
        await pilot.press("f4")
        await shows(pilot, "Cue 1 has no act yet: the Sheet (F3) gives it one.")
        host.show = replace(host.show, sheet=sheet.model_copy(update={"cue": ()}))
        host.version += 1
        host.now = replace(host.now, sheet_version=host.version)
        await shows(pilot, "The sheet has no cue yet: the Sheet (F3) writes one.")
        await press(pilot, "right", "pagedown", "enter")

    on_desk(host, what, WIDE)
    assert host.edits == []


def test_any_keys_in_any_order_leave_it_standing(host) -> None:
    """Every verb of the Bench, and what may be typed into its boxes."""
    dice = random.Random(5)
    keys = sorted({key for verb in VERBS for key in verb.keys} - {"kp_enter"})
    typed = [*keys, *"0123456789.- ", "escape", "enter", "backspace"]

    async def what(pilot: Pilot) -> None:
        for n in range(160):
            if n % 40 == 0:
                host.now = replace(host.now, mode="SHOW" if n == 80 else "WRITE")
            await pilot.press(dice.choice(typed))
            await pilot.pause(0.008)
        host.now = replace(host.now, mode="WRITE")
        await press(pilot, "escape", "escape", "f2", "f4")
        await shows(pilot, "dB under", "WRITE")

    on_bench(host, what)


def test_few_cells_are_lit(host) -> None:
    async def what(pilot: Pilot) -> None:
        await pilot.press("f4")
        await shows(pilot, "dB under")
        share = lit_share(strips(pilot.app), 120 * 40)
        print(f"lit cells of the Bench: {share:.3f}")
        assert 0.01 < share <= LIT_SHARE

    host.now = replace(host.now, standby="2")
    on_desk(host, what, (120, 40), Form())
