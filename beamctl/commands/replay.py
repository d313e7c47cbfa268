"""`beamctl replay`: a journal rendered again and compared."""

from __future__ import annotations

import sys
from pathlib import Path

import click

from beamctl.commands.options import Bar


@click.command()
@click.argument("log", type=click.Path(path_type=Path))
@click.option("-o", "--output", type=click.Path(path_type=Path), help="Write the feeds as RF64.")
def replay(log: Path, output: Path | None) -> None:
    """Render the journal LOG again and compare with what left then. Exit 1 when it differs."""
    from beamctl.host import offline
    from beamctl.sinks.rf64 import Rf64Writer

    found, streams = offline.recall(log)
    writer = Rf64Writer(output, found.rig.rate_hz, found.channels) if output else None
    write = writer.write if writer else _discard
    try:
        with Bar(True) as progress:
            outcomes = offline.replay(found, streams, write, progress)
    except BaseException:
        if writer:
            writer.abandon()
        raise
    if writer:
        writer.close()
    said = {True: "the same samples", False: "DIFFERENT SAMPLES", None: "cut off, not compared"}
    for outcome in outcomes:
        click.echo(
            f"{log.name}: from sample {outcome.start}, {outcome.samples} samples: "
            f"{said[outcome.same]}, sha256 {outcome.digest}"
        )
    sys.exit(1 if any(outcome.same is False for outcome in outcomes) else 0)


def _discard(block: object) -> None:
    """Where feeds go that only their digest is wanted of."""
