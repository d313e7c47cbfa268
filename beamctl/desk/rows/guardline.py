"""The guard in one line: state, headroom and where, what is held, dose, who signed, margin."""

from __future__ import annotations

from collections.abc import Iterable
from typing import NamedTuple

from beamctl.desk.format import Role, Row, Span, fit, length, level
from beamctl.snapshot import GuardView

MARKS = {"CLEAR": "( )", "NEAR": "(-)", "CAPPING": "(=)", "TRIPPED": "(X)", "BLIND": "(?)"}
SILENT = ("TRIPPED", "BLIND")  # the states in which nothing may sound
_ROLES: dict[str, Role] = {
    "CLEAR": "text",
    "NEAR": "attention",
    "CAPPING": "attention",
    "TRIPPED": "alarm",
    "BLIND": "alarm",
}
PROGRAMME = 2.0  # dB of programme that a decibel of carrier costs: the audible part is its square
_GAP = "  "


class Part(NamedTuple):
    """A piece of the line, in ever shorter wordings; a higher rank is given up later."""

    rank: int
    wordings: tuple[str, ...]
    role: Role = "dim"


def guard_row(guard: GuardView, width: int) -> Row:
    """The whole line in at most `width` cells; what matters least is shortened, then left out."""
    return squeeze([part for part in _parts(guard) if part.wordings[0]], width)


def squeeze(parts: list[Part], width: int) -> Row:
    """`parts` side by side: the lowest ranks in a shorter wording first, then the lowest dropped.

    The highest rank is never dropped, only cut.
    """
    said = [0] * len(parts)
    by_rank = sorted(range(len(parts)), key=lambda n: parts[n].rank)

    def row() -> Row:
        spans = [
            Span(part.wordings[n], part.role)
            for part, n in zip(parts, said, strict=True)
            if n < len(part.wordings)
        ]
        return _joined(spans)

    for index in by_rank:
        while length(row()) > width and said[index] < len(parts[index].wordings) - 1:
            said[index] += 1
    for index in by_rank[:-1]:
        if length(row()) > width:
            said[index] = len(parts[index].wordings)
    return fit(row(), width)


def held_words(panel: str, held_db: float) -> str:
    """What a cap costs: "prow held 3.0 dB = 6.0 dB of programme"."""
    return f"{panel} held {level(held_db)} dB = {level(PROGRAMME * held_db)} dB of programme"


def band_words(band_hz: float) -> str:
    """A band by its nominal frequency: "31.5 kHz"."""
    return f"{band_hz / 1000.0:g} kHz" if band_hz > 0.0 else ""


def is_signed(signed: str) -> bool:
    """Whether `signed` of a GuardView names somebody who signed."""
    return signed.startswith("signed")


def state_role(state: str) -> Role:
    """Its look; a state never heard of looks like an alarm."""
    return _ROLES.get(state, "alarm")


def _parts(guard: GuardView) -> Iterable[Part]:
    mark = MARKS.get(guard.state, "(?)")
    yield Part(9, (f"{mark} {guard.state}",), state_role(guard.state))
    if guard.state in SILENT:
        yield Part(8, (guard.reason or "no reason given",))
    elif guard.headroom_db is None:
        yield Part(8, ("nothing heard",))
    else:
        left = f"{level(guard.headroom_db)} dB"
        band = band_words(guard.band_hz)
        yield Part(8, (f"{left} left", left))
        yield Part(7, (f"at {guard.seat}, {band}", f"{guard.seat} {band}", guard.seat))
    yield Part(6, _held(guard.held_db))
    yield Part(5, _signed(guard.signed))
    dose = f"dose {guard.dose_pct:.0f} %"
    yield Part(4, (f"{dose} {guard.dose_seat}".rstrip(), dose))
    yield Part(3, (f"margin {guard.margin_db:g} dB",))


def _held(held_db: dict[str, float]) -> tuple[str, ...]:
    if not held_db:
        return ("",)
    panel = max(held_db, key=lambda name: held_db[name])
    more = f" +{len(held_db) - 1}" if len(held_db) > 1 else ""
    most_db = held_db[panel]
    short = f"{panel} held {level(most_db)} = {level(PROGRAMME * most_db)} dB programme"
    return held_words(panel, most_db) + more, short + more


def _signed(signed: str) -> tuple[str, ...]:
    """ "signed by NAME on DATE" and "UNSIGNED: why", each down to its first word."""
    if is_signed(signed):
        return signed, "signed"
    return signed or "UNSIGNED", "UNSIGNED"


def _joined(spans: list[Span]) -> Row:
    return tuple(part for span in spans for part in (Span(_GAP), span))[1:]
