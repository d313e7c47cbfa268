"""`beamctl render`: every feed into a file, faster than real time."""

from __future__ import annotations

import json
import time
from pathlib import Path

import click

from beamctl.commands.options import SHOW, Bar, moment
from beamctl.errors import DeviceError, ShowError
from beamctl.show.records import Record


@click.command()
@SHOW
@click.option("--go", "gos", multiple=True, metavar="REF@S", help="Fire cue REF at S; repeatable.")
@click.option("--for", "length", required=True, metavar="S", help="How long to render.")
@click.option(
    "-o", "--output", required=True, type=click.Path(path_type=Path), help="The RF64 file."
)
@click.option("--no-guard", is_flag=True, help="What was asked for, not what would have left.")
@click.option("--unbar", is_flag=True, help="Fire barred cues all the same, against the guard.")
@click.option("--vouch", default="", metavar="NAME", help="Who answers for a house without seats.")
@click.option("--journal", type=click.Path(path_type=Path), help="Keep the records too.")
@click.option("--json", "as_json", is_flag=True, help="Machine-readable summary.")
def render(
    show: Path,
    gos: tuple[str, ...],
    length: str,
    output: Path,
    no_guard: bool,
    unbar: bool,
    vouch: str,
    journal: Path | None,
    as_json: bool,
) -> None:
    """Render every feed of SHOW to an RF64 file, faster than real time.

    S is seconds, 3.5, or samples, 672000smp. The same player, renderer, final stage and guard as
    live, without a clock: the file holds, sample for sample, what the sink would have been given.
    A cue over its cap is barred, as live; what is held by the guard is told.
    """
    from beamctl.host import offline
    from beamctl.host.barring import barred, cue_levels
    from beamctl.host.document import Document, Loaded
    from beamctl.host.journal import Journal
    from beamctl.host.loading import Hashes
    from beamctl.host.stepped import Stepped
    from beamctl.sinks.rf64 import Rf64Writer

    document = Document.of(show)
    found = document.load()
    rate_hz = found.rig.rate_hz
    samples = moment(length, rate_hz)
    if journal is not None and journal.exists():
        raise DeviceError(f"journal {journal} exists", "name another with --journal")
    asked = [_go(go, rate_hz) for go in gos]
    guard = None if no_guard else Stepped(found)
    started = time.monotonic()
    with Bar(not as_json) as progress:
        bars = {} if no_guard or unbar else barred(cue_levels(found, progress))
        records = list(offline.play_through(found, asked, samples, bars, vouch))
        writer = Rf64Writer(output, rate_hz, found.channels)
        try:
            digest = offline.render(found, records, samples, writer.write, progress, guard)
        except BaseException:
            writer.abandon()
            raise
    writer.close()
    if guard is not None:
        records = sorted([*records, *guard.records], key=lambda record: record.sample)
    if journal is not None:
        loaded = Loaded(found, Hashes().of(found))
        kept = Journal(journal, loaded, document.with_lists(found.rig), f"file:{output}")
        kept.write([Record(0, "stream"), *records, offline.left(samples, digest)])
        kept.close()
    seconds, spent = samples / rate_hz, time.monotonic() - started
    held = guard.held_db if guard is not None else {}
    trip = guard.watch.trip if guard is not None else ""
    if as_json:
        summary = {"samples": samples, "channels": found.channels, "sha256": digest}
        told = {"seconds": seconds, "took_s": spent, "held_db": held, "trip": trip}
        click.echo(json.dumps(summary | told))
        return
    click.echo(
        f"{output}: {found.channels} feeds, {seconds:g} s in {spent:.1f} s "
        f"({seconds / spent:.1f} x real time), sha256 {digest[:16]}"
    )
    if no_guard:
        click.echo("without the guard: what was asked for, not what would have left")
    for panel, db in held.items():
        click.echo(f"{panel} was held down by up to {db:.1f} dB: {2 * db:.1f} dB of programme")
    if trip:
        click.echo(f"the guard tripped: {trip}")


def _go(text: str, rate_hz: int) -> tuple[int, str]:
    """Sample and cue of one --go."""
    ref, at, second = text.rpartition("@")
    if not at:
        raise ShowError(f"--go {text}: no time", "write --go REF@S, such as --go 12.5@3.5")
    return moment(second, rate_hz), ref
