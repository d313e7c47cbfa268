"""A show on its way from one process to another: all of it but the cues that are there already."""

from __future__ import annotations

import base64
import pickle
from dataclasses import replace
from typing import NamedTuple

from beamctl.show.sheet import Cue
from beamctl.show.show import Show


class _Parcel(NamedTuple):
    """A show without its cues, and each cue, or its place in the sheet before."""

    show: Show
    cues: tuple[Cue | int, ...]


def pack(show: Show, before: Show) -> str:
    """The show as text, for who has the one before."""
    known = {cue.ref: place for place, cue in enumerate(before.sheet.cue)}
    had = before.sheet.cue
    cues = tuple(
        known[cue.ref] if cue.ref in known and had[known[cue.ref]] == cue else cue
        for cue in show.sheet.cue
    )
    return base64.b64encode(pickle.dumps(_Parcel(_with_cues(show, ()), cues))).decode()


def unpack(text: str, before: Show) -> Show:
    """The show that `pack` made this of, by the same show before; from nobody but a child."""
    show, cues = pickle.loads(base64.b64decode(text))
    had = before.sheet.cue
    return _with_cues(show, tuple(had[cue] if isinstance(cue, int) else cue for cue in cues))


def _with_cues(show: Show, cues: tuple[Cue, ...]) -> Show:
    return replace(show, sheet=show.sheet.model_copy(update={"cue": cues}))
