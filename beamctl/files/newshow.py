"""A new show from four answers: the texts of its folder, and one sound to begin with.

One panel, one block of seats, one beam and one cue, which says how the rest is written.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from beamctl.files.reader import WIRE
from beamctl.files.writing import written
from beamctl.show.checks import GUARD, HOUSE, RIG, SHEET

RATE_HZ = 48_000
SOUND = "knock.flac"
SEAT_M = 0.55  # from seat to seat
EAR_M = 1.2
CELL_MM = 9.0  # as wide as cells are made, where the pitch leaves the room
LETTERS = "ABCDEFGHIJKLMNOPQRSTUVWXYZ"


@dataclass(frozen=True, slots=True)
class Figure:
    """One number of an answer and its limits."""

    name: str
    low: float
    high: float
    whole: bool = False


@dataclass(frozen=True, slots=True)
class Question:
    """What is asked, an answer that will do, and the figures that an answer has."""

    asks: str
    example: str
    figures: tuple[Figure, ...]

    def read(self, text: str) -> tuple[float, ...]:
        """The figures of an answer; ValueError, in one line, when it has others."""
        words = re.split(r"[\s,xX×]+", text.strip())
        try:
            values = [float(word) for word in words]
        except ValueError:
            values = []
        if len(values) != len(self.figures):
            names = ", ".join(figure.name for figure in self.figures)
            raise ValueError(f"expected {names}, such as {self.example}")
        for figure, value in zip(self.figures, values, strict=True):
            kind = "a whole number" if figure.whole else "a number"
            if not figure.low <= value <= figure.high or (figure.whole and value % 1):
                limits = f"{kind} from {figure.low:g} to {figure.high:g}"
                raise ValueError(f"{figure.name}: {value:g}, expected {limits}")
        return tuple(values)


PANEL = Question(
    "Cells of the panel: columns x rows, and their pitch in mm", "8x8 10",
    (Figure("columns", 1, 32, True), Figure("rows", 1, 32, True), Figure("pitch", 2, 100)),
)  # fmt: skip
HANG = Question(
    "Where it hangs: x, y and z in m (across, away from the stage, up), and its tilt in degrees",
    "0 0 3 -15",
    (Figure("x", -1000, 1000), Figure("y", -1000, 1000), Figure("z", -1000, 1000),
     Figure("tilt", -90, 90)),
)  # fmt: skip
SEATS = Question(
    "Seats: rows x seats in a row, and how far in front of the panel the first row is in m",
    "5x10 4",
    (Figure("rows", 1, len(LETTERS), True), Figure("seats", 1, 200, True),
     Figure("first row", 0.5, 200)),
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class Answers:
    """A title, and the figures of the three other questions."""

    title: str
    panel: tuple[float, ...]
    hang: tuple[float, ...]
    seats: tuple[float, ...]


def read_title(text: str) -> str:
    """A title; ValueError when it will not do."""
    title = text.strip()
    if not (title.isprintable() and 0 < len(title) <= 200):
        raise ValueError("expected 1 to 200 letters")
    return title


def texts(answers: Answers, trim_db: float) -> dict[str, str]:
    """The text of each file, by its name; the one cue sounds at the trim."""
    columns, rows, pitch_mm = answers.panel
    x_m, y_m, z_m, tilt_deg = answers.hang
    lines, seats, first_m = answers.seats
    letters = LETTERS[: int(lines)]
    first = [x_m - SEAT_M * (seats - 1) / 2, y_m + first_m, EAR_M]
    places = {
        "title": written(answers.title),
        "seat": f"{letters[len(letters) // 2]}{int(seats + 1) // 2}",
        "trim": trim_db, "columns": int(columns), "rows": int(rows), "pitch": pitch_mm,
        "at": written([x_m, y_m, z_m]), "tilt": tilt_deg, "feeds": int(columns * rows),
        "cell": min(CELL_MM, 0.9 * pitch_mm), "seats": int(seats), "lines": written(list(letters)),
        "first": written([round(metres, 3) for metres in first]),
    }  # fmt: skip
    return {name: text.format(**places) for name, text in TEXTS.items()}


def knock() -> NDArray[np.float64]:
    """Three knocks on wood in two seconds, at RATE_HZ, the peak 6 dB under full scale."""
    t = np.arange(2 * RATE_HZ) / RATE_HZ
    sound = np.zeros_like(t)
    for start_s in (0.05, 0.45, 0.85):
        after_s = np.maximum(t - start_s, 0.0)
        for hz, fall_s in ((900.0, 0.05), (1430.0, 0.03), (2650.0, 0.015)):
            sound += np.sin(2.0 * np.pi * hz * after_s) * np.exp(-after_s / fall_s)
    knocks: NDArray[np.float64] = 0.5 * sound / np.max(np.abs(sound))
    return knocks


TEXTS = {
    SHEET: """\
# What an act does not name stays as the beam had it. A fresh beam: law dsb, depth 0.7, reach far,
# trim -60 dB. So the first act of a beam gives it a sound, an aim and a trim.
format = 1
title = {title}

# A beam is a named source on one panel.
[beam.voice]
panel = "main"

[[cue]]
ref = "1"
title = "three knocks at {seat}"
[[cue.act]]
beam = "voice"
sound = "knock.flac"
seat = "{seat}"
law = "dsb"
depth = 0.7
trim_db = {trim}         # quiet: the cap of every seat is kept with room to spare
over_s = 0.05
""",
    RIG: """\
# The rig: panels as they hang, and which channel drives what.
# Axes of the house: x across, y away from the stage, z up, in metres.
format = 1
rate_hz = 192000        # a 40 kHz carrier needs it: at 96 kHz converters end too low

[panel.main]
at_m = {at}
pan_deg = 0.0           # turned toward +x
tilt_deg = {tilt}        # up
roll_deg = 0.0
carrier_hz = 40000.0
grid = {{ columns = {columns}, rows = {rows}, pitch_mm = {pitch} }}
loom = "each"
first_feed = 1          # takes feeds 1 to {feeds}
volts_at_full_scale = 5.0       # rms of a full-scale sine at the cell: measure it
max_volts = 7.0         # from here on as the cell's data sheet has it
level_db_30cm_10v = 115.0
cell_mm = {cell}
resonance_hz = 40000.0
q = 20.0
""",
    HOUSE: """\
# The house. Axes: x across, y away from the stage, z up, in metres.
format = 1

# Read the air at the half and type it in: level at the seats follows humidity most of all.
[air]
temperature_c = 20.0
humidity_pct = 50.0
pressure_kpa = 101.325

# A row's first seat is the one at the smallest x. `first_m` is an ear, not a chair.
[block.seats]
class = "seats"
first_m = {first}
rows = {lines}
row_step_m = [0.0, 0.9, 0.1]
seats = {seats}
seat_step_m = [0.55, 0.0, 0.0]
""",
    GUARD: """\
# What the venue allows. Nobody has signed this show: the tables hold as they are, with the full
# margin for a rig that was never measured. `beamctl sign` puts the venue's name under it.
# Follow local codes, and ask qualified people.
format = 1
seats_table = "irpa-1984-public"
crew_table = "irpa-1984-workers"
seats_db = 100
crew_db = 110
averaging_s = 1.0
dose_window_s = 3600
uncalibrated_margin_db = 10
""",
    WIRE: """\
# Who may speak to this show over the network: this machine, and nobody else.
format = 1
listen = "127.0.0.1:61740"
rate_per_s = 50
heartbeat_s = 1.0
strict_standby = false

[allow]
"127.0.0.1" = ["read", "trigger", "aim", "hush"]
""",
}
