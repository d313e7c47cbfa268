"""A show and its sounds, ready for a renderer."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Mapping
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from beamctl.show.show import Show
from beamctl.signal.cache import prepared
from beamctl.signal.conditioning import Preparation

Sounds = Mapping[str, Mapping[str, NDArray[np.float32]]]
Progress = Callable[[str, int, int], None]  # what, how many of them done, how many in all


def prepare_sounds(show: Show, progress: Progress) -> Sounds:
    """Every sound that a panel plays, prepared for its carrier, by panel and name."""
    wanted: dict[tuple[str, str], None] = {}
    for cue in show.sheet.cue:
        for act in cue.act:
            if act.sound is not None:
                wanted[show.panel_of(act.beam), act.sound] = None
    sounds: dict[str, dict[str, NDArray[np.float32]]] = {name: {} for name in show.rig.panel}
    for done, (panel, sound) in enumerate(wanted):
        progress(f"sound {sound}", done, len(wanted))
        settings = Preparation.at(show.rig.panel[panel].carrier_hz, show.rig.rate_hz)
        sounds[panel][sound] = np.asarray(prepared(Path(show.sounds[sound].path), settings))
    return sounds


def digests(show: Show) -> dict[str, str]:
    """SHA-256 in hex of every file that a show is played from, by its name in the folder."""
    found = dict(show.digests)
    for name, facts in show.sounds.items():
        with Path(facts.path).open("rb") as file:
            found[f"sounds/{name}"] = hashlib.file_digest(file, "sha256").hexdigest()
    return found


def changed_files(show: Show) -> str:
    """Which of guard, rig and house are not on disk as they were read; "" when all are."""
    found = []
    for name in ("guard.toml", "rig.toml", "house.toml"):
        try:
            now = hashlib.sha256((Path(show.folder) / name).read_bytes()).hexdigest()
        except OSError:
            now = ""
        if now != show.digests.get(name, now):
            found.append(name)
    return ", ".join(found)
