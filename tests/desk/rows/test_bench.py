"""The figures and the picture of the Bench, from looks at the acts of a real show."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import pytest
from desk.conftest import NIGHT_TRAM

from beamctl.desk.bench.look import Look, Looker, Question
from beamctl.desk.bench.trial import Trial
from beamctl.desk.format import Row, length
from beamctl.desk.rows.bench import Bench, figure_rows, short_rows
from beamctl.desk.rows.benchmap import BELOW, RoomMap
from beamctl.desk.rows.legend import KEPT, short_legend
from beamctl.desk.rows.sheetwords import found_words
from beamctl.show.sheet import Act
from beamctl.snapshot import CueLevel

LOOKER = Looker()
SIZE = 60, 20


@cache
def look(ref: str, number: int = 0, section: bool = False, **fields: object) -> Look:
    act = cue(ref).act[number].model_copy(update=fields)
    return LOOKER.look(Question(NIGHT_TRAM, (1,), ref, number, act, section, None, *SIZE))


def cue(ref: str):
    return NIGHT_TRAM.sheet.cue[NIGHT_TRAM.sheet.position(ref)]


def bench(ref: str, number: int = 0, **fields: object) -> Bench:
    act: Act = cue(ref).act[number].model_copy(update=fields)
    panel = NIGHT_TRAM.panel_of(act.beam)
    return Bench(cue(ref), number, act, Trial(fields), look(ref, number, **fields), panel)


def text_of(rows: list[Row]) -> str:
    return "\n".join("".join(span.text for span in row) for row in rows)


def role_of(rows: list[Row], part: str) -> str:
    return next(span.role for row in rows for span in row if part in span.text)


def test_an_act_with_each_of_its_fields_and_what_it_leads_to() -> None:
    said = text_of(figure_rows(bench("2"), 40, 36))
    for part in (
        "cue 2  act 1 of 1  at 0.0 s",
        "whisper on prow, plays whisper.flac",
        "to    seat B4  5.7 m",
        "aim   az -2.8 el -0.5",
        "law   ssb 0.70  0 % ideal distortion",
        "tone -3.1 dB, seats get +1.7",
        "trim  -27.0 dB  fits to -",
        "reach far",
        "dB at the target",
        "guard   ",
        " of 100 benches A4",
    ):
        assert part in said, part


def test_what_is_tried_is_marked_and_waits_to_be_taken() -> None:
    rows = figure_rows(bench("2", law="dsb", trim_db=-20.0), 40, 36)
    said = text_of(rows)
    assert "* law   dsb 0.70  70 % ideal distortion" in said
    assert "* trim  -20.0 dB" in said
    assert "  to    seat B4" in said
    assert said.splitlines()[-1] == "* tried: Enter takes it, Esc forgets"
    assert "* tried" not in text_of(figure_rows(bench("2"), 40, 36))


def test_over_a_cap_it_says_by_how_much_and_what_that_costs() -> None:
    rows = figure_rows(bench("2", trim_db=-15.0), 40, 36)
    over_db = float(text_of(rows).split("worst")[1].split("OVER")[0])
    assert over_db > 0.0
    cost_db = float(text_of(rows).split(f"holds {over_db:.1f} dB, programme -")[1].split()[0])
    assert cost_db == pytest.approx(2.0 * over_db, abs=0.15)
    assert role_of(rows, "OVER") == "alarm"


def test_a_peak_that_is_pulled_aside_is_lit() -> None:
    assert role_of(figure_rows(bench("3", 1), 40, 36), "az +21.5 el -4.4") == "text"
    assert role_of(figure_rows(bench("2"), 40, 36), "az -2.8 el -0.5") == "dim"


def test_a_travel_is_told_in_degrees_and_degrees_a_second() -> None:
    assert "over  4.0 s  43.3 deg, 10.8 deg/s" in text_of(figure_rows(bench("3", 1), 40, 36))
    jump = text_of(figure_rows(bench("3", 1, over_s=0.0), 40, 36))
    assert "over  at once  43.3 deg, by a dip" in jump


def test_a_silent_beam_does_not_travel() -> None:
    assert "over  0.1 s\n" in text_of(figure_rows(bench("3"), 40, 36))


def test_an_act_that_ends_its_sound_says_so() -> None:
    assert "over  falls silent in 3.0 s" in text_of(figure_rows(bench("7", 1), 40, 36))


def test_second_beams_with_their_level_and_where_they_land() -> None:
    said = text_of(figure_rows(bench("3", 1), 40, 36))
    assert "2nd     -1.3 dB  az -28.7 el -4.3" in said
    assert "dB at the floor" in said
    louder = figure_rows(bench("5", 1, azimuth_deg=28.0, elevation_deg=0.0, point_m=None), 40, 36)
    assert role_of(louder, "2nd") == "dim"
    assert any(span.role == "attention" and "az -2" in span.text for row in louder for span in row)


def test_nobody_at_the_target_holds_no_cap() -> None:
    assert "nobody sits there: no cap holds" in text_of(figure_rows(bench("6"), 40, 36))


def test_a_bounce_and_a_focus() -> None:
    assert "to    seat C3 via back_wall" in text_of(figure_rows(bench("4"), 40, 36))
    assert "reach on the target  +0.0 dB there" in text_of(figure_rows(bench("4.5"), 40, 36))


def test_what_the_guard_found_and_why_a_cue_is_barred_stand_below() -> None:
    found = CueLevel("2", "benches A4", 40_000.0, 93.2, 100.0, 0.1)
    made = replace(bench("2"), found=found, barred="over its cap", trying=("whisper",), notice="x")
    said = text_of(figure_rows(made, 40, 40)).splitlines()
    assert f"the whole cue, {found_words(found)}" in " ".join(said)
    assert said[-3:] == ["BARRED: over its cap", "sounding now: whisper", "x"]


def test_what_the_cross_checks_say_of_a_trial() -> None:
    wide = bench("1", azimuth_deg=0.0, elevation_deg=9.0)
    said = text_of(figure_rows(wide, 60, 40))
    assert "9, but the loom cannot steer in elevation: expected 0" in said


@pytest.mark.parametrize("height", [0, 1, 7, 12, 36])
@pytest.mark.parametrize("width", [1, 20, 40, 80])
def test_they_fit_any_room(width: int, height: int) -> None:
    made = bench("3", 1, trim_db=-20.0)
    for rows in (figure_rows(made, width, height), short_rows(made, width, height)):
        assert len(rows) <= height
        assert all(length(row) <= width for row in rows)


def test_a_small_terminal_has_act_and_levels_side_by_side() -> None:
    said = text_of(short_rows(bench("2", trim_db=-20.0), 80, 7)).splitlines()
    assert "dB at the target" in said[0]
    assert said[-1] == "* tried: Enter takes it, Esc forgets"


@pytest.mark.parametrize("section", [False, True])
def test_the_picture_has_the_target_and_the_key(section: bool) -> None:
    rows = RoomMap().rows(NIGHT_TRAM, look("2", 0, section))
    said = text_of(rows)
    assert len(rows) == SIZE[1] + BELOW
    assert all(length(row) <= SIZE[0] for row in rows)
    assert "@" in said and "#" in said
    assert ("section along the beam" if section else "plan at 1.3 m") in said


def test_the_loudest_of_the_plan_is_at_the_target() -> None:
    """Loudest where the beam comes down to that height, but for what falls under the panel."""
    seen = look("2")
    seats = seen.levels_db[: SIZE[1] // 2]
    row, column = divmod(int(seats.argmax()), SIZE[0])
    assert seen.sight.target_m is not None
    at = seen.projection.cell(seen.sight.target_m)
    assert abs(column - at[0]) <= 1
    assert abs(row - at[1]) <= 2


def test_a_higher_plan_is_another_picture() -> None:
    act = cue("2").act[0]
    looks = [
        LOOKER.look(Question(NIGHT_TRAM, (1,), "2", 0, act, False, height_m, *SIZE))
        for height_m in (1.3, 2.5)
    ]
    assert looks[1].plane == "plan at 2.5 m"
    assert looks[1].levels_db.max() > looks[0].levels_db.max() + 3.0


# -- the legend -----------------------------------------------------------------------------------

ENTRIES = [("Left", "Aim"), ("Right", "Aim"), *((k, f"Verb {k}") for k in "abcdefgh")]
ALWAYS = [("0", KEPT[0]), ("F11", KEPT[1]), ("F1..F8", KEPT[2])]


def test_keys_of_one_title_share_a_place() -> None:
    assert text_of(short_legend([*ENTRIES, *ALWAYS], 200, 1)).startswith("Left/Right: Aim")


@pytest.mark.parametrize("most", [1, 2, 3])
def test_hush_the_list_of_all_and_the_screens_are_never_left_out(most: int) -> None:
    rows = short_legend([*ENTRIES, *ALWAYS], 60, most)
    assert len(rows) <= most
    assert all(f"{keys}: {title}" in text_of(rows) for keys, title in ALWAYS)
