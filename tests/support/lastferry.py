"""A show as somebody writes it by hand: the texts of its five files."""

from __future__ import annotations

BY_HAND = {
    "rig.toml": """
format = 1
rate_hz = 192000

[panel.main]                # over the bow, on the centre line
at_m = [0.0, -0.5, 3.2]
pan_deg = 0.0
tilt_deg = -18.0
roll_deg = 0.0
carrier_hz = 40000.0
grid = { columns = 8, rows = 8, pitch_mm = 10.0 }
loom = "each"
first_feed = 1
volts_at_full_scale = 5.0
max_volts = 7.0
level_db_30cm_10v = 115.0
cell_mm = 9.0
resonance_hz = 40000.0
q = 20.0

[panel.aside]               # four columns, for the bell
at_m = [4.0, 0.5, 2.6]
pan_deg = -25.0
tilt_deg = -18.0
roll_deg = 0.0
carrier_hz = 40000.0
grid = { columns = 4, rows = 4, pitch_mm = 10.0 }
loom = "columns"
first_feed = 65
volts_at_full_scale = 5.0
max_volts = 7.0
level_db_30cm_10v = 115.0
cell_mm = 9.0
resonance_hz = 40000.0
q = 20.0
""",
    "house.toml": """
format = 1
air = { temperature_c = 21.5, humidity_pct = 50.0, pressure_kpa = 101.325 }
spot.gangway.at_m = [2.5, 3.0, 1.6]
spot.lamp.at_m = [-2.5, 6.5, 2.2]

[block.seats]
class = "seats"
first_m = [-1.925, 4.5, 1.2]
rows = ["A", "B", "C"]
row_step_m = [0.0, 0.9, 0.1]
seats = 8
seat_step_m = [0.55, 0.0, 0.0]

[block.crew]                # the prompt desk, at the side
class = "crew"
first_m = [-4.0, 1.5, 1.6]
rows = ["K"]
row_step_m = [0.0, 0.9, 0.0]
seats = 6
seat_step_m = [0.55, 0.0, 0.0]

[surface.quay]
corner_m = [-6.0, 9.0, 0.0]
along_m = [10.0, 0.0, 0.0]
up_m = [0.0, 0.0, 4.0]
reflection = 0.9
""",
    "sheet.toml": """
format = 1
title = "The last ferry"
beam = { voice.panel = "main", hum.panel = "main", bell.panel = "aside" }

[[cue]]
ref = "1"
title = "three knocks"
note = "a mallet"
[[cue.act]]
beam = "voice"
sound = "knock.flac"
seat = "B4"
law = "dsb"
depth = 0.7
trim_db = -32.0
over_s = 0.05

[[cue]]
ref = "2"
title = "engine"
note = "lamp out"
[[cue.act]]
beam = "hum"
sound = "hum.wav"
loop = true
seat = "A2"
law = "ssb"
trim_db = -34.0
over_s = 2.0

[[cue]]
ref = "3"
title = "it crosses row B"
note = "she turns"
act = [
    { beam = "hum", seat = "B1", over_s = 1.0 },
    { beam = "hum", seat = "B8", over_s = 4.0, at_s = 2.0 },
]

[[cue]]
ref = "4"
title = "it waits"
note = "she turns"
act = [{ beam = "hum", spot = "gangway", over_s = 4.0 }]

[[cue]]
ref = "5"
title = "off the quay"
note = "'who is there'"
[[cue.act]]
beam = "voice"
sound = "knock.flac"
seat = "C4"
via = "quay"
reach = "aim"
law = "root"
depth = 0.8
trim_db = -34.0

[[cue]]
ref = "6"
title = "from the lamp"
note = "'who is there'"
[[cue.act]]
beam = "voice"
sound = "knock.flac"
spot = "lamp"
via = "quay"
reach = "aim"
law = "root"
depth = 0.8
trim_db = -34.0

[[cue]]
ref = "7"
title = "bell"
note = "count to 4"
then = "8"
then_at_s = 6.0
[[cue.act]]
beam = "bell"
sound = "knock.flac"
azimuth_deg = 10.0
elevation_deg = 0.0
reach = 3.0
law = "mam"
trim_db = -36.0
[[cue.act]]
at_s = 4.0
beam = "bell"
fall_s = 0.5

[[cue]]
ref = "8"
title = "the hum dies"
note = "curtain"
act = [{ beam = "hum", fall_s = 1.5 }]

[[cue]]
ref = "20"
title = "gulls"
note = "in wind"
act = [{ beam = "voice", sound = "knock.flac", point_m = [0.0, 6.0, 3.0], trim_db = -40.0 }]

[[cue]]
ref = "25"
title = "engine again"
note = "lamp out"
[[cue.act]]
beam = "hum"
sound = "hum.wav"
loop = true
seat = "A2"
law = "ssb"
trim_db = -34.0
over_s = 2.0
""",
    "guard.toml": """
format = 1
seats_table = "irpa-1984-public"
crew_table = "irpa-1984-workers"
seats_db = 100
crew_db = 110
averaging_s = 1.0
dose_window_s = 3600
uncalibrated_margin_db = 10
""",
    "wire.toml": """
format = 1
listen = "127.0.0.1:61740"
rate_per_s = 50
heartbeat_s = 1.0
strict_standby = false
allow = { "127.0.0.1" = ["read", "trigger", "aim", "hush"] }
""",
}
