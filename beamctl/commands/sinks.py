"""`beamctl sinks`: where samples can go."""

from __future__ import annotations

import json
from dataclasses import asdict

import click

from beamctl.commands.options import JSON


@click.command()
@JSON
def sinks(as_json: bool) -> None:
    """List output devices with their channels and rates."""
    from beamctl.sinks.portaudio import list_sinks

    found = list_sinks()
    if as_json:
        click.echo(json.dumps([asdict(sink) for sink in found], indent=2))
        return
    click.echo("null: no device, in real time\nfile:PATH: an RF64 file, in real time")
    for sink in found:
        click.echo(
            f"{sink.host_api}: {sink.name}: {sink.channels} channels, "
            f"{sink.default_rate_hz:g} Hz by default"
        )
