"""`beamctl sign`: the venue's name under guard, rig and house."""

from __future__ import annotations

import sys
from collections.abc import Iterator, Mapping
from datetime import date
from pathlib import Path
from textwrap import fill

import click

from beamctl.acoustics.exposure import TABLES
from beamctl.caution import CAUTION_TEXT
from beamctl.commands.options import SHOW
from beamctl.errors import DeviceError
from beamctl.files.measurement import read_measurement
from beamctl.files.reader import load_show
from beamctl.files.signing import sign as write_signature
from beamctl.show.limits import Signed
from beamctl.show.show import Show
from beamctl.show.standing import Caps, standing

WORD = "sign"
WIDTH = 80


@click.command()
@SHOW
@click.option("--by", metavar="NAME", help="Who signs for the venue; asked for when left out.")
@click.option("--word", metavar=WORD, help=f"The word {WORD}; asked for when left out.")
def sign(show: Path, by: str | None, word: str | None) -> None:
    """Put the venue's name under the caps, the rig and the house of SHOW.

    It says what will hold, and what is looser than in an unsigned show. Any edit of guard.toml,
    rig.toml, house.toml, or of a file that rig.toml names, undoes the signature.
    """
    found = load_show(show)
    _refuse_while_open(show)
    click.echo("\n".join([*_what_is_signed(found), "", CAUTION_TEXT, ""]))
    try:
        name = by if by is not None else click.prompt("Who signs for the venue")
        typed = word if word is not None else click.prompt(f"Type the word {WORD} to sign")
    except click.Abort:
        click.echo()
        typed = ""
    if typed != WORD:
        click.echo(f"beamctl: the word {WORD} was not given: nothing was signed", err=True)
        sys.exit(1)
    _refuse_while_open(show)
    write_signature(show, name, date.today().isoformat(), found.seal)
    click.echo(f"signed by {name.strip()}")


def _refuse_while_open(show: Path) -> None:
    from beamctl.commands.joining import answers
    from beamctl.host.link import Link

    link = Link(show)
    try:
        if answers(link) and link.snapshot().output == "OPEN":
            raise DeviceError(f"the output of {show} is OPEN", "shut it, then sign")
    finally:
        link.close()


def _what_is_signed(show: Show) -> Iterator[str]:
    """What a signature would make hold, as lines."""
    guard = show.guard
    name = Signed(by="-", on="-", digest=show.seal)
    caps = standing(guard.model_copy(update={"signed": name}), show.rig, show.seal)
    plain = standing(guard.model_copy(update={"signed": None}), show.rig, show.seal)
    yield f"{show.sheet.title}: {show.folder}"
    yield f"Now: {_now(show.caps)}."
    over = f"averaged over {caps.averaging_s:g} s"
    yield f"\nCaps, dB re 20 µPa in third-octave bands at the ear, {over}"
    yield from _bands({"seats": caps.seats_db, "crew": caps.crew_db})
    for kind, tables in caps.tables.items():
        blocks = {n: b for n, b in show.house.block.items() if b.class_ == kind}
        places = sum(len(block.rows) * block.seats for block in blocks.values())
        where = f" in {', '.join(blocks)}" if blocks else ""
        which = "the first that speaks in a band of" if len(tables) > 1 else "the table"
        yield f"\n{kind}: {places or 'no'} places{where}, held to {which}"
        yield from (_paragraph(f"{t}: {TABLES[t].source}; {TABLES[t].standing}") for t in tables)
    yield "\nPanels"
    yield from (_paragraph(f"{panel}: {_margin(show, panel, caps)}") for panel in show.rig.panel)
    yield "\nLooser than unsigned"
    yield from _looser(caps, plain) or ("  nothing",)


def _now(caps: Caps) -> str:
    if caps.unsigned:
        return f"unsigned, {caps.unsigned}"
    return f"signed by {caps.signed_by} on {caps.signed_on}, and not edited since"


def _bands(rows: Mapping[str, Mapping[float, float]]) -> Iterator[str]:
    """Caps in columns, one a band."""
    bands = next(iter(rows.values()))
    yield f"  {'kHz':8}" + "".join(f"{hz / 1e3:>7g}" for hz in bands)
    for name, caps in rows.items():
        yield f"  {name:8}" + "".join(f"{cap:>7g}" for cap in caps.values())


def _margin(show: Show, panel: str, caps: Caps) -> str:
    margin_db = caps.margin_db[panel]
    if file := show.rig.panel[panel].measured:
        found = read_measurement(Path(show.folder) / file)
        return f"measured on {found.date} by {found.by}, {file}: counts as the model says"
    return f"not measured: counts {margin_db:g} dB louder than the model says"


def _looser(caps: Caps, plain: Caps) -> list[str]:
    """What the signature makes looser, each with what would hold without it."""
    found = []
    for kind, held, unsigned in (
        ("seats", caps.seats_db, plain.seats_db),
        ("crew", caps.crew_db, plain.crew_db),
    ):
        found += [
            f"  {kind}, {hz / 1e3:g} kHz: {held[hz]:g} dB, unsigned {unsigned[hz]:g} dB"
            for hz in held
            if held[hz] > unsigned[hz]
        ]
    if caps.averaging_s > plain.averaging_s:
        found.append(f"  averaged over {caps.averaging_s:g} s, unsigned {plain.averaging_s:g} s")
    found += [
        f"  {panel}: margin {margin_db:g} dB, unsigned {plain.margin_db[panel]:g} dB"
        for panel, margin_db in caps.margin_db.items()
        if margin_db < plain.margin_db[panel]
    ]
    return found


def _paragraph(text: str) -> str:
    return fill(text, WIDTH, initial_indent="  ", subsequent_indent="    ")
