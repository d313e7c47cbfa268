"""A show and its sounds, ready for a renderer."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Mapping
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from beamctl.show.checks import SHEET
from beamctl.show.show import Show, SoundFacts
from beamctl.signal.cache import prepared
from beamctl.signal.conditioning import Preparation

Sounds = Mapping[str, Mapping[str, NDArray[np.float32]]]
Progress = Callable[[str, int, int], None]  # what, how many of them done, how many in all


Pairs = Mapping[tuple[str, str], SoundFacts]  # panel and sound that come together


def wanted_sounds(show: Show) -> Pairs:
    """Every panel with every sound that it plays, in the order of the sheet."""
    wanted: dict[tuple[str, str], SoundFacts] = {}
    for cue in show.sheet.cue:
        for act in cue.act:
            if act.sound is not None:
                wanted[show.panel_of(act.beam), act.sound] = show.sounds[act.sound]
    return wanted


def news_in(show: Show, before: Show, prepared: Pairs) -> str:
    """What an engine that plays `before`, with these sounds, does not have of `show`; "" for none.

    Cues can be taken up by an engine that runs, all else only by another one.
    """
    for name in sorted(show.digests.keys() | before.digests.keys()):
        if name != SHEET and show.digests.get(name) != before.digests.get(name):
            return name
    if show.sheet.beam != before.sheet.beam:
        return "another set of beams"
    wanted = wanted_sounds(show).items()
    return next((f"sound {pair[1]}" for pair, facts in wanted if prepared.get(pair) != facts), "")


def prepare_sounds(show: Show, progress: Progress) -> Sounds:
    """Every sound that a panel plays, prepared for its carrier, by panel and name."""
    wanted = wanted_sounds(show)
    sounds: dict[str, dict[str, NDArray[np.float32]]] = {name: {} for name in show.rig.panel}
    for done, (panel, sound) in enumerate(wanted):
        progress(f"sound {sound}", done, len(wanted))
        settings = Preparation.at(show.rig.panel[panel].carrier_hz, show.rig.rate_hz)
        sounds[panel][sound] = np.asarray(prepared(Path(show.sounds[sound].path), settings))
    return sounds


class Hashes:
    """SHA-256 of files, each worked out again only when its size or time has changed."""

    def __init__(self) -> None:
        self._known: dict[tuple[str, int, int], str] = {}

    def of(self, show: Show) -> dict[str, str]:
        """In hex, of every file that a show is played from, by its name in the folder."""
        sounds = {f"sounds/{name}": self._file(f.path) for name, f in show.sounds.items()}
        return dict(show.digests) | sounds

    def _file(self, path: str) -> str:
        status = Path(path).stat()
        key = path, status.st_size, status.st_mtime_ns
        if key not in self._known:
            with Path(path).open("rb") as file:
                self._known[key] = hashlib.file_digest(file, "sha256").hexdigest()
        return self._known[key]
