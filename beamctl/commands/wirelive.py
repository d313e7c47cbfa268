"""The live part of `beamctl wirecheck`: what is told before, the typed word, and the marking."""

from __future__ import annotations

import os
import sys
from collections.abc import Mapping, Sequence
from pathlib import Path

import click
import numpy as np

from beamctl.commands.joining import answers
from beamctl.errors import DeviceError, ShowError
from beamctl.files.measurement import sounds_nothing
from beamctl.guard.lowdrive import at_microphone, at_seats, drive_of
from beamctl.guard.wiring import Reading
from beamctl.host.link import Link
from beamctl.host.marking import KEYS_TEXT, Marking
from beamctl.host.priority import HOST_PRIORITY, ask_for_real_time, be_ordinary
from beamctl.host.stepping import Stepper
from beamctl.host.typed import Keys, Silenced
from beamctl.show.show import Show

WORD = "sound"
Marked = dict[str, tuple[list[Reading], int | None]]


def mark_live(
    show: Show, feeds: Mapping[str, Sequence[int]], sink: str, by: str | None, mic_m: float
) -> Marked:
    """Readings and reference of each panel of `feeds`; nothing sounds before the word is typed.

    feeds  by panel: its live feeds by the rig's numbers, nearest to its centre first

    DeviceError without a terminal, beside a host of this show, without the word, when the sink
    fails, and when the operator silences it.
    """
    if os.name != "posix" or not (sys.stdin.isatty() and sys.stdout.isatty()):
        raise DeviceError(
            "the feeds are marked with keys on a Unix terminal, and this is none",
            "run it in a terminal, or give measured levels with --levels FILE.csv",
        )
    _check_no_host(show)
    for panel in feeds:
        _tell_levels(show, panel, mic_m, by)
    if sounds_nothing(sink):
        click.echo(f"A rehearsal: nothing sounds from {sink}, and no panel becomes measured.")
    click.echo(f"\n{KEYS_TEXT}\n")
    if click.prompt(f'Type "{WORD}" to let it sound', default="", show_default=False) != WORD:
        raise DeviceError("nothing sounded and nothing is written", f'the word is "{WORD}"')
    _check_no_host(show)
    sys.setswitchinterval(0.0005)  # so that no thread keeps the key's or the ring's from running
    ask_for_real_time(HOST_PRIORITY)
    stepper = Stepper(show, sink, *_tones(show, feeds, mic_m))
    marked: Marked = {}
    try:
        with Keys(sys.stdin.fileno(), stepper.hush) as keys:
            stepper.open()
            for panel, order in feeds.items():
                _say(f"\n{panel}:\n")
                marking = Marking(stepper, keys, order, show.channels, _say)
                marked[panel] = marking.run(), marking.reference
    except Silenced:
        click.echo()
        raise DeviceError("silenced: nothing is written", exit_code=1) from None
    finally:
        stepper.close()
        be_ordinary()
    return marked


def _tones(
    show: Show, panels: Mapping[str, Sequence[int]], mic_m: float
) -> tuple[np.ndarray, np.ndarray]:
    """Phasor and carrier, both (C,), of every channel; what is not stepped through has none."""
    phasors, carriers_hz = np.zeros(show.channels, np.complex128), np.zeros(show.channels)
    for name in panels:
        spec = show.rig.panel[name]
        found = at_microphone(show, name, mic_m).phasors
        own = slice(spec.first_feed - 1, spec.first_feed - 1 + len(found))
        phasors[own], carriers_hz[own] = found, spec.carrier_hz
    return phasors, carriers_hz


def _check_no_host(show: Show) -> None:
    link = Link(Path(show.folder))
    try:
        if answers(link):
            raise DeviceError(
                "a host runs this show", f"end it first: beamctl host {show.folder} --stop"
            )
    finally:
        link.close()


def _tell_levels(show: Show, panel: str, mic_m: float, by: str | None) -> None:
    """What the drive gives, before it does; ShowError when it would pass the cap of any seat."""
    most_db = float(np.max(at_microphone(show, panel, mic_m).expected_db))
    drive_db = 20.0 * np.log10(drive_of(show, panel))
    told = f"{panel}: one feed at {drive_db:.0f} dB re full scale gives {most_db:.0f} dB at the "
    told += f"microphone, {mic_m:g} m in front of the panel"
    seats = at_seats(show, panel)
    if not seats:
        if by is None:
            raise ShowError("the house has no seat to judge the level by", "answer with --by NAME")
        click.echo(f"{told}.\n  There is no seat to judge the level by: {by} answers for it.")
        return
    near = seats[0]
    click.echo(
        f"{told},\n  and at most {near.alone_db:.0f} dB at {near.listener}, the nearest seat: "
        f"{near.with_reference_db:.0f} dB with the reference. The cap there is {near.cap_db:g} dB."
    )
    for seat in seats:
        if seat.with_reference_db > seat.cap_db:
            raise ShowError(
                f"{panel} could give {seat.with_reference_db:.0f} dB at {seat.listener}, "
                f"over its cap of {seat.cap_db:g} dB",
                "so near a panel even one feed is too much: check house.toml and rig.toml",
            )


def _say(text: str) -> None:
    sys.stdout.write(text)
    sys.stdout.flush()
