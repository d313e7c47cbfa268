"""One beam with all its glides at their ends, and what an act makes of it."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from beamctl.show.beamstate import DEFAULT_DEPTH, DEFAULT_TRIM_DB
from beamctl.show.sheet import Act, Law, Reach
from beamctl.show.targets import Target


@dataclass(frozen=True, slots=True)
class Settled:
    """One beam with all its glides at their ends; `target` None is straight ahead."""

    sound: str = ""  # "" when silent
    trim_db: float = DEFAULT_TRIM_DB
    depth: float = DEFAULT_DEPTH
    law: Law = "dsb"
    reach: Reach = "far"
    target: Target | None = None


FRESH = Settled()  # a beam that no act has touched
# All but the sound, in an order in which each can be told by itself: a focus that follows stays
# where it was when a target without a distance comes after it.
FIELDS = ("law", "depth", "trim_db", "target", "reach")


def after_act(state: Settled, act: Act, target: Target | None) -> Settled:
    """What one act makes of a beam; `target` is the act's, None when it does not aim."""
    if act.fall_s is not None:
        return replace(state, sound="")
    if act.reach is not None:
        state = replace(state, reach=act.reach)
    if target is not None:
        if target.point_m is None and state.reach == "aim":
            state = replace(state, reach=_distance(state.target))
        state = replace(state, target=target)
    named = {key: getattr(act, key) for key in ("sound", "trim_db", "depth", "law")}
    return replace(state, **{key: value for key, value in named.items() if value is not None})


def names(act: Act, field: str) -> bool:
    """True when an act gives its beam this one of `FIELDS`."""
    return act.aims if field == "target" else getattr(act, field) is not None


def _distance(target: Target | None) -> Reach:
    """Where the focus stays when the new target has no distance to follow."""
    if target is None or target.point_m is None:
        return "far"
    return float(np.linalg.norm(target.point_m))
