"""`beamctl host`: a show without a desk."""

from __future__ import annotations

import signal
import sys
import time
from pathlib import Path

import click

from beamctl.commands.options import JOURNAL, SHOW, SINK
from beamctl.errors import DeviceError


@click.command()
@SHOW
@SINK
@JOURNAL
@click.option("--stop", is_flag=True, help="End the host that runs SHOW, by a 20 ms ramp.")
def host(show: Path, sink: str, journal: Path | None, stop: bool) -> None:
    """Run SHOW without a desk, until Ctrl-C or --stop."""
    from beamctl.commands.joining import HOST_STARTS_S, answers
    from beamctl.host.hosting import Host
    from beamctl.host.link import Link

    if stop:
        link = Link(show)
        if not answers(link):
            raise DeviceError(f"no host runs {show}", "nothing to end")
        link.stop_host()
        until = time.monotonic() + HOST_STARTS_S
        while answers(link) and time.monotonic() < until:
            time.sleep(0.05)
        return
    running = Host(show, sink, journal)
    for number in (signal.SIGINT, signal.SIGTERM):
        signal.signal(number, lambda *_: running.stop())
    click.echo(f"host of {show} on sink {sink}; journal {running.journal.path}")
    sys.exit(running.run())
