"""`beamctl inspect`: every error and warning of a show."""

from __future__ import annotations

import json
import sys
from dataclasses import asdict
from pathlib import Path

import click

from beamctl.caution import CAUTION_LINE
from beamctl.commands.options import JSON, SHOW
from beamctl.files.reader import read_show


@click.command()
@SHOW
@JSON
def inspect(show: Path, as_json: bool) -> None:
    """List every error and warning in SHOW. Exit 0 clean, 1 warnings, 2 errors."""
    found, problems = read_show(show)
    if as_json:
        click.echo(json.dumps([asdict(p) for p in problems], indent=2))
    else:
        for problem in problems:
            click.echo(f"{problem.severity}: {problem}")
        if found is not None:
            sheet, rig = found.sheet, found.rig
            click.echo(
                f"{sheet.title}: {len(sheet.cue)} cues, {len(sheet.beam)} beams, "
                f"{len(rig.panel)} panels, {found.channels} feeds at {rig.rate_hz} Hz"
            )
            click.echo(CAUTION_LINE)
    severities = {problem.severity for problem in problems}
    sys.exit(2 if "error" in severities else 1 if severities else 0)
