"""The Bench's figures: what the act under the cursor says, and what it leads to, in rows.

Nothing stands here that was not computed; what a programme sounds like at a seat is not yet.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from beamctl.desk.bench.look import Look
from beamctl.desk.bench.trial import Trial
from beamctl.desk.format import BLANK, Role, Row, Span, beside, fit, level, pad, signed, wrap
from beamctl.desk.rows.parts import PEAK_DIFFERS_DEG
from beamctl.desk.rows.sheetwords import found_words, seconds
from beamctl.forecast.acts import AIM_KEYS
from beamctl.forecast.berktay import heard
from beamctl.forecast.consequence import Seat
from beamctl.forecast.landing import Landing
from beamctl.forecast.sight import Sight
from beamctl.show.sheet import Act, Cue
from beamctl.snapshot import CueLevel

LABEL = 8  # cells
SHORT = ("place", "to", "aim", "peak", "law", "trim", "reach")  # of an act, in a small terminal
NEAR_DB = 3.0  # of margin that are left or less
TRIED = "*"
KEPT = " "


@dataclass(frozen=True, slots=True)
class Bench:
    """What the figures are made from: the act as the sheet has it, as it is tried, and its look."""

    cue: Cue
    number: int
    act: Act  # as tried
    trial: Trial
    look: Look
    panel: str
    found: CueLevel | None = None  # what the guard found for the cue
    barred: str = ""
    trying: tuple[str, ...] = ()
    notice: str = ""  # what keeps the picture from being the newest


def figure_rows(bench: Bench, width: int, height: int) -> list[Row]:
    """`height` rows of at most `width` cells; what waits to be taken is never left out."""
    parts = [list(_act_rows(bench).values()), _level_rows(bench), _second_rows(bench)]
    below = _standing_rows(bench, width)
    rows = [row for part in parts for row in (*part, BLANK)]
    room = max(height - len(below), 0)
    if len(rows) > room:
        rows = [row for row in rows if row]
    return [fit(row, width) for row in [*rows[:room], *below]][:height]


def short_rows(bench: Bench, width: int, height: int) -> list[Row]:
    """`height` rows for a small terminal: act and levels side by side."""
    half, act = width // 2, _act_rows(bench)
    left = [act[key] for key in SHORT]
    right = [*_level_rows(bench), *_second_rows(bench)]
    below = _standing_rows(bench, width)[-max(height - len(SHORT) + 1, 1) :]
    room = max(height - len(below), 0)
    paired = [fit(row, width) for row in beside(left[:room], right[:room], half, width)]
    return [*paired, *[BLANK] * (room - len(paired)), *(fit(row, width) for row in below)][:height]


def _act_rows(bench: Bench) -> dict[str, Row]:
    """The act, field by field; a star marks what is tried and not taken."""
    act, look, cue = bench.act, bench.look, bench.cue
    state, sight = look.state, look.sight
    place = f"cue {cue.ref}  act {bench.number + 1} of {len(cue.act)}  at {seconds(act.at_s)}"
    sounds = f"plays {act.sound}" if act.sound else state.sound or "silent by now"
    target = state.target.label if state.target else ""
    away = "" if sight.target_m is None else f"  {_metres(look):.1f} m"
    made = heard(state.law, state.depth)
    distorted = f"{100.0 * made.distortion:.0f} % ideal distortion"
    return {
        "place": (Span(place, "text"), Span(f"  {cue.title}")),
        "beam": (Span(f"{act.beam} on {bench.panel}, {sounds}"),),
        "to": _row(bench, "to", f"{target or 'plain angles'}{away}", AIM_KEYS, "text"),
        "aim": _row(bench, "aim", _angles(sight.aim_deg)),
        "peak": _row(bench, "peak", _angles(sight.peak_deg), (), _peak_role(sight)),
        "reach": _row(bench, "reach", _reach(bench), ("reach",)),
        "law": _row(bench, "law", f"{state.law} {state.depth:.2f}  {distorted}", ("law", "depth")),
        "tone": _row(bench, "", _tone(made.programme_db, made.carrier_rise_db)),
        "trim": _row(bench, "trim", _trim(bench), ("trim_db",)),
        "over": _row(bench, "over", _over(bench), ("over_s", "fall_s")),
    }


def _level_rows(bench: Bench) -> list[Row]:
    """The carrier at rest at the target and at the worst seat, and what a cap would cost."""
    sight = bench.look.sight
    done = sight.consequence
    here = "at the target" if sight.target_m is not None else _where(sight.landing)
    unseated = _line("guard", "nobody sits there: no cap holds")
    rows: list[Row] = [
        _line("carrier", f"{level(sight.target_db)} dB {here}", "text"),
        _seat_row("guard", done.target) if done.target else unseated,
    ]
    if done.worst is None:
        return [*rows, _line("worst", "no seat is declared", "attention")]
    rows.append(_seat_row("worst", done.worst, named=True))
    if done.held_db > 0.0:
        costs = f"holds {done.held_db:.1f} dB, programme {done.programme_db:.1f}"
        return [*rows, _line("cap", costs, "attention")]
    return [*rows, _line("cap", "1 dB held costs 2 of programme")]


def _second_rows(bench: Bench) -> list[Row]:
    """Second beams: where they point, how loud against the first, where they land."""
    seconds = bench.look.sight.seconds
    if not seconds:
        return [_line("2nd", "no second beam within 20 dB")]
    rows = []
    for lobe, landing, here_db in seconds:
        aim = _angles((lobe.azimuth_deg, lobe.elevation_deg))
        role: Role = "attention" if lobe.over_first_db >= 0.0 else "dim"
        said = f"{signed(lobe.over_first_db)} dB  {aim}"
        rows.append(_line("2nd", said, role))
        loud = (
            f"{level(here_db)} dB " if landing.at else ""
        )  # nowhere in particular it is no figure
        rows.append(_line("", f"{loud}{_where(landing)}"))
    return rows


def _standing_rows(bench: Bench, width: int) -> list[Row]:
    """What stands at the bottom: the guard's finding, what sounds, what waits to be taken."""
    rows: list[Row] = []
    if bench.found is not None:
        said = f"the whole cue, {found_words(bench.found)}"
        rows += [(Span(line),) for line in wrap(said, width, 4)]
    if bench.barred:
        rows += [(Span(line, "attention"),) for line in wrap(f"BARRED: {bench.barred}", width, 4)]
    if bench.trying:
        rows.append((Span(f"sounding now: {', '.join(bench.trying)}", "live"),))
    for said in (bench.look.complaint, bench.notice):
        rows += [(Span(line, "attention"),) for line in wrap(said, width, 3)]
    if bench.trial:
        rows.append((Span(f"{TRIED} tried: Enter takes it, Esc forgets", "attention"),))
    return rows


def _row(
    bench: Bench, label: str, said: str, keys: tuple[str, ...] = (), role: Role = "dim"
) -> Row:
    tried = any(bench.trial.fields.get(key, old) != old for key, old in _old(bench, keys))
    mark = TRIED if tried else KEPT
    return Span(f"{mark} {pad(label, LABEL - 2)}", "text" if tried else "dim"), Span(said, role)


def _old(bench: Bench, keys: tuple[str, ...]) -> list[tuple[str, object]]:
    act = bench.cue.act[bench.number]
    return [(key, getattr(act, key)) for key in keys]


def _line(label: str, said: str, role: Role = "dim") -> Row:
    return Span(pad(label, LABEL)), Span(said, role)


def _seat_row(label: str, seat: Seat, named: bool = False) -> Row:
    """A seat as the guard counts it, head and margin included; what is left to its cap first."""
    left = seat.margin_db
    told = f"{left:.1f} left" if left >= 0.0 else f"{-left:.1f} OVER"
    role: Role = "alarm" if left < 0.0 else "attention" if left <= NEAR_DB else "text"
    name = f" {seat.name}" if named else ""
    counts = f"  {level(seat.level_db)} of {seat.cap_db:g}{name}"
    return Span(pad(label, LABEL)), Span(told, role), Span(counts)


def _angles(angles_deg: tuple[float, float]) -> str:
    return f"az {signed(angles_deg[0])} el {signed(angles_deg[1])}"


def _peak_role(sight: Sight) -> Role:
    """Lit where the carrier really peaks elsewhere than it was asked to."""
    off_deg = max(abs(p - a) for p, a in zip(sight.peak_deg, sight.aim_deg, strict=True))
    return "text" if off_deg >= PEAK_DIFFERS_DEG else "dim"


def _reach(bench: Bench) -> str:
    reach = bench.look.state.reach
    if reach == "far":
        return "far"
    at = "on the target" if reach == "aim" else f"{reach:g} m"
    return f"{at}  {signed(bench.look.sight.focus_db)} dB there"


def _trim(bench: Bench) -> str:
    fits = bench.look.sight.consequence.trim_fits_db
    most = "" if fits is None else f"  fits to {fits:.1f} at rest"
    return f"{level(bench.look.state.trim_db)} dB{most}"


def _tone(programme_db: float, rise_db: float) -> str:
    if not math.isfinite(programme_db):
        return "nothing is heard at depth 0"
    return f"tone {signed(programme_db)} dB, seats get {signed(rise_db)}"


def _over(bench: Bench) -> str:
    """How long it takes, and how fast a sounding beam turns by it."""
    act, look = bench.act, bench.look
    if act.fall_s is not None:
        return f"falls silent in {seconds(act.fall_s)}"
    if not (look.found.sound and act.aims):
        return seconds(act.over_s)
    start = look.found.target.unit() if look.found.target else (0.0, 1.0, 0.0)
    end = look.state.target.unit() if look.state.target else (0.0, 1.0, 0.0)
    turned = math.degrees(math.acos(min(1.0, max(-1.0, float(np.dot(start, end))))))
    if act.over_s <= 0.0:
        return f"at once  {turned:.1f} deg, by a dip"
    return f"{seconds(act.over_s)}  {turned:.1f} deg, {turned / act.over_s:.1f} deg/s"


def _metres(look: Look) -> float:
    target = look.state.target
    return (
        0.0 if target is None or target.point_m is None else float(np.linalg.norm(target.point_m))
    )


def _where(landing: Landing) -> str:
    at = f"at {landing.at}" if landing.at else "in the open"
    return f"{at} off {landing.off}" if landing.off else at
