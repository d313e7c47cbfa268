"""Measured levels of a panel's feeds, from a CSV file.

The first line names the columns feed, heard_at, level_db and with_reference_db, in any order; every
other line is one feed. Feeds have the rig's numbers. An empty heard_at: heard nowhere. level_db may
be empty for what was heard nowhere on the panel; with_reference_db is empty for the reference.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Collection
from io import StringIO
from pathlib import Path
from typing import NamedTuple

from beamctl.errors import ShowError
from beamctl.files.folder import Unreadable, read_text
from beamctl.files.problems import shown

COLUMNS = ("feed", "heard_at", "level_db", "with_reference_db")
MOST_DB = 200.0
FORM = f"expected a first line {','.join(COLUMNS)}"


class Levels(NamedTuple):
    """One line of the file; levels in dB re 20 µPa at the microphone."""

    feed: int
    heard_at: int | None
    level_db: float | None
    with_reference_db: float | None


def read_levels(path: Path, feeds: Collection[int], channels: int) -> list[Levels]:
    """The levels of exactly these feeds, in their order; ShowError with the first thing wrong.

    `channels` is the highest feed number of the rig: a feed may be heard at any.
    """
    try:
        text, _ = read_text(path.parent, path.name)
    except Unreadable as error:
        raise ShowError(f"{path}: {error}") from None
    reader = csv.reader(StringIO(text, newline=""), strict=True)
    found: dict[int, Levels] = {}
    try:
        names = [name.strip() for name in next(reader, [])]
        if sorted(names) != sorted(COLUMNS):
            raise ShowError(f"{path}:1 columns: {shown(','.join(names))}, {FORM}")
        for row in reader:
            if row:
                place = f"{path}:{reader.line_num}"
                levels = _levels(place, names, row, feeds, channels)
                if levels.feed in found:
                    raise ShowError(f"{place} feed: {levels.feed} has an earlier line")
                found[levels.feed] = levels
    except csv.Error as error:
        raise ShowError(f"{path}:{reader.line_num}: not CSV: {error}") from None
    if missing := [str(feed) for feed in feeds if feed not in found]:
        named = ", ".join(missing[:8]) + (" …" if len(missing) > 8 else "")
        raise ShowError(f"{path}: no line for feed {named}", "every feed of the panel needs one")
    return [found[feed] for feed in feeds]


def _levels(
    place: str, names: list[str], row: list[str], feeds: Collection[int], channels: int
) -> Levels:
    if len(row) != len(names):
        raise ShowError(f"{place}: {len(row)} values, expected {len(names)}")
    values = dict(zip(names, (value.strip() for value in row), strict=True))
    feed = _whole(place, "feed", values["feed"], channels)
    if feed is None or feed not in feeds:
        raise ShowError(f"{place} feed: {shown(values['feed'])} is no live feed of the panel")
    heard_at = _whole(place, "heard_at", values["heard_at"], channels)
    level_db = _decibels(place, "level_db", values["level_db"])
    with_reference_db = _decibels(place, "with_reference_db", values["with_reference_db"])
    if level_db is None and with_reference_db is not None:
        raise ShowError(f"{place} level_db: empty, but with_reference_db is not")
    if level_db is None and heard_at in feeds:
        raise ShowError(f"{place} level_db: empty, but heard at {heard_at}")
    return Levels(feed, heard_at, level_db, with_reference_db)


def _whole(place: str, key: str, text: str, channels: int) -> int | None:
    if not text:
        return None
    if not (text.isascii() and text.isdigit() and len(text) < 6 and 1 <= int(text) <= channels):
        raise ShowError(f"{place} {key}: {shown(text)}, expected a feed from 1 to {channels}")
    return int(text)


def _decibels(place: str, key: str, text: str) -> float | None:
    if not text:
        return None
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not abs(value) <= MOST_DB:
        raise ShowError(f"{place} {key}: {shown(text)}, expected a level in decibels")
    return value
