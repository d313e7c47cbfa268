"""`beamctl desk`: the terminal interface, and a host for it."""

from __future__ import annotations

import contextlib
import sys
from collections.abc import Callable
from pathlib import Path

import click

from beamctl.commands.keys import user_keymap
from beamctl.commands.newshow import begin_show, is_new
from beamctl.commands.options import JOURNAL, SHOW, SINK
from beamctl.files.reader import load_show


@click.command()
@SHOW
@SINK
@JOURNAL
@click.option("--plain", is_flag=True, help="Plain ASCII, no block glyphs.")
def desk(show: Path, sink: str, journal: Path | None, plain: bool) -> None:
    """Open the desk on SHOW; starts a host, or joins the one that runs this show.

    Where SHOW is a folder that is missing or empty, it asks four questions and writes a show there
    that works.

    Leaving the desk never changes a sample. A host that this desk started ends with it, unless the
    output is OPEN, HUSHED or TRIPPED, or edits are not on disk: then it runs on, and `beamctl desk`
    joins it again.
    """
    from beamctl.commands.joining import HOST_STARTS_S, answers, said_by_host, start_host
    from beamctl.desk.app import run_desk
    from beamctl.host.link import Link
    from beamctl.host.places import state_folder

    keymap = user_keymap()
    if is_new(show):
        begin_show(show)
    load_show(show)
    link = Link(show)
    host = None if answers(link) else start_host(show, sink, journal, link)
    code = run_desk(link, state_folder() / "desk.log", plain, _unread(show), keymap)
    if host is not None and answers(link):
        seen = link.snapshot()
        if seen.output in ("OPEN", "HUSHED", "TRIPPED") or seen.edit.unsaved:
            unsaved = f", {seen.edit.unsaved} edits are not on disk," if seen.edit.unsaved else ""
            click.echo(f"The output is {seen.output}{unsaved} and the host runs on.")
            click.echo(f"  beamctl desk {show}   joins it;   beamctl host {show} --stop   ends it")
        else:
            link.stop_host()
            host.wait(HOST_STARTS_S)
    link.close()
    if host is not None and host.poll() not in (None, 0):
        raise said_by_host(host.returncode)
    sys.exit(code)


def _unread(show: Path) -> Callable[[], None] | None:
    """What to do once the caution was read here for this show; None when it was before."""
    from beamctl.host.places import show_key, state_folder

    mark = state_folder() / "cautioned" / show_key(show)

    def read() -> None:
        with contextlib.suppress(OSError):
            mark.parent.mkdir(exist_ok=True)
            mark.touch()

    return None if mark.exists() else read
