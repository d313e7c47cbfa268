"""A show crosses to another process whole, and unchanged cues stay the objects that they were."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
from support.smallshow import write_show

from beamctl.files.reader import load_show
from beamctl.host.packing import pack, unpack
from beamctl.show.show import Show


def edited(show: Show) -> Show:
    one, two, *rest = show.sheet.cue
    new = two.model_copy(update={"title": "changed"})
    added = one.model_copy(update={"ref": "1.5"})
    return replace(
        show, sheet=show.sheet.model_copy(update={"cue": (one, added, new, *rest[::-1])})
    )


def test_a_show_comes_out_as_it_went_in(tmp_path: Path) -> None:
    before = load_show(write_show(tmp_path / "small"))
    after = edited(before)
    found = unpack(pack(after, before), before)
    assert (found.sheet, found.rig, found.house) == (after.sheet, after.rig, after.house)
    assert (found.sounds, found.digests, found.seal) == (after.sounds, after.digests, after.seal)
    for panel, cells in after.cells.items():
        np.testing.assert_array_equal(found.cells[panel].at_m, cells.at_m)
    kept = [cue for cue in found.sheet.cue if any(cue is old for old in before.sheet.cue)]
    assert [cue.ref for cue in kept] == ["1", "4", "3"]


def test_a_long_sheet_with_one_change_is_a_small_parcel(tmp_path: Path) -> None:
    show = load_show(write_show(tmp_path / "small"))
    cue = show.sheet.cue[0]
    cues = tuple(cue.model_copy(update={"ref": str(n)}) for n in range(1, 2_001))
    before = replace(show, sheet=show.sheet.model_copy(update={"cue": cues}))
    new = cue.model_copy(update={"ref": "7", "title": "changed"})
    after = replace(
        before, sheet=show.sheet.model_copy(update={"cue": (*cues[:6], new, *cues[7:])})
    )
    assert len(pack(after, before)) < 40_000
