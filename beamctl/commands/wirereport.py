"""The text report of a wiring check: findings first, what to do, then every feed."""

from __future__ import annotations

from collections.abc import Sequence

from beamctl.caution import CAUTION_LINE
from beamctl.files.measurement import Measurement
from beamctl.guard.wiring import Finding, cells_at_fault
from beamctl.show.rig import PanelSpec
from beamctl.show.show import Show


def report(show: Show, measurement: Measurement, found: Sequence[Finding]) -> str:
    """The whole report of one panel's check."""
    m = measurement
    spec = show.rig.panel[m.panel]
    wrong = {finding.feed for finding in found}
    air = m.air
    lines = [
        f'WIRING CHECK of panel "{m.panel}", {show.sheet.title}',
        f"{m.date}, by {m.by}; "
        + (f"through sink {m.sink}" if m.sink else "levels read from a file"),
        f"{len(m.feed)} feeds, one at a time {-m.drive_db:g} dB under full scale; microphone "
        f"{m.mic_m:g} m in front; reference feed {m.reference or 'none'}",
        f"air {air.temperature_c:g} °C, {air.humidity_pct:g} %, {air.pressure_kpa:g} kPa",
        "",
        f"FINDINGS: {len(wrong)} of {len(m.feed)} feeds" if found else "FINDINGS: none",
        *(f"  {line}" for line in findings_lines(show, m.panel, found)),
        "",
        *_standing(m, spec),
        "",
        "FEEDS",
        *_feeds(m),
        "",
        CAUTION_LINE,
    ]
    return "\n".join(lines) + "\n"


def findings_lines(show: Show, panel: str, found: Sequence[Finding]) -> list[str]:
    """Each finding with what to do; a swapped pair is told once."""
    told = []
    both = {finding.feed for finding in found if finding.kind == "swapped"}
    for finding in found:
        again = finding.other in both and finding.feed > (finding.other or 0)
        if finding.kind != "swapped" or not again:
            told.append(f"{_what(show, panel, finding)}. {_cure(show, panel, finding)}")
    return told


def _what(show: Show, panel: str, finding: Finding) -> str:
    feed, other = finding.feed, finding.other
    if finding.kind == "swapped":
        return f"feeds {feed} and {other} swapped"
    if finding.kind == "moved":
        return f"feed {feed} sounds at the place of feed {other}"
    text = f"feed {feed} {finding.kind}"
    if finding.under_db is not None:
        text += f", {finding.under_db:.1f} dB under the median"
        cells = show.cells[panel]
        own = cells.feed == feed - show.rig.panel[panel].first_feed
        count = int((own & ~cells.dead).sum())
        if finding.kind == "weak" and (fault := cells_at_fault(count, finding.under_db)):
            text += f", as with {fault[0]} of its {count} cells {fault[1]}"
    return text


def _cure(show: Show, panel: str, finding: Finding) -> str:
    spec, feed = show.rig.panel[panel], finding.feed
    own = feed - spec.first_feed
    where = f"in {spec.cells}" if spec.cells else "in a cells file for this panel"
    where += f", for the cells on its feed {own + 1}"
    match finding.kind:
        case "swapped":
            return f"Re-plug feeds {feed} and {finding.other}"
        case "moved":
            return f"Re-plug it: find what feeds the place of feed {feed}"
        case "reversed":
            cells = show.cells[panel]
            turned = -cells.polarity[cells.feed == own][0]
            return f"Turn its two wires over, or write polarity {turned:g} {where}"
        case "dead":
            return f"Check plug, amplifier and cells; if it stays, write dead 1 {where}"
        case "weak":
            return f"Check its cells one by one; mend them, or write dead 1 {where}"


def _standing(m: Measurement, spec: PanelSpec) -> list[str]:
    """Whether the panel is measured by this, and what to write where."""
    over_db = m.over_model_db
    lines = []
    if over_db is not None:
        word = "over" if over_db >= 0.0 else "under"
        lines.append(f"Level: {abs(over_db):.1f} dB {word} the field model.")
    if m.passes:
        return [*lines, "PASSES: the panel counts as measured once rig.toml names this file."]
    lines += ["DOES NOT PASS: the panel does not count as measured by this.", *_reasons(m)]
    if over_db is not None and any("louder" in r or "quieter" in r for r in m.against):
        level_db = spec.level_db_30cm_10v + over_db
        lines.append(
            f"  If the microphone is right, level_db_30cm_10v = {level_db:.1f} in rig.toml makes "
            f"the model so (now {spec.level_db_30cm_10v:g}); then read the levels again."
        )
    return lines


def _reasons(m: Measurement) -> list[str]:
    return [f"  - {reason}" for reason in m.against]


def _feeds(m: Measurement) -> list[str]:
    lines = []
    for feed in m.feed:
        levels = [feed.level_db, feed.with_reference_db]
        shown = [f"{level:6.1f} dB" if level is not None else "        -" for level in levels]
        mark = f"FAIL  {', '.join(feed.found)}" if feed.found else "pass"
        lines.append(f"{feed.feed:5d} {shown[0]} alone {shown[1]} with the reference  {mark}")
    return lines
