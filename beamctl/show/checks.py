"""Cross checks: what no file can tell by itself. Names, references, follow-ons, feeds, rates.

Where the beams can point is checked in `aims.py`.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass, field
from difflib import get_close_matches
from itertools import pairwise
from typing import Literal

from beamctl.acoustics.cells import CellMap
from beamctl.show.house import House
from beamctl.show.limits import Guard
from beamctl.show.order import natural_key
from beamctl.show.rig import Rig
from beamctl.show.sheet import Cue, Sheet
from beamctl.show.standing import why_unsigned

SHEET, RIG, HOUSE, GUARD = "sheet.toml", "rig.toml", "house.toml", "guard.toml"
Location = tuple[str | int, ...]

LOWEST_SKIRT_HZ = 22_400.0  # upper edge of the 20 kHz third-octave band, the ear's last
WIDEST_BAND_HZ = 17_600.0  # either side of the carrier
RATE_SHARE = 0.47  # of the sample rate, that converters pass (common practice)
LEAST_BAND_HZ = 2_000.0
GOOD_BAND_HZ = 16_000.0


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing that is wrong across files; `where` is its place in `file`, keys and indices."""

    file: str
    where: Location
    what: str
    severity: Literal["error", "warning"] = "error"


@dataclass(frozen=True, slots=True)
class Parts:
    """What could be read of a show; None where a file could not.

    `cut` holds (file, top-level table) pairs that had to lose an entry: a name that is missing
    there may well be written, so nothing is said about it.
    """

    sheet: Sheet | None = None
    rig: Rig | None = None
    house: House | None = None
    guard: Guard | None = None
    cells: Mapping[str, CellMap] = field(default_factory=dict)  # by panel
    cut: frozenset[tuple[str, str]] = frozenset()
    seal: str = ""  # digest of guard, rig and house; "" when the rig could not be read

    def whole(self, file: str, table: str) -> bool:
        """True when no entry of the table is missing."""
        return (file, table) not in self.cut


def check_names(parts: Parts) -> Iterator[Finding]:
    """Names, references, follow-ons, feeds and rates that do not fit together."""
    if parts.sheet:
        yield from _cues(parts.sheet, parts)
        yield from _beams(parts.sheet, parts)
        yield from _targets(parts.sheet, parts)
    if parts.rig:
        yield from _feeds(parts.rig, parts.cells)
        yield from _bands(parts.rig)
    if parts.house:
        yield from _seats_once(parts.house)
    if parts.guard and parts.whole(GUARD, "signed"):
        yield from _signature(parts.guard, parts.seal)


def unknown(kind: str, name: str, known: Collection[str]) -> str:
    """What to say of a name that is not among the known ones, with the nearest of them."""
    near = get_close_matches(name, known, n=1) or get_close_matches(name.upper(), known, n=1)
    some = ", ".join(f'"{one}"' for one in sorted(known)[:8]) + (" …" if len(known) > 8 else "")
    if near:
        hint = f'did you mean "{near[0]}"?'
    else:
        hint = f"expected one of {some}" if known else "none is defined"
    return f'"{name}", no such {kind}; {hint}'


def _cues(sheet: Sheet, parts: Parts) -> Iterator[Finding]:
    first: dict[str, int] = {}
    for i, cue in enumerate(sheet.cue):
        if first.setdefault(cue.ref, i) != i:
            yield Finding(SHEET, ("cue", i, "ref"), f'"{cue.ref}" is the name of an earlier cue')
        if not cue.act and parts.whole(SHEET, "cue"):
            yield Finding(SHEET, ("cue", i), "no acts: GO will change nothing", "warning")
        if cue.then and cue.then not in {c.ref for c in sheet.cue} and parts.whole(SHEET, "cue"):
            what = unknown("cue", cue.then, [c.ref for c in sheet.cue])
            yield Finding(SHEET, ("cue", i, "then"), what)
    for i, (before, cue) in enumerate(pairwise(sheet.cue), start=1):
        if natural_key(before.ref) > natural_key(cue.ref):
            what = f'"{cue.ref}" stands after "{before.ref}": out of order'
            yield Finding(SHEET, ("cue", i, "ref"), what, "warning")
    yield from _cycles(sheet.cue, first)


def _cycles(cues: tuple[Cue, ...], index: Mapping[str, int]) -> Iterator[Finding]:
    """Follow-ons that come back to where they began; each circle is told once."""
    done: set[int] = set()
    for start in range(len(cues)):
        chain: list[int] = []
        at: int | None = start
        while at is not None and at not in done:
            done.add(at)
            chain.append(at)
            at = index.get(cues[at].then or "")
        if at in chain:
            circle = [*chain[chain.index(at) :], at]
            names = " → ".join(cues[i].ref for i in circle)
            yield Finding(SHEET, ("cue", at, "then"), f"follow-ons in a circle: {names}")


def _beams(sheet: Sheet, parts: Parts) -> Iterator[Finding]:
    for name, beam in sheet.beam.items():
        if parts.rig and beam.panel not in parts.rig.panel and parts.whole(RIG, "panel"):
            what = unknown("panel", beam.panel, parts.rig.panel)
            yield Finding(SHEET, ("beam", name, "panel"), what)
    used = {act.beam for cue in sheet.cue for act in cue.act}
    if parts.whole(SHEET, "cue"):
        for name in sheet.beam.keys() - used:
            yield Finding(SHEET, ("beam", name), "no act uses this beam", "warning")


def _targets(sheet: Sheet, parts: Parts) -> Iterator[Finding]:
    """Beams, seats, spots and surfaces that acts name and nobody defines."""
    known: dict[str, Collection[str]] = {}
    if parts.whole(SHEET, "beam"):
        known["beam"] = sheet.beam
    if (house := parts.house) and parts.whole(HOUSE, "block"):
        known["seat"] = house.seats()
    if house and parts.whole(HOUSE, "spot"):
        known["spot"] = house.spot
    if house and parts.whole(HOUSE, "surface"):
        known["via"] = house.surface
    for i, cue in enumerate(sheet.cue):
        for j, act in enumerate(cue.act):
            for key, names in known.items():
                name = getattr(act, key)
                if name is not None and name not in names:
                    kind = "surface" if key == "via" else key
                    yield Finding(SHEET, ("cue", i, "act", j, key), unknown(kind, name, names))


def _feeds(rig: Rig, cells: Mapping[str, CellMap]) -> Iterator[Finding]:
    taken: dict[str, range] = {}
    for name, panel in rig.panel.items():
        if name not in cells:
            continue
        feeds = range(panel.first_feed, panel.first_feed + cells[name].feeds)
        for other, theirs in taken.items():
            if feeds.start < theirs.stop and theirs.start < feeds.stop:
                what = f'feeds {_span(feeds)} overlap panel "{other}", feeds {_span(theirs)}'
                yield Finding(RIG, ("panel", name, "first_feed"), what)
        taken[name] = feeds


def _span(feeds: range) -> str:
    return f"{feeds.start} to {feeds.stop - 1}"


def _bands(rig: Rig) -> Iterator[Finding]:
    """Room for the envelope beside the carrier: under it the ear's band, above it the rate."""
    top_hz = RATE_SHARE * rig.rate_hz
    for name, panel in rig.panel.items():
        where = ("panel", name, "carrier_hz")
        carrier_hz = panel.carrier_hz
        band_hz = min(WIDEST_BAND_HZ, carrier_hz - LOWEST_SKIRT_HZ, top_hz - carrier_hz)
        if carrier_hz + LEAST_BAND_HZ > top_hz:
            what = f"{carrier_hz:.0f}, expected {top_hz - LEAST_BAND_HZ:.0f} or less"
            yield Finding(RIG, where, f"{what} at a rate of {rig.rate_hz} Hz")
        elif band_hz < GOOD_BAND_HZ:
            what = f"{carrier_hz:.0f} leaves the programme {band_hz:.0f} Hz"
            yield Finding(RIG, where, f"{what}, less than {GOOD_BAND_HZ:.0f}", "warning")


def _signature(guard: Guard, seal: str) -> Iterator[Finding]:
    if guard.signed is None:
        yield Finding(GUARD, (), "unsigned: the tables hold as they are", "warning")
    elif seal and (why := why_unsigned(guard, seal)):
        what = f"{why}: unsigned, the tables hold as they are"
        yield Finding(GUARD, ("signed",), what, "warning")


def _seats_once(house: House) -> Iterator[Finding]:
    owner: dict[str, str] = {}
    for name, block in house.block.items():
        twice = [seat for seat in block.seat_points() if owner.setdefault(seat, name) != name]
        if twice:
            seats = f"{twice[0]} to {twice[-1]}" if len(twice) > 1 else twice[0]
            what = f'seats named before in block "{owner[twice[0]]}": {seats}'
            yield Finding(HOUSE, ("block", name, "rows"), what)
