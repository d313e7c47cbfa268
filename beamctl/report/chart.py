"""The report as a picture: per cap class the level of each block against its cap, and its dose.

Readable without colour: blocks differ by dashes and marks, what was held is hatched, a trip is a
line with its word. matplotlib is loaded only when a picture is asked for.
"""

from __future__ import annotations

import io
import math
import warnings
from collections.abc import Sequence
from datetime import datetime, tzinfo
from typing import TYPE_CHECKING, Any

from beamctl.report.evening import Evening, Moment, Reading, SeatBlock
from beamctl.report.findings import count
from beamctl.report.stretches import nearest_cap, step_for, stretches
from beamctl.report.words import Times, length, plain

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

A4_INCHES = (11.7, 8.3)
POINTS = 240  # along the axis: the nearest to the cap of each stretch
GAP_S = 2.5  # readings farther apart are not joined
STYLES: tuple[tuple[Any, str], ...] = (
    *(("-", ""), ((0, (5, 2)), "o"), ((0, (1, 1.2)), "s"), ((0, (7, 2, 1, 2)), "^")),
    *(("-", "D"), ((0, (5, 2)), "v"), ((0, (1, 1.2)), "P"), ((0, (7, 2, 1, 2)), "*")),
)
BELOW_DB, AIR_DB = 50.0, 4.0  # how far under the lowest cap the axis goes at most; its margin
NAMED_CUES = 40
CUE_ROOM, ROOM = 22.0, 6.0  # points between an axis and its title
NAMES = {"seats": "Seats", "crew": "Crew", "": "Class not recorded"}
TICKS = 12
TICKS_S = (1, 5, 10, 30, 60, 300, 600, 900, 1800, 3600, 7200, 14400, 43200, 86400)
DAY_S = 86400


def chart(evening: Evening, times: Times, zone: tzinfo, kind: str) -> bytes:
    """The picture as "png" or "svg"."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=A4_INCHES, layout="constrained")
    title = f"{plain(evening.heading.title)}  {times.date(evening.first)}".rstrip()
    figure.suptitle(title, parse_math=False)
    classes = [who for who in NAMES if who in evening.class_of.values()]
    if classes:
        _draw(figure, evening, times, zone, classes)
    else:
        figure.text(0.5, 0.5, "no reading of the guard in this journal", ha="center")
    out = io.BytesIO()
    with warnings.catch_warnings():  # a title in a script that the font lacks is drawn as boxes
        warnings.filterwarnings("ignore", message="Glyph .* missing")
        figure.savefig(out, format=kind, dpi=150)
    return out.getvalue()


def _draw(figure: Figure, evening: Evening, times: Times, zone: tzinfo, classes: list[str]) -> None:
    ratios = [3.0, 1.2] * len(classes)
    axes = figure.subplots(len(ratios), 1, sharex=True, squeeze=False, height_ratios=ratios)[:, 0]
    step_s = step_for(evening.readings, POINTS)
    every = "" if step_s == 1 else f", nearest its cap in every {length(step_s)}"
    for who, level, dose in zip(classes, axes[::2], axes[1::2], strict=True):
        blocks = [name for name, of in evening.class_of.items() if of == who]
        for number, name in enumerate(blocks):
            _block(level, dose, evening, name, number, step_s)
        _over(level, evening, blocks)
        _scales(level, dose, evening, blocks)
        title = f"{NAMES[who]}: the worst place of each block{every}"
        level.set_title(title, loc="left", pad=CUE_ROOM if level is axes[0] else ROOM)
        _happenings(level, evening)
        if level is axes[0]:
            _cues(level, evening)
        level.legend(loc="upper left", bbox_to_anchor=(1.0, 1.0), frameon=False, fontsize=9)
    axes[-1].set_xlim(*_span(evening))
    axes[-1].set_xlabel("seconds from the first sample")
    if times.live:
        _clock_axis(axes[-1], zone)
        axes[-1].set_xlabel(f"time of day, {times.offset(evening.first)}")


def _wall(at: Moment) -> float:
    """Place along the axis: seconds of UTC, or of a render."""
    return at.utc.timestamp() if at.utc else at.second


def _clock_axis(axes: Axes, zone: tzinfo) -> None:
    """Round times of the venue's clock along the axis, which counts seconds of UTC."""
    from matplotlib.ticker import FuncFormatter, MultipleLocator

    first, last = axes.get_xlim()
    step_s = next((step for step in TICKS_S if last - first <= step * TICKS), TICKS_S[-1])
    shape = "%H:%M:%S" if step_s < 60 else "%H:%M" if step_s < DAY_S else "%m-%d"
    axes.xaxis.set_major_locator(MultipleLocator(step_s))
    axes.xaxis.set_major_formatter(
        FuncFormatter(lambda x, _: datetime.fromtimestamp(x, zone).strftime(shape))
    )


def _block(level: Axes, dose: Axes, evening: Evening, name: str, number: int, step_s: int) -> None:
    """Level and cap of a block above, its dose below."""
    told = [r for r in evening.readings if name in r.blocks]
    cut = list(stretches(told, step_s))
    worst = [nearest_cap(r.blocks[name] for r in those) for those in cut]
    most_pct = [max(r.blocks[name].dose_pct for r in those) for those in cut]
    cap = "cap" if number == 0 else None
    style = _style(number, len(cut))
    caps_db = _line(cut, [s.cap_db for s in worst], step_s)
    level.plot(
        *caps_db, "_-", color="0.78", lw=4, mew=4, label=cap, drawstyle="steps-post", zorder=1.5
    )
    level.plot(*_line(cut, [_heard(s) for s in worst], step_s), label=name, **style)
    dose.plot(*_line(cut, most_pct, step_s), **style)


def _over(level: Axes, evening: Evening, blocks: Sequence[str]) -> None:
    """A cross on every reading over its cap, none left out."""
    seats = [
        (r.at, r.blocks[name]) for r in evening.readings for name in blocks if name in r.blocks
    ]
    if over := [(_wall(at), _heard(s)) for at, s in seats if _heard(s) > s.cap_db]:
        x, y = zip(*over, strict=True)
        level.plot(x, y, "x", color="0.0", ms=8, label="OVER its cap")


def _span(evening: Evening) -> tuple[float, float]:
    """The axis from the first to the last of what is drawn, with a little air."""
    moments = [reading.at for reading in evening.readings]
    moments += [entry.at for entry in evening.called if entry.record.what == "go"]
    moments += [trip.at for trip in evening.trips]
    places = [_wall(at) for at in moments]
    air = 1.0 + 0.02 * (max(places) - min(places))
    return min(places) - air, max(places) + air


def _scales(level: Axes, dose: Axes, evening: Evening, blocks: Sequence[str]) -> None:
    told = [r.blocks[name] for r in evening.readings for name in blocks if name in r.blocks]
    caps_db = [s.cap_db for s in told]
    heard_db = [s.level_db for s in told if s.level_db is not None]
    least_db = max(min(caps_db + heard_db), min(caps_db) - BELOW_DB)
    level.set_ylim(least_db - AIR_DB, max(caps_db + heard_db) + AIR_DB)
    level.set_ylabel("dB re 20 µPa")
    window = f"\nover {length(evening.caps[-1].dose_window_s)}" if evening.caps else ""
    dose.set_ylabel(f"dose, % of cap{window}", fontsize=9)
    dose.set_ylim(0.0, max(1.0, 1.1 * max(s.dose_pct for s in told)))
    for axes in (level, dose):
        axes.grid(color="0.9")


def _heard(seats: SeatBlock) -> float:
    """Level in dB; no number, which leaves a gap, where nothing was heard."""
    return math.nan if seats.level_db is None else seats.level_db


def _line(
    cut: Sequence[Sequence[Reading]],
    values: Sequence[float],
    step_s: int,
) -> tuple[list[float], list[float]]:
    """Places and values, with a break wherever there was no reading."""
    x: list[float] = []
    y: list[float] = []
    before: Moment | None = None
    for those, value in zip(cut, values, strict=True):
        at = those[0].at
        if before is not None and at.second - before.second > step_s + GAP_S:
            x.append(_wall(at))
            y.append(math.nan)
        x.append(_wall(at))
        y.append(value)
        before = at
    return x, y


def _style(number: int, points: int) -> dict[str, Any]:
    dashes, mark = STYLES[number % len(STYLES)]
    every = max(1, points // 20)
    return {
        "ls": dashes,
        "marker": mark or ".",
        "ms": 4,
        "markevery": every,
        "color": "0.0",
        "lw": 1.3,
    }


def _happenings(axes: Axes, evening: Evening) -> None:
    """What was held, hatched, and trips."""
    for number, held in enumerate(evening.held):
        axes.axvspan(
            _wall(held.began),
            _wall(held.ended or evening.last),
            facecolor="0.9",
            edgecolor="0.4",
            hatch="////",
            lw=1.0,
            zorder=0,
            label=f"held, {count(len(evening.held), 'time')}" if number == 0 else None,
        )
    for trip in evening.trips:
        axes.axvline(_wall(trip.at), color="0.0", lw=2.5)
        axes.annotate(
            " TRIPPED",
            (_wall(trip.at), 0.03),
            xycoords=axes.get_xaxis_transform(),
            fontsize=9,
            fontweight="bold",
        )


def _cues(axes: Axes, evening: Evening) -> None:
    """GOs along the top, the first with their cues."""
    gos = [entry for entry in evening.called if entry.record.what == "go"]
    if not gos:
        return
    top = axes.get_xaxis_transform()
    x = [_wall(entry.at) for entry in gos]
    axes.plot(x, [1.0] * len(x), "v", color="0.0", ms=5, transform=top, clip_on=False, label="GO")
    for at, entry in zip(x, gos[:NAMED_CUES], strict=False):
        axes.annotate(
            plain(entry.record.cue),
            (at, 1.0),
            xytext=(0, 6),
            xycoords=top,
            textcoords="offset points",
            ha="center",
            fontsize=7,
            parse_math=False,
        )
