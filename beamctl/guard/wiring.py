"""What a wiring check found: feeds that are dead, reversed, weak, or plugged in another's place.

A microphone stands on the panel's axis. Each feed sounds there alone, and then together with one
reference feed, both turned so that they arrive in phase: the level rises, unless one of them is
reversed. Whether a feed is where the rig says is heard close to the cells: `heard_at` is the feed
at whose place it was loudest. Feeds have the rig's numbers, from 1, so that two panels may mix.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Literal, NamedTuple

import numpy as np

from beamctl.errors import ShowError

Kind = Literal["dead", "reversed", "swapped", "moved", "weak"]
Ear = Literal["", "reversed", "weak"]

DEAD_DB = 20.0  # so far under the median nothing of a feed's own is left
WEAK_DB = 3.0
POLARITY_DB = 8.0  # a weaker feed changes the sum too little to tell, within 1 dB of measuring


class Reading(NamedTuple):
    """One feed as it was met. Levels are in dB re 20 µPa at the microphone.

    heard_at     feed at whose place it was loudest; None: it was heard nowhere
    level_db     alone; None: not measured
    together_db  with the reference; None: not measured, or it is the reference
    ear          what was heard of it where no level says so
    """

    feed: int
    heard_at: int | None
    level_db: float | None = None
    together_db: float | None = None
    ear: Ear = ""


class Finding(NamedTuple):
    """One thing that is wrong with one feed.

    other     the feed at whose place it was heard, when swapped or moved
    under_db  how far it is under the panel's median, as far as was measured
    """

    feed: int
    kind: Kind
    other: int | None = None
    under_db: float | None = None


def reference_among(readings: Sequence[Reading]) -> int:
    """The reference of measured readings: the one whose level stands alone.

    ShowError when there is none, or more than one.
    """
    alone = [r.feed for r in readings if r.level_db is not None and r.together_db is None]
    if len(alone) == 1:
        return alone[0]
    named = ", ".join(map(str, alone[:6])) + (" …" if len(alone) > 6 else "")
    raise ShowError(
        f"with_reference_db is empty for {len(alone)} feeds with a level"
        + (f": {named}" if alone else ""),
        "leave it empty for one feed, the reference that sounded along with all others",
    )


def findings(
    readings: Sequence[Reading],
    expected_db: Mapping[int, float],
    reference: int | None,
    others: Sequence[Reading] = (),
) -> list[Finding]:
    """Everything that is wrong with a panel's feeds, in the order of the readings.

    expected_db  by feed: the model's level of that feed alone at the microphone
    reference    None where nothing was compared
    others       readings of other panels, with which feeds may be swapped

    ShowError when polarity was measured against a reference that cannot serve.
    """
    under = _under(readings, expected_db)
    heard_at = {r.feed: r.heard_at for r in (*others, *readings)}
    turned = _reversed(readings, under, reference)
    found = []
    for r in readings:
        under_db = under.get(r.feed)
        if r.heard_at is None or (under_db is not None and under_db >= DEAD_DB):
            found.append(Finding(r.feed, "dead", under_db=under_db))
            continue
        if r.heard_at != r.feed:
            swapped = heard_at.get(r.heard_at) == r.feed
            found.append(Finding(r.feed, "swapped" if swapped else "moved", r.heard_at))
        if r.feed in turned:
            found.append(Finding(r.feed, "reversed"))
        if r.ear == "weak" or (under_db is not None and under_db >= WEAK_DB):
            found.append(Finding(r.feed, "weak", under_db=under_db))
    return found


def over_model_db(readings: Sequence[Reading], expected_db: Mapping[int, float]) -> float | None:
    """How much louder the feeds are than the model, dB, by the mean of their pressures.

    Of those that are heard in their own place and not weak, since these make the beam; None when
    no level of any was measured.
    """
    under = _under(readings, expected_db)
    over = [
        r.level_db - expected_db[r.feed]
        for r in readings
        if r.level_db is not None and r.heard_at == r.feed and under[r.feed] < WEAK_DB
    ]
    return float(20.0 * np.log10(np.mean(10.0 ** (np.array(over) / 20.0)))) if over else None


def cells_at_fault(cells: int, under_db: float) -> tuple[int, Literal["dead", "reversed"]] | None:
    """How many of a feed's cells would make it so weak by being dead or reversed; None: no count.

    n alike cells add to n pressures; k dead leave n - k, k reversed n - 2k. The fewest that come
    within 1 dB.
    """
    for k in range(1, cells):
        for left, how in ((cells - k, "dead"), (cells - 2 * k, "reversed")):
            if left > 0 and abs(20.0 * np.log10(cells / left) - under_db) <= 1.0:
                return k, "dead" if how == "dead" else "reversed"
    return None


def _under(readings: Sequence[Reading], expected_db: Mapping[int, float]) -> dict[int, float]:
    """By feed: how far under the panel's median its level is, the place it came from allowed for.

    A feed that sounds from another panel's place is not compared.
    """
    over = {
        r.feed: r.level_db - expected_db[r.heard_at]
        for r in readings
        if r.level_db is not None and r.heard_at is not None and r.heard_at in expected_db
    }
    median = float(np.median(list(over.values()))) if over else 0.0
    return {feed: median - value for feed, value in over.items()}


def _reversed(
    readings: Sequence[Reading], under: Mapping[int, float], reference: int | None
) -> set[int]:
    """Feeds whose polarity is not that of most.

    Only differences are measured: when most others seem turned over, it is the reference that is.
    A feed in another's place was turned for the wrong way, so nothing is said of it.
    """
    if reference is None:
        return set()
    base = next(r for r in readings if r.feed == reference)
    _check_reference(base, under, any(r.together_db is not None for r in readings))
    judged = [
        r
        for r in readings
        if r.heard_at == r.feed != reference and under.get(r.feed, 0.0) < POLARITY_DB
    ]
    turned = {r.feed for r in judged if _falls(r, base)}
    if 2 * len(turned) > len(judged) + 1:
        return {reference} | {r.feed for r in judged} - turned
    return turned


def _falls(r: Reading, base: Reading) -> bool:
    """True when a feed and the reference took from one another.

    A quarter of a turn apart their energies add: less than that is nearer to opposite.
    """
    if r.level_db is None or r.together_db is None:
        return r.ear == "reversed"
    other_db = base.level_db if base.level_db is not None else r.level_db
    energy = 10.0 ** (r.level_db / 10.0) + 10.0 ** (other_db / 10.0)
    return r.together_db < 10.0 * float(np.log10(energy))


def _check_reference(base: Reading, under: Mapping[int, float], measured: bool) -> None:
    if base.heard_at != base.feed:
        what = "was heard nowhere" if base.heard_at is None else f"was heard at {base.heard_at}"
    elif measured and under.get(base.feed, 0.0) >= POLARITY_DB:
        what = f"is {under[base.feed]:.0f} dB under the others"
    else:
        return
    raise ShowError(
        f"feed {base.feed}, the reference, {what}: no polarity can be told by it",
        "measure with_reference_db again with another reference",
    )
