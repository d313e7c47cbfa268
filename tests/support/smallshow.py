"""A show of twenty feeds in a folder, with sounds made on the spot."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import soundfile

from beamctl.files.signing import seal_of, sign

RATE_HZ = 192_000
FEEDS = 20
FOLLOW_S = 0.4
TRAVEL_AT_S = 0.1

SHEET = """format = 1
title = "Small"
[beam.drone]
panel = "square"
[beam.voice]
panel = "square"
[beam.side]
panel = "strip"

[[cue]]
ref = "1"
title = "a loop"
[[cue.act]]
beam = "drone"
sound = "tone.wav"
loop = true
seat = "A1"
law = "ssb"
trim_db = -20.0
over_s = 0.05

[[cue]]
ref = "2"
title = "a travel"
[[cue.act]]
beam = "voice"
sound = "burst.wav"
seat = "A2"
law = "root"
trim_db = -24.0
over_s = 0.02
[[cue.act]]
at_s = 0.1
beam = "voice"
seat = "A4"
over_s = 0.3

[[cue]]
ref = "3"
title = "one that is followed"
then = "4"
then_at_s = 0.4
[[cue.act]]
beam = "side"
sound = "burst.wav"
azimuth_deg = 10.0
law = "mam"
trim_db = -20.0
over_s = 0.02

[[cue]]
ref = "4"
title = "the loop ends"
[[cue.act]]
beam = "drone"
fall_s = 0.1
[[cue.act]]
at_s = 0.05
beam = "side"
sound = "tone.wav"
azimuth_deg = -10.0
over_s = 0.05
"""

CELL_DB = 95.0  # of one cell: quiet ones, so that nothing here comes near its cap

CELL = f"""volts_at_full_scale = 5.0
max_volts = 7.0
level_db_30cm_10v = {CELL_DB}
cell_mm = 9.0
resonance_hz = 40000.0
q = 20.0
"""

RIG = f"""format = 1
rate_hz = {RATE_HZ}
[panel.square]
at_m = [0.0, 0.0, 3.0]
tilt_deg = -17.0
grid = {{ columns = 4, rows = 4, pitch_mm = 10.0 }}
{CELL}
[panel.strip]
at_m = [0.5, 0.0, 3.0]
tilt_deg = -17.0
cells = "strip.csv"
loom = "csv"
first_feed = 17
{CELL}"""

STRIP = """x_mm,z_mm,feed,polarity,trim_db,phase_deg,dead
-12.0,4.0,1,1,0,0,0
-12.0,-4.0,1,1,0,0,0
-4.0,4.0,2,-1,-1,0,0
-4.0,-4.0,2,-1,-1,0,0
4.0,4.0,3,1,0,30,0
4.0,-4.0,3,1,0,30,0
12.0,4.0,4,1,0,0,0
12.0,-4.0,4,1,0,0,1
"""

HOUSE = """format = 1
[block.row]
class = "seats"
first_m = [-0.825, 4.5, 1.2]
rows = ["A"]
row_step_m = [0.0, 0.9, 0.1]
seats = 4
seat_step_m = [0.55, 0.0, 0.0]
"""

GUARD = """format = 1
[signed]
by = "a test"
on = "2026-01-01"
digest = "none"
"""


def write_show(folder: Path) -> Path:
    """The show as files in `folder`, which is made; it has neither errors nor warnings."""
    (folder / "sounds").mkdir(parents=True)
    texts = {"sheet": SHEET, "rig": RIG, "house": HOUSE, "guard": GUARD}
    for name, text in texts.items():
        (folder / f"{name}.toml").write_text(text)
    (folder / "strip.csv").write_text(STRIP)
    _write_sounds(folder / "sounds")
    sign(folder, "a test", "2026-01-01", seal_of(folder))
    return folder


def write_steady_show(folder: Path, tone_hz: int) -> Path:
    """One panel of 64 feeds, and one cue: eight seconds of a tone that rise over half a second."""
    (folder / "sounds").mkdir(parents=True)
    (folder / "sheet.toml").write_text("""format = 1
title = "Steady"
[beam.tone]
panel = "square"
[[cue]]
ref = "1"
title = "a tone"
[[cue.act]]
beam = "tone"
sound = "steady.wav"
seat = "A3"
law = "dsb"
depth = 0.7
trim_db = -12.0
over_s = 0.5
""")
    (folder / "rig.toml").write_text(f"""format = 1
rate_hz = {RATE_HZ}
ring_ms = 64.0
[panel.square]
at_m = [0.0, 0.0, 3.0]
tilt_deg = -17.0
grid = {{ columns = 8, rows = 8, pitch_mm = 10.0 }}
{CELL}""")
    (folder / "house.toml").write_text(HOUSE)
    (folder / "guard.toml").write_text(GUARD)
    at_s = np.arange(8 * 48_000) / 48_000
    soundfile.write(folder / "sounds/steady.wav", 0.5 * np.sin(2 * np.pi * tone_hz * at_s), 48_000)
    sign(folder, "a test", "2026-01-01", seal_of(folder))
    return folder


def _write_sounds(folder: Path) -> None:
    at_s = np.arange(9_600) / 48_000
    tone = 0.5 * np.sin(2 * np.pi * 1_000 * at_s)
    noise = np.random.default_rng(5).normal(0.0, 0.2, 14_400) * np.hanning(14_400)
    soundfile.write(folder / "tone.wav", tone, 48_000)
    soundfile.write(folder / "burst.wav", noise, 48_000)
