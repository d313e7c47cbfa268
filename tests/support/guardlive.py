"""Small shows with a guard to try: bad files, a house without seats, cues that are too much."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import soundfile
from support.smallshow import write_show

from beamctl.files.reader import load_show
from beamctl.files.signing import seal_of, sign
from beamctl.host.barring import cue_levels

TOGETHER = """format = 1
title = "Together"
[beam.left]
panel = "square"
[beam.right]
panel = "square"

[[cue]]
ref = "1"
title = "one"
[[cue.act]]
beam = "left"
sound = "tone.wav"
loop = true
seat = "A2"
depth = 0.0
trim_db = TRIM
over_s = 0.05

[[cue]]
ref = "2"
title = "its end"
[[cue.act]]
beam = "left"
fall_s = 0.1

[[cue]]
ref = "3"
title = "another"
[[cue.act]]
beam = "right"
sound = "tone.wav"
loop = true
seat = "A2"
depth = 0.0
trim_db = TRIM
over_s = 0.05

[[cue]]
ref = "4"
title = "the other end"
[[cue.act]]
beam = "right"
fall_s = 0.1
"""


def changed(folder: Path, file: str, old: str, new: str) -> Path:
    """The show with every `old` of a file replaced; unsigned by that."""
    text = (folder / file).read_text()
    assert old in text
    (folder / file).write_text(text.replace(old, new))
    return folder


def without_seats(folder: Path) -> Path:
    """The small show in a house where nobody is declared."""
    write_show(folder)
    sheet = (folder / "sheet.toml").read_text()
    (folder / "sheet.toml").write_text(re.sub(r'seat = "A\d"', "azimuth_deg = 1.0", sheet))
    (folder / "house.toml").write_text("format = 1\n")
    return folder


def too_much_together(folder: Path, left_db: float) -> Path:
    """A signed show of two cues that leave `left_db` each to the cap, and that the sheet parts."""
    write_show(folder)
    changed(folder, "rig.toml", "level_db_30cm_10v = 95.0", "level_db_30cm_10v = 115.0")
    at_s = np.arange(48_000) / 48_000
    soundfile.write(folder / "sounds/tone.wav", 0.5 * np.sin(2 * np.pi * 1_000 * at_s), 48_000)
    trim_db = -40.0
    for _ in range(2):  # near enough to linear, but not quite
        text = TOGETHER.replace("TRIM", f"{trim_db:.2f}")
        (folder / "sheet.toml").write_text(text)
        levels = cue_levels(load_show(folder), lambda *_: None)
        trim_db += min(levels[ref].margin_db for ref in ("1", "3")) - left_db
    (folder / "sheet.toml").write_text(TOGETHER.replace("TRIM", f"{trim_db:.2f}"))
    sign(folder, "a test", "2026-01-01", seal_of(folder))
    return folder
