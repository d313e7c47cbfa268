"""The dated measurement file of a panel: what a wiring check found, and if it makes it measured.

It speaks of the panel as it was wired that day: `of` is the digest of what rig.toml and the cells
file said then, so that a rig that was changed since is not taken for the one that was measured.
"""

from __future__ import annotations

import itertools
import json
import os
from collections.abc import Sequence
from datetime import datetime
from hashlib import sha256
from pathlib import Path
from typing import Annotated, Literal, Self

import tomlkit
from pydantic import AfterValidator, Field, model_validator

from beamctl.acoustics.cells import CellMap
from beamctl.errors import DeviceError, ShowError
from beamctl.files.folder import Unreadable, read_text
from beamctl.files.problems import Problem
from beamctl.files.saving import write
from beamctl.files.tables import read_table
from beamctl.show.fields import Model, Name, Text
from beamctl.show.house import AirSpec
from beamctl.show.rig import PanelSpec

FOLDER = "measured"
LEVELS_NEEDED = 4  # feeds whose level must tie the rig to the model, or all when there are fewer
LOUDER_DB = 1.0  # what a measured rig may be over the model, and under it
QUIETER_DB = 3.0
HEAD = """\
Written by `beamctl wirecheck`, not by hand: a panel that was changed is measured again.
Feeds have the rig's numbers; levels are in dB re 20 µPa, mic_m in front of the panel's centre."""


def _check_date(text: str) -> str:
    try:
        datetime.fromisoformat(text)
    except ValueError:
        raise ValueError('a date such as "2026-12-01T14:05:00+01:00"') from None
    return text


Date = Annotated[str, AfterValidator(_check_date)]
Feed = Annotated[int, Field(ge=1, le=4096)]
Level = Annotated[float, Field(ge=-200.0, le=200.0)]
Faults = tuple[Literal["dead", "reversed", "swapped", "moved", "weak"], ...]


class MeasuredFeed(Model):
    """One feed: what is wrong with it, nothing when it passed, and its levels if measured."""

    feed: Feed
    found: Annotated[Faults, Field(strict=False)] = ()
    heard_at: Feed | None = None
    level_db: Level | None = None
    with_reference_db: Level | None = None


class Measurement(Model):
    """A panel as it was measured.

    date           ISO 8601
    sink           what it sounded through; "" when levels were read from a file
    of             digest of the panel, as `panel_digest`
    over_model_db  how much louder the feeds are than the field model; None: no level was measured
    passes         True when the panel counts as measured by this; must agree with `against`
    """

    format: Literal[1] = 1
    panel: Name
    date: Date
    by: Text
    sink: Annotated[str, Field(max_length=1000)]
    passes: bool
    of: Text
    drive_db: Level
    mic_m: Annotated[float, Field(gt=0.0, le=100.0)]
    reference: Feed | None = None
    over_model_db: Annotated[float, Field(ge=-500.0, le=500.0)] | None = None
    air: AirSpec
    feed: Annotated[tuple[MeasuredFeed, ...], Field(strict=False, min_length=1)]

    @model_validator(mode="after")
    def _agrees(self) -> Self:
        if self.passes == bool(self.against):
            told = "; ".join(self.against) or "nothing is against it"
            raise ValueError(f"passes = {str(self.passes).lower()}, but {told}")
        return self

    @property
    def against(self) -> tuple[str, ...]:
        """Every reason why the panel does not count as measured by this."""
        return reasons_against(self.feed, self.sink, self.over_model_db)


def reasons_against(
    feeds: Sequence[MeasuredFeed], sink: str, over_db: float | None
) -> tuple[str, ...]:
    """Why a panel does not count as measured by these feeds; empty when it does.

    sink     what it sounded through; "" when levels were read from a file
    over_db  how much louder the feeds are than the field model
    """
    faulty = sum(bool(feed.found) for feed in feeds)
    levels = sum(feed.level_db is not None for feed in feeds)
    needed = min(LEVELS_NEEDED, len(feeds))
    reasons = []
    if faulty:
        reasons.append(f"{faulty} of {len(feeds)} feeds have a fault")
    if sounds_nothing(sink):
        reasons.append(f"a rehearsal: nothing sounds from {sink}")
    if levels < needed or over_db is None:
        reasons.append(f"{levels} feeds with a level, {needed} are needed to check the model")
    elif over_db > LOUDER_DB:
        reasons.append(f"{over_db:.1f} dB louder than the model")
    elif over_db < -QUIETER_DB:
        reasons.append(f"{-over_db:.1f} dB quieter than the model, or not in dB re 20 µPa")
    return tuple(reasons)


def sounds_nothing(sink: str) -> bool:
    """True for a sink that keeps samples from the panels."""
    return sink == "null" or sink.startswith("file:")


def panel_digest(spec: PanelSpec, cells: CellMap) -> str:
    """SHA-256 in hex of what a measurement of a panel holds for: all but its place and trims."""
    where = {"at_m", "pan_deg", "tilt_deg", "roll_deg", "measured"}
    wired = {name: part.tolist() for name, part in cells._asdict().items() if name != "trim_db"}
    content = [spec.model_dump(exclude=where), wired]
    return sha256(json.dumps(content, sort_keys=True).encode()).hexdigest()


def read_measurement(path: Path) -> Measurement:
    """The measurement in a file; ShowError, with what is wrong, when it is none."""
    try:
        text, _ = read_text(path.parent, path.name)
    except Unreadable as error:
        raise ShowError(f"{path}: {error}") from None
    problems: list[Problem] = []
    table = read_table(path.name, text, Measurement, problems.append)
    if table is None or problems:
        told = "\n  ".join(str(problem) for problem in problems)
        raise ShowError(f"{path} is no measurement of a panel", told)
    return table.model


def write_measurement(folder: Path, measurement: Measurement, report: str) -> Path:
    """Write it, and its report beside it, to a show's folder; returns the path of the first.

    It is named after panel and day; a second of one day steps aside. DeviceError when the disk
    refuses.
    """
    stem = f"{measurement.panel}-{measurement.date[:10]}"
    names = itertools.chain([stem], (f"{stem}.{n}" for n in itertools.count(2)))
    places = (folder / FOLDER / f"{name}.toml" for name in names)
    try:
        (folder / FOLDER).mkdir(exist_ok=True)
        path = next(place for place in places if not place.exists())
    except OSError as error:
        reason = os.strerror(error.errno or 0).lower()
        raise DeviceError(f"{folder / FOLDER} cannot be written: {reason}") from error
    write({path.with_suffix(".txt"): report.encode(), path: _text(measurement).encode()})
    return path


def _text(measurement: Measurement) -> str:
    document = tomlkit.document()
    for line in HEAD.splitlines():
        document.add(tomlkit.comment(line))
    for key, value in measurement.model_dump(mode="json", exclude_none=True).items():
        document.add(key, value)
    return tomlkit.dumps(document)
