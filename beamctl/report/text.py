"""The report as plain text, at most 100 columns: what was found first, then everything."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Iterator, Sequence

from beamctl.acoustics.exposure import TABLES
from beamctl.caution import CAUTION_TEXT
from beamctl.report.evening import Caps, Evening
from beamctl.report.events import acts, faults, holds, refusals, states, trips
from beamctl.report.findings import Finding, findings
from beamctl.report.levels import over_time, worst_of_blocks
from beamctl.report.words import Times, band, length, plain

WIDTH = 100
INDENT = "  "


def report(evening: Evening, times: Times) -> str:
    """The whole report."""
    parts: list[tuple[str, Iterable[str]]] = [
        ("WHAT WAS FOUND  (! asks for a look)", found_lines(findings(evening, times))),
        ("CAPS", _caps(evening, times)),
        ("PANELS", _panels(evening)),
        ("AIR", _air(evening, times)),
        ("LEVEL AND DOSE BY SEAT BLOCK", worst_of_blocks(evening, times)),
        ("LEVEL AND DOSE OVER TIME", over_time(evening, times)),
        ("PANELS HELD UNDER THEIR CAP", holds(evening, times)),
        ("TRIPS", trips(evening, times)),
        ("REFUSED", refusals(evening, times)),
        ("CUES", acts(evening, times)),
        ("OUTPUT AND SINKS", states(evening, times)),
        ("FAULTS AND DRY RINGS", faults(evening, times)),
        ("VERSION AND FILES", _files(evening)),
        ("CAUTION", CAUTION_TEXT.splitlines()),
    ]
    lines = list(_top(evening, times))
    for title, part in parts:
        lines += ["", title, "-" * len(title)]
        body = [line for text in part for line in wrapped(text)]
        lines += body or [f"{INDENT}none"]
    return "\n".join(lines) + "\n"


def found_lines(found: Sequence[Finding]) -> list[str]:
    """Findings in columns: a mark, what it is about, and the sentence."""
    return [f"{'!' if f.asks else ' '} {f.about:<10} {f.text}" for f in found]


def wrapped(text: str) -> list[str]:
    """One line, folded under its own second column where it is too long."""
    return textwrap.wrap(
        text,
        WIDTH,
        initial_indent=INDENT,
        subsequent_indent=INDENT + 13 * " ",
        drop_whitespace=True,
        break_on_hyphens=False,
    ) or [""]


def _top(evening: Evening, times: Times) -> Iterator[str]:
    head = evening.heading
    title = f"Exposure report: {plain(head.title)}"
    yield from textwrap.wrap(title, WIDTH)
    yield "=" * min(len(title), WIDTH)
    if times.live:
        days = dict.fromkeys((times.date(evening.first), times.date(evening.last)))
        yield f"Date         {' to '.join(days)}"
        yield (
            f"Journal      {times.clock(evening.first)} to {times.clock(evening.last)}, "
            f"{times.offset(evening.first)}"
        )
    else:
        yield f"Date         written {head.began:%Y-%m-%d %H:%M} UTC"
        yield "Journal      rendered without a clock: times count from the first sample"
    opened = [e.at for e in evening.outputs if e.record.args.get("to") == "OPEN"]
    if opened:
        yield f"First open   {times.clock(opened[0])}, open for {length(evening.open_s)} in all"
    yield from textwrap.wrap(
        "Levels are dB re 20 uPa in a one-third-octave band, averaged as the caps are, at the "
        "worst point of a head, and louder by a panel's margin. Headroom is cap minus level.",
        WIDTH,
    )


def _caps(evening: Evening, times: Times) -> Iterator[str]:
    for caps in evening.caps:
        if len(evening.caps) > 1:
            yield f"From {times.clock(caps.at)}:"
        yield _signature(caps)
        yield f"Averaging    {length(caps.averaging_s)}"
        yield f"Dose         100 % is the cap for the whole of {length(caps.dose_window_s)}"
        for who, names in caps.tables.items():
            for name in names:
                yield f"{who:<12} {plain(name)}: {_source(name)}"
        yield f"{'band':>10} {'seats':>12} {'crew':>12}"
        for band_hz in sorted(set(caps.limits_db["seats"]) | set(caps.limits_db["crew"])):
            seats, crew = (_limit(caps, who, band_hz) for who in ("seats", "crew"))
            yield f"{band(band_hz):>10} {seats:>12} {crew:>12}"


def _signature(caps: Caps) -> str:
    if caps.unsigned:
        return f"Signature    UNSIGNED: {plain(caps.unsigned)}"
    return f"Signature    {plain(caps.signed_by)}, {plain(caps.signed_on)}"


def _source(name: str) -> str:
    table = TABLES.get(name)
    return f"{table.source}; {table.standing}" if table else "not a table of this version"


def _limit(caps: Caps, who: str, band_hz: float) -> str:
    limit_db = caps.limits_db[who].get(band_hz)
    return "-" if limit_db is None else f"{limit_db:.1f} dB"


def _panels(evening: Evening) -> Iterator[str]:
    for caps in evening.caps[-1:]:
        for panel, margin_db in caps.margin_db.items():
            counted = f"counted {margin_db:.1f} dB louder" if margin_db else "no margin"
            yield f"{plain(panel):<12} {_standing(caps, panel)}; {counted}"


def _standing(caps: Caps, panel: str) -> str:
    if panel not in caps.measured:
        return "measured or not: not in this journal"
    return f"measured: {plain(caps.measured[panel])}" if caps.measured[panel] else "NOT MEASURED"


def _air(evening: Evening, times: Times) -> Iterator[str]:
    for entry in evening.air:
        args = entry.record.args
        figures = [
            f"{args.get(key, '?')} {unit}"
            for key, unit in (
                ("temperature_c", "°C"),
                ("humidity_pct", "%"),
                ("pressure_kpa", "kPa"),
            )
        ]
        yield f"{times.clock(entry.at):<12} {plain(', '.join(figures))}"


def _files(evening: Evening) -> Iterator[str]:
    head = evening.heading
    yield f"beamctl      {plain(head.version)}"
    yield f"Show         {plain(head.folder)}"
    yield f"Feeds        {head.feeds} at {head.rate_hz} Hz"
    yield "SHA-256 of the show's files, and of the samples:"
    for name, digest in sorted(head.digests.items()):
        yield from _digest(name, digest)
    for entry in evening.outputs:
        if entry.record.what == "left":
            for key in ("entered", "left"):
                if told := entry.record.args.get(key):
                    yield from _digest(f"samples {key}", str(told))


def _digest(name: str, digest: str) -> Iterator[str]:
    if len(name) > 30:
        yield plain(name)
        name = ""
    yield f"{plain(name):<30} {plain(digest)}"
