"""From a show and its sounds to the cues that are barred: for `inspect`, the desk and the forecast.

The figures are those of `guard.bars`; here the sounds are prepared and their spectra worked out.
"""

from __future__ import annotations

from dataclasses import asdict, dataclass, field, replace
from typing import Any

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


@dataclass(slots=True)
class Kept:
    """What looks have in common whose shows differ in cues alone: the room's field, and spectra."""

    room: Field | None = None
    powers: dict[tuple[str, Programme], NDArray[np.float64]] = field(default_factory=dict)


def cue_levels(show: Show, progress: Progress, kept: Kept | None = None) -> dict[str, Level]:
    """Every cue at its worst, in the order of the sheet; see `guard.bars.levels`.

    ShowError for a sound that cannot be read, DeviceError when the cache cannot be used.
    """
    kept = kept or Kept()
    sounds = prepare_sounds(show, progress)
    if kept.room is None:
        progress("field", 0, 1)
        kept.room = Field(show)
    return levels(show, kept.room, sheet_powers(show, sounds, kept.powers), progress)


def barred(found: dict[str, Level]) -> dict[str, str]:
    """Cue → why it is barred, and the trim that fits: what the player is given."""
    return {ref: level.bar.text for ref, level in found.items() if level.bar is not None}


def rows_of(found: dict[str, Level]) -> list[dict[str, Any]]:
    """The same levels as rows of `snapshot.CueLevel`."""
    rows = []
    for level in found.values():
        row = asdict(replace(level, bar=None))
        del row["bar"]
        if level.bar is not None:
            row |= {"beam": level.bar.beam, "fits_db": level.bar.trim_fits_db}
        rows.append(row)
    return rows


def sheet_powers(
    show: Show,
    sounds: Sounds,
    known: dict[tuple[str, Programme], NDArray[np.float64]] | None = None,
) -> Powers:
    """The spectra of a show's programmes, each worked out when it is first asked for.

    Those that are `known` are not, and it is added to.
    """
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
    found = {} if known is None else known

    def powers(panel: str, programme: Programme) -> NDArray[np.float64]:
        key = panel, programme
        if key not in found:
            sound, law, depth = programme
            found[key] = meters[panel].powers(sounds[panel][sound], law, depth)
        return found[key]

    return powers
