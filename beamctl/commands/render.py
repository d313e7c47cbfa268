"""`beamctl render`: every feed into a file, faster than real time."""

from __future__ import annotations

import json
import time
from pathlib import Path

import click

from beamctl.commands.options import SHOW, Bar, moment
from beamctl.errors import DeviceError, ShowError
from beamctl.files.reader import load_show
from beamctl.show.records import Record


@click.command()
@SHOW
@click.option("--go", "gos", multiple=True, metavar="REF@S", help="Fire cue REF at S; repeatable.")
@click.option("--for", "length", required=True, metavar="S", help="How long to render.")
@click.option(
    "-o", "--output", required=True, type=click.Path(path_type=Path), help="The RF64 file."
)
@click.option("--journal", type=click.Path(path_type=Path), help="Keep the records too.")
@click.option("--json", "as_json", is_flag=True, help="Machine-readable summary.")
def render(
    show: Path,
    gos: tuple[str, ...],
    length: str,
    output: Path,
    journal: Path | None,
    as_json: bool,
) -> None:
    """Render every feed of SHOW to an RF64 file, faster than real time.

    S is seconds, 3.5, or samples, 672000smp. The same player and renderer as live, without a clock:
    the file holds, sample for sample, what the sink would have been given. No exposure watchdog is
    in this version: it is what the sheet asks for, within the ratings of the rig.
    """
    from beamctl.host import offline
    from beamctl.host.journal import Journal
    from beamctl.sinks.rf64 import Rf64Writer

    found = load_show(show)
    rate_hz = found.rig.rate_hz
    samples = moment(length, rate_hz)
    if journal is not None and journal.exists():
        raise DeviceError(f"journal {journal} exists", "name another with --journal")
    asked = []
    for go in gos:
        ref, at, second = go.rpartition("@")
        if not at:
            raise ShowError(f"--go {go}: no time", "write --go REF@S, such as --go 12.5@3.5")
        asked.append((moment(second, rate_hz), ref))
    records = list(offline.play_through(found, asked, samples))
    writer = Rf64Writer(output, rate_hz, found.channels)
    started = time.monotonic()
    try:
        with Bar(not as_json) as progress:
            digest = offline.render(found, records, samples, writer.write, progress)
    except BaseException:
        writer.abandon()
        raise
    writer.close()
    if journal is not None:
        kept = Journal(journal, found, f"file:{output}")
        kept.write([Record(0, "stream"), *records, offline.left(samples, digest)])
        kept.close()
    seconds = samples / rate_hz
    spent = time.monotonic() - started
    summary = {"samples": samples, "channels": found.channels, "sha256": digest}
    if as_json:
        click.echo(json.dumps(summary | {"seconds": seconds, "took_s": spent}))
    else:
        click.echo(
            f"{output}: {found.channels} feeds, {seconds:g} s in {spent:.1f} s "
            f"({seconds / spent:.1f} x real time), sha256 {digest[:16]}"
        )
