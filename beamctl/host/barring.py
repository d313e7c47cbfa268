"""From a show and its sounds to the cues that are barred: for `inspect`, the desk and the forecast.

The figures are those of `guard.bars`; here the sounds are prepared and their spectra worked out.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from beamctl.guard.bars import Level, levels
from beamctl.guard.field import Field
from beamctl.guard.loudness import Powers
from beamctl.guard.travels import Programme
from beamctl.host.loading import Progress, Sounds, prepare_sounds
from beamctl.show.show import Show
from beamctl.show.standing import GUARDED
from beamctl.signal.spectra import Element, Meter


def cue_levels(show: Show, progress: Progress) -> dict[str, Level]:
    """Every cue at its worst, in the order of the sheet; see `guard.bars.levels`.

    ShowError for a sound that cannot be read, DeviceError when the cache cannot be used.
    """
    sounds = prepare_sounds(show, progress)
    progress("field", 0, 1)
    return levels(show, Field(show), sheet_powers(show, sounds), progress)


def barred(found: dict[str, Level]) -> dict[str, str]:
    """Cue → why it is barred, and the trim that fits: what the player is given."""
    return {ref: level.bar.text for ref, level in found.items() if level.bar is not None}


def sheet_powers(show: Show, sounds: Sounds) -> Powers:
    """The spectra of a show's programmes, each worked out when it is first asked for."""
    edges_hz = np.array([(band.low_hz, band.high_hz) for band in GUARDED])
    meters = {
        name: Meter(
            Element(panel.carrier_hz, panel.resonance_hz, panel.q, bool(panel.measured)),
            show.rig.rate_hz,
            edges_hz,
            show.caps.averaging_s,
        )
        for name, panel in show.rig.panel.items()
    }
    known: dict[tuple[str, Programme], NDArray[np.float64]] = {}

    def powers(panel: str, programme: Programme) -> NDArray[np.float64]:
        key = panel, programme
        if key not in known:
            sound, law, depth = programme
            known[key] = meters[panel].powers(sounds[panel][sound], law, depth)
        return known[key]

    return powers
