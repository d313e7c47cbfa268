"""What a cue does, in sentences that can be read aloud."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from beamctl.desk.format import level
from beamctl.show.sheet import Act, Cue
from beamctl.snapshot import CueLevel


def seconds(value: float) -> str:
    """A time as it is said: with one decimal, or with as many as it has."""
    tenths = f"{value:.1f}"
    return f"{tenths if float(tenths) == value else f'{value:g}'} s"


def target_words(act: Act) -> str:
    """What an act aims at, in the words that are typed for it: "seat B4"; "" for no aim."""
    if act.seat is not None:
        return f"seat {act.seat}"
    if act.spot is not None:
        return f"spot {act.spot}"
    if act.point_m is not None:
        return " ".join(["point", *(f"{value:g}" for value in act.point_m)])
    if act.aims:
        return f"angles {act.azimuth_deg or 0.0:g} {act.elevation_deg or 0.0:g}"
    return ""


def sentence(act: Act) -> str:
    """One act: "at 3.0 s whisper goes to seat B9 in 4.0 s"."""
    where = f"{target_words(act)} via {act.via}" if act.via else target_words(act)
    over = f" in {seconds(act.over_s)}" if act.over_s else ""
    manner = _manner(act)
    if act.fall_s is not None:
        does = f"falls silent in {seconds(act.fall_s)}" if act.fall_s else "falls silent at once"
    elif act.sound is not None:
        does = f"{'repeats' if act.loop else 'plays'} {act.sound}{f' at {where}' if where else ''}"
        manner += [f"rises{over}"] if over else []
    elif where:
        does = f"goes to {where}{over}"
    elif manner:
        does, manner = f"changes{over} to {manner[0]}", manner[1:]
    else:
        does = "does nothing yet"
    return ", ".join([f"at {seconds(act.at_s)} {act.beam} {does}", *manner])


def _manner(act: Act) -> list[str]:
    """How a beam sounds from this act on, as far as the act names it."""
    said = [str(act.law)] if act.law is not None else []
    said += [f"depth {act.depth:.2f}"] if act.depth is not None else []
    said += [_reach(act.reach)] if act.reach is not None else []
    said += [f"{level(act.trim_db)} dB"] if act.trim_db is not None else []
    return said


def _reach(reach: float | str) -> str:
    words = {"far": "reaching far", "aim": "focused on the target"}
    return words[reach] if isinstance(reach, str) else f"focused at {reach:g} m"


def follow_on(cue: Cue) -> str:
    """What follows a cue by itself, "" for nothing."""
    if cue.then is None or cue.then_at_s is None:
        return ""
    return f"{cue.then} follows by itself {seconds(cue.then_at_s)} after this GO"


def found_words(found: CueLevel) -> str:
    """Where a cue comes nearest to a cap, and what is left there."""
    left_db = found.cap_db - found.level_db
    left = f"{left_db:.1f} dB left" if left_db >= 0.0 else f"{-left_db:.1f} dB over"
    return (
        f"{left} at {found.seat}: {level(found.level_db)} of {found.cap_db:g} dB at "
        f"{found.band_hz / 1000.0:g} kHz, {found.at_s:.1f} s after GO"
    )


def remarks_of(remarks: Iterable[str], ref: str) -> Iterator[str]:
    """What the reader remarks on cue `ref`, without the file, the line and the cue."""
    for remark in remarks:
        _, found, about = remark.partition(f" cue {ref}")
        if found and about[:1] in (" ", ":"):
            yield about.lstrip(" :")
