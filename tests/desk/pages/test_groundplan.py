"""The Desk's ground plan, its mode word, and its line about wire and edits."""

from __future__ import annotations

from dataclasses import replace

import pytest
from desk.driving import LIT_SHARE, lit_share, on_desk, strips, text_of, until
from textual.pilot import Pilot

from beamctl.desk.theme import Form
from beamctl.snapshot import BeamView, EditView, WireView

WIDE = 120, 40
BEAM = BeamView(
    "whisper", "prow", "2", "whisper.flac", "seat B4", -27.0, 0.7, "ssb", (-2.8, -0.5),
    (-2.8, -0.5), None, False,
)  # fmt: skip


def plan_of(app) -> list[str]:
    """The right part of the rows that hold the plan."""
    rows = [row[84:] for row in text_of(app).splitlines()]
    end = next(n for n, row in enumerate(rows) if "- stage -" in row)
    return rows[13:end]


def test_live_beams_are_on_the_plan_and_move_with_their_aim(host) -> None:
    host.now = replace(host.now, beams=(BEAM,))

    async def what(pilot: Pilot) -> None:
        await until(pilot, lambda: "- stage -" in text_of(pilot.app))
        first = plan_of(pilot.app)
        ends = [row.index("*") for row in first if "*" in row]
        assert len(ends) == 1
        host.now = replace(host.now, beams=(replace(BEAM, peak_deg=(16.0, -0.5)),))
        await until(pilot, lambda: plan_of(pilot.app) != first)
        moved = [row.index("*") for row in plan_of(pilot.app) if "*" in row]
        assert moved > ends
        host.now = replace(host.now, beams=(replace(BEAM, sound=""),))
        await until(pilot, lambda: not any("*" in row for row in plan_of(pilot.app)))

    on_desk(host, what, WIDE)


def test_a_small_terminal_leaves_it_out_and_keeps_the_mode(host) -> None:
    async def what(pilot: Pilot) -> None:
        await until(pilot, lambda: "no notices" in text_of(pilot.app))
        assert "- stage -" not in text_of(pilot.app)
        for mode in ("WRITE", "WALK", "SHOW"):
            host.now = replace(host.now, mode=mode)
            await until(pilot, lambda mode=mode: mode in text_of(pilot.app))

    on_desk(host, what)


@pytest.mark.parametrize(
    ("wire", "edit", "said"),
    [
        (WireView(), EditView(), "wire off"),
        (WireView("127.0.0.1:61740", "2 heard"), EditView(unsaved=1),
         "wire listens at 127.0.0.1:61740, 2 heard   1 edit not on disk"),
        (WireView(), EditView(unsaved=3, waits="looking through 4 cues"),
         "wire off   3 edits not on disk   looking through 4 cues"),
    ],
)  # fmt: skip
def test_wire_and_edits_in_one_line(host, wire: WireView, edit: EditView, said: str) -> None:
    host.now = replace(host.now, wire=wire, edit=edit)

    async def what(pilot: Pilot) -> None:
        await until(pilot, lambda: said in text_of(pilot.app))

    on_desk(host, what, WIDE)


def test_with_the_plan_few_cells_are_lit(host) -> None:
    beams = tuple(replace(BEAM, name=f"b{n}", peak_deg=(4.0 * n - 12.0, -1.0)) for n in range(7))
    host.now = replace(host.now, beams=beams)

    async def what(pilot: Pilot) -> None:
        await until(pilot, lambda: "- stage -" in text_of(pilot.app))
        share = lit_share(strips(pilot.app), WIDE[0] * WIDE[1])
        print(f"lit cells of the Desk with seven beams: {share:.3f}")
        assert share <= LIT_SHARE

    on_desk(host, what, WIDE, Form())
