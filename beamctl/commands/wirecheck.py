"""`beamctl wirecheck`: the feeds of a rig as it hangs, one at a time at a fixed low drive."""

from __future__ import annotations

import getpass
import sys
from collections.abc import Sequence
from datetime import datetime
from math import log10
from pathlib import Path
from typing import TYPE_CHECKING

import click

from beamctl.caution import CAUTION_TEXT
from beamctl.commands.options import SHOW, SINK
from beamctl.errors import ShowError
from beamctl.files.reader import load_show
from beamctl.show.show import Show

if TYPE_CHECKING:
    from beamctl.files.measurement import Measurement
    from beamctl.guard.wiring import Finding, Reading


@click.command()
@SHOW
@SINK
@click.option("--panel", metavar="NAME", help="Only this panel; without it every panel in turn.")
@click.option(
    "--levels",
    type=click.Path(path_type=Path),
    help="Sound nothing: read measured levels from this CSV file, with the columns feed, "
    "heard_at, level_db, with_reference_db.",
)
@click.option("--by", metavar="NAME", help="Who checks; without it the user of this computer.")
@click.option(
    "--mic-m",
    type=click.FloatRange(0.2, 20.0),
    default=1.0,
    show_default=True,
    help="Where the microphone stands: metres in front of the panel's centre.",
)
def wirecheck(
    show: Path, sink: str, panel: str | None, levels: Path | None, by: str | None, mic_m: float
) -> None:
    """Step through the feeds of SHOW at a fixed low drive and write down what is wrong.

    Each feed sounds alone and then with a reference feed; you mark it, or type its levels. Finds
    dead, reversed, swapped and weak feeds, and writes measured/PANEL-DATE.toml with a report beside
    it. Exit 0 when every panel passes, else 1.
    """
    who = _name(by)
    found = load_show(show)
    panels = _panels(found, panel, levels is not None)
    click.echo(f"{CAUTION_TEXT}\n")
    if levels is not None:
        marked = {panels[0]: _from_file(found, panels[0], levels)}
        sink = ""
    else:
        from beamctl.commands.wirelive import mark_live

        marked = mark_live(found, {name: _feeds(found, name) for name in panels}, sink, by, mic_m)
    judged = []
    for name, (readings, reference) in marked.items():
        others = [r for other in marked if other != name for r in marked[other][0]]
        judged.append(_judge(found, name, readings, others, reference, sink, who, mic_m))
    for measurement, findings in judged:
        _keep(found, measurement, findings)
    sys.exit(0 if all(measurement.passes for measurement, _ in judged) else 1)


def _name(by: str | None) -> str:
    try:
        name = (getpass.getuser() if by is None else by).strip()
    except (KeyError, OSError):
        name = ""  # a user whom the system has no name for
    if not 0 < len(name) <= 200:
        raise ShowError("nobody is named who checks", "--by NAME, of 1 to 200 characters")
    return name


def _panels(show: Show, panel: str | None, one: bool) -> list[str]:
    names = list(show.rig.panel)
    if panel is None and one and len(names) > 1:
        raise ShowError(f"the rig has {len(names)} panels", f"--panel {' or '.join(names)}")
    if panel is not None and panel not in names:
        raise ShowError(f"no panel is called {panel!r}", f"the rig has {', '.join(names)}")
    return names if panel is None else [panel]


def _feeds(show: Show, panel: str) -> list[int]:
    """The panel's live feeds by the rig's numbers, nearest to its centre first."""
    from beamctl.guard.lowdrive import from_centre

    return [show.rig.panel[panel].first_feed + f for f in from_centre(show.cells[panel])]


def _from_file(show: Show, panel: str, path: Path) -> tuple[list[Reading], int | None]:
    from beamctl.files.levels import read_levels
    from beamctl.guard.wiring import Reading, reference_among

    rows = read_levels(path, sorted(_feeds(show, panel)), show.channels)
    readings = [Reading(*row) for row in rows]
    heard = any(r.heard_at is not None and r.level_db is not None for r in readings)
    return readings, reference_among(readings) if heard else None


def _judge(
    show: Show,
    panel: str,
    readings: Sequence[Reading],
    others: Sequence[Reading],
    reference: int | None,
    sink: str,
    by: str,
    mic_m: float,
) -> tuple[Measurement, list[Finding]]:
    """What was met, held against the rig and the field model."""
    from beamctl.files.measurement import (
        MeasuredFeed,
        Measurement,
        panel_digest,
        reasons_against,
    )
    from beamctl.guard.lowdrive import at_microphone, drive_of
    from beamctl.guard.wiring import findings, over_model_db

    spec = show.rig.panel[panel]
    levels = at_microphone(show, panel, mic_m).expected_db
    expected_db = {r.feed: float(levels[r.feed - spec.first_feed]) for r in readings}
    found = findings(readings, expected_db, reference, others)
    over_db = over_model_db(readings, expected_db)
    feeds = tuple(
        MeasuredFeed(
            feed=r.feed,
            found=tuple(f.kind for f in found if f.feed == r.feed),
            heard_at=r.heard_at,
            level_db=r.level_db,
            with_reference_db=r.together_db,
        )
        for r in readings
    )
    measurement = Measurement(
        panel=panel,
        date=datetime.now().astimezone().isoformat(timespec="seconds"),
        by=by,
        sink=sink,
        passes=not reasons_against(feeds, sink, over_db),
        of=panel_digest(spec, show.cells[panel]),
        drive_db=round(20.0 * log10(drive_of(show, panel)), 2),
        mic_m=mic_m,
        reference=reference,
        over_model_db=over_db,
        air=show.house.air,
        feed=feeds,
    )
    return measurement, found


def _keep(show: Show, measurement: Measurement, found: Sequence[Finding]) -> None:
    from beamctl.commands.wirereport import report
    from beamctl.files.measurement import write_measurement

    text = report(show, measurement, found)
    path = write_measurement(Path(show.folder), measurement, text)
    click.echo(f"{text}\nwritten: {path}, and the report beside it")
    if measurement.passes:
        named = path.relative_to(show.folder).as_posix()
        click.echo(f"in rig.toml, under [panel.{measurement.panel}], then sign:")
        click.echo(f'measured = "{named}"')
