"""`beamctl replay`: a journal rendered again and compared."""

from __future__ import annotations

import sys
from pathlib import Path

import click

from beamctl.commands.options import Bar
from beamctl.errors import ShowError


@click.command()
@click.argument("log", type=click.Path(path_type=Path))
@click.option("-o", "--output", type=click.Path(path_type=Path), help="Write the feeds as RF64.")
def replay(log: Path, output: Path | None) -> None:
    """Render the journal LOG again and compare with what left then. Exit 1 when it differs."""
    from beamctl.host import offline
    from beamctl.sinks.rf64 import Rf64Writer

    streams = offline.recall(log)
    forms = list(dict.fromkeys((s.show.channels, s.show.rig.rate_hz) for s in streams))
    if output and len(forms) > 1:
        told = ", then ".join(f"{feeds} feeds at {rate_hz} Hz" for feeds, rate_hz in forms)
        raise ShowError(f"{log.name}: {told}, which no one file can hold", "leave -o out")
    (channels, rate_hz), *_ = forms
    writer = Rf64Writer(output, rate_hz, channels) if output else None
    write = writer.write if writer else _discard
    try:
        with Bar(True) as progress:
            outcomes = offline.replay(streams, write, progress)
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
