"""`beamctl keys`: every action of the desk, its keys, and where to bind others."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING

import click
from platformdirs import user_config_path

from beamctl.commands.options import JSON
from beamctl.errors import ShowError
from beamctl.files.keyfile import DO, read_keys

if TYPE_CHECKING:
    from beamctl.desk.keymap import Keymap


@click.command()
@JSON
def keys(as_json: bool) -> None:
    """List every action of the desk with its keys, and where to bind others.

    Your own keys go into keys.toml of your configuration folder, a line for each action:

        go = ["enter", "f9"]

    Insert and F12 hush whatever that file says. The desk's key test (F11, "Key test") shows what
    your terminal calls a key.
    """
    from beamctl.desk.registry import EVERYTHING

    keymap, path = user_keymap(), key_file()
    if as_json:
        rows = [
            {"action": a.name, "keys": keymap.keys_of(a.name), "on": a.on, "help": a.help}
            for a in EVERYTHING.values()
        ]
        click.echo(json.dumps(rows, indent=2))
        return
    click.echo(f"# {path}{'' if path.exists() else ', which does not exist yet'}")
    for action in EVERYTHING.values():
        where = f"  # on {', '.join(action.on)}" if action.on else ""
        click.echo(f"{action.name} = {json.dumps(list(keymap.keys_of(action.name)))}{where}")
        click.echo(f"    {action.help}")


def key_file() -> Path:
    """Where the user's own keys are."""
    return user_config_path("beamctl", appauthor=False) / "keys.toml"


def user_keymap() -> Keymap:
    """The desk's keys with the user's own; ShowError when these will not do."""
    from beamctl.desk.keymap import Keymap, complaints

    own = read_keys(key_file())
    if wrong := complaints(own):
        raise ShowError(f"{key_file()}: {wrong[0]}", DO)
    return Keymap(own)
