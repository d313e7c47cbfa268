"""The report as CSV: a row for every seat block at every reading."""

from __future__ import annotations

import csv
import io

from beamctl.report.evening import Evening
from beamctl.report.words import Times, plain

COLUMNS = (
    *("time", "second", "sample", "guard", "block", "class", "seat", "level_db", "band_hz"),
    *("cap_db", "headroom_db", "dose_pct", "dose_seat", "held_panel", "held_db"),
)


def rows(evening: Evening, times: Times) -> str:
    """The table, RFC 4180; `held` names the panel that is held most, and a quiet level is empty.

    Figures are the journal's own, unrounded but for headroom, which is cap minus level to 0.001 dB.
    """
    out = io.StringIO(newline="")
    writer = csv.writer(out)
    writer.writerow(COLUMNS)
    classes = evening.class_of
    for reading in evening.readings:
        at = reading.at
        panel = max(reading.held_db, key=lambda name: reading.held_db[name], default="")
        held = (plain(panel), reading.held_db.get(panel, ""))
        when = (times.stamp(at), f"{at.second:.3f}", at.sample, plain(reading.state))
        for block, seats in reading.blocks.items():
            headroom_db = seats.headroom_db
            left_db = None if headroom_db is None else round(headroom_db, 3)
            level = (seats.level_db, seats.band_hz, seats.cap_db, left_db)
            where = (plain(block), classes[block], plain(seats.seat))
            writer.writerow((*when, *where, *level, seats.dose_pct, plain(seats.dose_seat), *held))
    return out.getvalue()
