"""The keys in few rows: entries of one title share a place, and what does not fit is in the list
of all actions."""

from __future__ import annotations

from itertools import groupby

from beamctl.desk.format import Row
from beamctl.desk.registry import EVERYTHING
from beamctl.desk.rows.parts import legend_rows

KEPT = (EVERYTHING["hush"].title, EVERYTHING["palette"].title, "Screens")  # never left out

Entry = tuple[str, str]  # keys, title


def short_legend(entries: list[Entry], width: int, most: int) -> list[Row]:
    """At most `most` rows of (keys, title); the last entries give way, but for those KEPT."""
    shared = [
        ("/".join(keys for keys, _ in group), title)
        for title, group in groupby(entries, key=lambda entry: entry[1])
    ]
    kept = [entry for entry in shared if entry[1] in KEPT]
    others = [entry for entry in shared if entry[1] not in KEPT]
    rows = legend_rows([*others, *kept], width)
    while len(rows) > most and others:
        others.pop()
        rows = legend_rows([*others, *kept], width)
    return rows
