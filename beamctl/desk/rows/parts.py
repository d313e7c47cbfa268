"""The small print of the desk: beams, panels, sink, notices, legend and help."""

from __future__ import annotations

from beamctl.caution import CAUTION_LINE, CAUTION_TEXT
from beamctl.desk.format import (
    BLANK,
    Role,
    Row,
    Span,
    View,
    clock,
    cut,
    fit,
    length,
    level,
    pad,
    signed,
    wrap,
)
from beamctl.desk.keymap import printed
from beamctl.desk.rows import guardline
from beamctl.desk.rows.cues import MARKS
from beamctl.snapshot import BeamView, PanelView

PEAK_DIFFERS_DEG = 0.1
BAR_CELLS = 20
BAR_FLOOR_DB = -60.0
BUSY_PCT = 80.0
SHARED_FROM_DB = -0.05  # what rounds to 0.0 is not worth saying


def beam_rows(view: View, width: int, height: int) -> list[Row]:
    """Every sounding beam; when they are too many the last row counts the rest."""
    beams = [beam for beam in view.snapshot.beams if beam.sound]
    if not beams:
        return [(Span("no beam sounds"),), *[BLANK] * (height - 1)][:height]
    fitting = height if len(beams) <= height else max(height - 1, 0)
    rows = [beam_row(beam, width) for beam in beams[:fitting]]
    if len(beams) > fitting:
        rows.append((Span(f"and {len(beams) - fitting} more beams sounding", "text"),))
    return [*rows, *[BLANK] * (height - len(rows))][:height]


def beam_row(beam: BeamView, width: int) -> Row:
    """One beam: travelling mark, name, target, asked aim, peak if it differs, reach, law, trim."""
    wide = width >= 110
    name, target = (14, 26) if wide else (9, 12)
    gap = "  " if wide else " "
    words = [
        f"az {signed(beam.aim_deg[0])} el {signed(beam.aim_deg[1])}",
        _peak(beam),
        "far" if beam.reach_m is None else f"{beam.reach_m:.1f} m",
        f"{beam.law} {beam.depth:.2f}",
        f"{level(beam.level_db)} dB",
    ]
    head = f"{'>' if beam.travelling else ' '} {pad(beam.name, name)}"
    tail = gap.join(["", pad(beam.target, target), *[word for word in words if word]])
    word = f"{gap}travelling" if beam.travelling and wide else ""
    return fit((Span(head, "live"), Span(tail), Span(word, "live")), width)


def _peak(beam: BeamView) -> str:
    """Where the carrier really peaks, when that is not where it was asked to."""
    if beam.peak_deg is None:
        return "peak --"
    off_deg = max(abs(p - a) for p, a in zip(beam.peak_deg, beam.aim_deg, strict=True))
    if off_deg < PEAK_DIFFERS_DEG - 1e-9:
        return ""
    return f"peak {signed(beam.peak_deg[0])} {signed(beam.peak_deg[1])}"


def panel_rows(view: View, width: int, height: int) -> list[Row]:
    """Each panel's drive: a row for each where there is room, else as they fit; none is dropped
    without the last row counting it."""
    panels = view.snapshot.panels
    rows = [panel_row(panel, width) for panel in panels]
    for cells in (8, 0):  # a shorter bar, then none
        if len(rows) > height:
            rows = flow([_drive(panel, cells) for panel in panels], width)
    if len(rows) > height:
        rows = [*rows[: max(height - 1, 0)], (Span(f"{len(panels)} panels, no room for all"),)]
    return [*rows, *[BLANK] * (height - len(rows))][:height]


def panel_row(panel: PanelView, width: int) -> Row:
    """Name, level as a bar and a number, shared gain while it holds anything down, feeds."""
    return fit((*_drive(panel, BAR_CELLS), Span(f"  {panel.feeds} feeds")), width)


def _drive(panel: PanelView, cells: int) -> Row:
    db = panel.peak_db
    over = 0.0 if db is None else 1.0 - max(min(db, 0.0), BAR_FLOOR_DB) / BAR_FLOOR_DB
    bar = f"[{('|' * round(cells * over)).ljust(cells, '.')}] " if cells else ""
    number = "exact zero" if db is None else f"{level(db):>5} dB"
    row: Row = (Span(f"{pad(panel.name, 10)} {bar}{number}"),)
    if panel.shared_gain_db >= SHARED_FROM_DB:
        return row
    return (*row, Span(f"  shared {level(panel.shared_gain_db)} dB"))


def sink_row(view: View, width: int) -> Row:
    """How the engine and its sink are doing."""
    engine = view.snapshot.engine
    if engine.busy:
        return fit(
            (Span(f"sink {engine.sink}  "), Span(f"not ready: {engine.busy}", "attention")), width
        )
    late: Role = "attention" if engine.late else "dim"
    load: Role = "attention" if engine.load_pct >= BUSY_PCT else "dim"
    route: Role = "attention" if engine.route == "blocking writes" else "dim"
    row = [
        Span(f"{engine.sink}  {engine.rate_hz / 1000:g} kHz  {engine.feeds} feeds  "),
        Span(f"late {engine.late}", late),
        Span("  "),
        Span(f"load {engine.load_pct:.0f} %", load),
        Span(f"  ring {engine.ring_ms:.0f} ms, fill {engine.fill_ms:.0f}"),
        Span(f"  gap {engine.longest_ms:.0f} ms"),
    ]
    if engine.drift_ppm is not None:
        row.append(Span(f"  drift {engine.drift_ppm:+.1f} ppm"))
    row += [
        Span(f"  {engine.priority}  quantum {engine.quantum}  "),
        Span(engine.route, route),
        Span(f"  {engine.callbacks} calls  compiled in {engine.compile_s:.1f} s"),
    ]
    return fit(tuple(row), width)


def notice_row(view: View | None, width: int, gone: bool = False) -> Row:
    """The line that is never scrolled away: a lost host first, then the oldest notice."""
    spans: list[Span] = []
    if gone:
        spans.append(Span("HOST GONE: trying again every second", "alarm"))
    if view is None:
        return fit(spans or [Span("waiting for the host")], width)
    if view.stale_s is not None and not gone:
        spans.append(Span(f"HOST SILENT for {clock(view.stale_s)} s", "alarm"))
    if view.asks_leave:
        again = printed(view.keymap.keys_of("leave"))
        spans.append(Span(f"Leave? {_goes_on(view)} {again} again within 3 s", "attention"))
    notices = view.snapshot.notices
    if notices:
        # Only its mark is lit: a full line in amber would light up the booth.
        spans.append(Span(f"! 1 of {len(notices)}:", "attention"))
    joined = [part for span in spans for part in (span, Span("   "))][:-1]
    if notices:
        joined.append(Span(f" {notices[0]}"))
    return fit(joined or [Span("no notices")], width)


def _goes_on(view: View) -> str:
    """What leaving does not touch."""
    unsaved = view.snapshot.edit.unsaved
    kept = f"{unsaved} edits are not on disk, and stay with the host." if unsaved else ""
    sound = "Sound goes on." if view.snapshot.output == "OPEN" else ""
    return f"{sound} {kept}".strip()


def legend_rows(entries: list[tuple[str, str]], width: int) -> list[Row]:
    """Every (key, title) of `entries`, in as many rows as it takes."""
    return flow([(Span(f"{keys}: {title}"),) for keys, title in entries], width)


def flow(entries: list[Row], width: int) -> list[Row]:
    """`entries` side by side, two cells apart, in as many rows as they take."""
    rows: list[Row] = []
    row: Row = ()
    for entry in entries:
        joined = (*row, Span("  "), *entry) if row else entry
        if row and length(joined) > width:
            rows.append(row)
            joined = entry
        row = joined
    return [fit(r, width) for r in (*rows, row)]


def help_rows(
    helps: list[tuple[str, str, str]], width: int, notices: tuple[str, ...] = ()
) -> list[Row]:
    """The caution, every (keys, title, help), the marks, and all notices in full."""
    rows: list[Row] = [(Span(CAUTION_LINE),), BLANK]
    for keys, title, text in helps:
        first, *more = wrap(f"{title}: {text}", width - 13, 4) or [""]
        rows.append((Span(pad(keys, 13), "text"), Span(first)))
        rows += [(Span(" " * 13 + line),) for line in more]
    for marks in (MARKS, guardline.MARKS):
        said = "  ".join(f"{mark} {state}" for state, mark in marks.items())
        rows += [(Span(line),) for line in wrap(said, width, 3)]
    for number, notice in enumerate(notices, 1):
        rows += [(Span(line, "attention"),) for line in wrap(f"! {number}: {notice}", width, 4)]
    rows += [BLANK, *[(Span(cut(line, width)),) for line in CAUTION_TEXT.splitlines()]]
    return [fit(row, width) for row in rows]
