"""`beamctl inspect`: every error and warning of a show, and how near each cue comes to its cap."""

from __future__ import annotations

import json
import sys
from collections.abc import Iterable
from dataclasses import asdict
from pathlib import Path

import click

from beamctl.caution import CAUTION_LINE
from beamctl.commands.options import JSON, SHOW, Bar
from beamctl.errors import ShowError
from beamctl.files.problems import Problem
from beamctl.files.reader import read_show
from beamctl.guard.bars import Level, unheard
from beamctl.show.show import Show

NAMED = 3  # seats that a warning names; the others are counted


@click.command()
@SHOW
@JSON
def inspect(show: Path, as_json: bool) -> None:
    """List every error and warning in SHOW, and every cue at the seat where it is nearest its cap.

    A cue over its cap is barred: a warning with the trim that fits. Exit 0 clean, 1 warnings,
    2 errors.
    """
    from beamctl.host.barring import cue_levels

    found, problems = read_show(show)
    levels: dict[str, Level] = {}
    if found is not None:
        try:
            with Bar(not as_json) as progress:
                levels = cue_levels(found, progress)
        except ShowError as error:  # a sound that could not be read to its end
            problems = [*problems, Problem("sounds", None, "", error.what)]
        problems = [*problems, *_guard_problems(found, levels.values())]
    if as_json:
        click.echo(json.dumps([asdict(p) for p in problems], indent=2))
    else:
        for problem in problems:
            click.echo(f"{problem.severity}: {problem}")
        if found is not None:
            _tell(found, levels)
    severities = {problem.severity for problem in problems}
    sys.exit(2 if "error" in severities else 1 if severities else 0)


def _guard_problems(show: Show, levels: Iterable[Level]) -> list[Problem]:
    """Barred cues, and people for whom nothing can be said."""
    problems = [
        Problem("sheet.toml", None, f"cue {level.ref}", f"barred, {level.bar.text}", "warning")
        for level in levels
        if level.bar is not None
    ]
    if behind := unheard(show):
        names = ", ".join(behind[:NAMED]) + (", …" if len(behind) > NAMED else "")
        what = f"{len(behind)} behind every panel ({names}): no level can be forecast there"
        problems.append(Problem("house.toml", None, "seats", what, "warning"))
    return problems


def _tell(show: Show, levels: dict[str, Level]) -> None:
    sheet, rig = show.sheet, show.rig
    click.echo(
        f"{sheet.title}: {len(sheet.cue)} cues, {len(sheet.beam)} beams, "
        f"{len(rig.panel)} panels, {show.channels} feeds at {rig.rate_hz} Hz"
    )
    if show.house.block:
        wide = max(len(text) for text in ("nearest its cap", *(v.seat for v in levels.values())))
        click.echo(
            f"{'cue':8} {'nearest its cap':{wide}} {'band kHz':>8} {'dB':>6} {'cap':>6} "
            f"{'left dB':>7} {'s after GO':>10}"
        )
        for cue in sheet.cue:
            click.echo(_row(cue.ref, levels.get(cue.ref), wide))
        click.echo(f"caps: {_held_to(show)}; dB re 20 µPa, margins included")
    else:
        click.echo("no seats in house.toml: no cue is held to a cap")
    click.echo(CAUTION_LINE)


def _row(ref: str, level: Level | None, wide: int) -> str:
    if level is None:
        return f"{ref:8} nothing is heard"
    barred = "  BARRED" if level.bar else ""
    return (
        f"{ref:8} {level.seat:{wide}} {level.band_hz / 1000.0:8g} {level.level_db:6.1f} "
        f"{level.cap_db:6g} {level.margin_db:7.1f} {level.at_s:10.1f}{barred}"
    )


def _held_to(show: Show) -> str:
    caps = show.caps
    tables = ", ".join(f"{who} {' and '.join(names)}" for who, names in caps.tables.items())
    signed = f"signed by {caps.signed_by} on {caps.signed_on}"
    return f"{tables}; {f'unsigned, {caps.unsigned}' if caps.unsigned else signed}"
