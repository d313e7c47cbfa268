"""The command line: the only place that chooses desk, host or a tool without a clock."""

from __future__ import annotations

from typing import Any

import click

from beamctl import __version__
from beamctl.commands.desk import desk
from beamctl.commands.host import host
from beamctl.commands.inspect import inspect
from beamctl.commands.keys import keys
from beamctl.commands.render import render
from beamctl.commands.replay import replay
from beamctl.commands.report import report
from beamctl.commands.sign import sign
from beamctl.commands.sinks import sinks
from beamctl.commands.wirecheck import wirecheck
from beamctl.errors import BeamctlError


class Tidy(click.Group):
    """Turns every error of our own tree into its two lines and its exit code."""

    def invoke(self, ctx: click.Context) -> Any:
        """Run the command; a traceback never reaches the screen."""
        try:
            return super().invoke(ctx)
        except BeamctlError as error:
            click.echo(f"beamctl: {error}", err=True)
            ctx.exit(error.exit_code)


@click.group(cls=Tidy, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__)
def main() -> None:
    """Programme and run steerable ultrasonic sound beams.

    A show is a folder: sheet.toml (cues), rig.toml (panels), house.toml (room), guard.toml (caps),
    wire.toml (network) and sounds/. Try the one that ships:

    \b
      beamctl inspect scenes/night-tram
      beamctl desk scenes/night-tram
      beamctl render scenes/night-tram --go 1@0.5 --for 6 -o tram.wav

    
    Before a show:  inspect (what is barred), wirecheck (what hangs), sign (who allows it)
    After it:       report (what the venue files), replay (the very samples again)

    Ask first: local rules and qualified people decide what may sound in a room.

    Exit codes: 0 done, 1 warnings or a failed check, 2 errors in the show, 4 the machine,
    6 a sink that does not offer what the rig needs.
    """


for command in (desk, host, inspect, keys, render, replay, report, sign, sinks, wirecheck):
    main.add_command(command)
