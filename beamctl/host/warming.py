"""Compiles every kernel before anything may sound, by rendering a little of nothing audible."""

from __future__ import annotations

import numpy as np

from beamctl.engine.chain import Chain
from beamctl.show.records import Record
from beamctl.show.show import Show


def warm(show: Show) -> None:
    """Send a few segments through a throw-away chain, each kind of beam movement once."""
    silence = np.zeros((64, 2), np.float32)
    silence.flags.writeable = False  # as the prepared sounds are, which is another type compiled
    chain = Chain(show, {panel: {"": silence} for panel in show.rig.panel})
    for beam in show.sheet.beam:
        for record in (
            Record(0, "play", beam, args={"sound": "", "loop": True}),
            Record(0, "level", beam, args={"power": 0.5, "n": 3840}),
            Record(300, "aim", beam, args={"direction": [0.1, 0.9, 0.0], "n": 3840}),
            Record(310, "reach", beam, args={"per_m": 0.2, "n": 3840}),
        ):
            chain.put(record)
    chain.render(np.zeros((600, show.channels), np.float32))
