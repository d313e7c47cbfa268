"""The facts of the sounds that a sheet names, from their headers; no sample is read here."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator
from pathlib import Path

import soundfile as sf

from beamctl.files.folder import MISSING, trouble
from beamctl.files.locate import Key
from beamctl.show.checks import unknown
from beamctl.show.sheet import Sheet
from beamctl.show.show import SoundFacts

SOUNDS = "sounds"
LONGEST_S = 86_400.0
Report = Callable[[tuple[Key, ...], str], None]  # location in the sheet, what


def read_sounds(folder: Path, sheet: Sheet, report: Report) -> dict[str, SoundFacts]:
    """Facts of every sound that can be read, by the sheet's name; each trouble is told once."""
    facts: dict[str, SoundFacts] = {}
    for name, place in _first_uses(sheet).items():
        found = _facts(folder / SOUNDS, name)
        if isinstance(found, str):
            report(place, found)
        else:
            facts[name] = found
    return facts


def _first_uses(sheet: Sheet) -> dict[str, tuple[Key, ...]]:
    """Every sound of the sheet, and the act that names it first."""
    uses: dict[str, tuple[Key, ...]] = {}
    for i, cue in enumerate(sheet.cue):
        for j, act in enumerate(cue.act):
            if act.sound is not None:
                uses.setdefault(act.sound, ("cue", i, "act", j, "sound"))
    return uses


def _facts(sounds: Path, name: str) -> SoundFacts | str:
    """The facts of one sound, or what is wrong with it."""
    what = trouble(sounds, name)
    if what == MISSING:
        return unknown("file in sounds/", name, list(_listing(sounds)))
    if what:
        return f'"{name}": {what}'
    path = sounds / name
    try:
        info = sf.info(str(path))
    except (sf.LibsndfileError, OSError) as error:
        reason = getattr(error, "error_string", None) or str(error)
        return f'"{name}" is no sound that can be read: {reason.strip().rstrip(".")}'
    facts = SoundFacts(str(path.absolute()), info.frames, info.samplerate, info.channels)
    if facts.frames <= 0:
        return f'"{name}" holds no sound'
    if facts.seconds > LONGEST_S:
        return f'"{name}": its header tells of more than 24 hours'
    return facts


def _listing(sounds: Path) -> Iterator[str]:
    """Names of the files in the sounds folder; none when it cannot be listed."""
    try:
        yield from (entry.name for entry in os.scandir(sounds) if entry.is_file())
    except OSError:
        return
