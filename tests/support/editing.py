"""Edits of the small show, asked of a running host."""

from __future__ import annotations

from typing import Any

from support.running import Running, told, wait_for

from beamctl.show.edits import Edit, Put, Set
from beamctl.snapshot import Answer

TRIM_DB, LOWER_DB = -20.0, -26.0  # of cue 1 in smallshow, and an edit of it


def ask(running: Running, *steps: Any) -> Answer:
    """Have an edit made, whatever comes of it."""
    return running.link.edit(Edit(f"{len(steps)} steps", steps))


def edit(running: Running, *steps: Any) -> None:
    """Have an edit made, which must not be refused."""
    answer = ask(running, *steps)
    assert answer.done, answer.text


def trim(ref: str, trim_db: float) -> Set:
    """Another trim for the first act of a cue."""
    return Set("sheet.toml", ("cue", ref, "act", 0), "trim_db", trim_db)


def another_panel(name: str, first_feed: int) -> tuple[Put, ...]:
    """A panel of four feeds with a beam and a cue of its own, numbered 9."""
    panel = {
        "at_m": [1.0, 0.0, 3.0],
        "tilt_deg": -17.0,
        "grid": {"columns": 2, "rows": 2, "pitch_mm": 10.0},
        "first_feed": first_feed,
        "volts_at_full_scale": 5.0,
        "max_volts": 7.0,
        "level_db_30cm_10v": 95.0,
        "cell_mm": 9.0,
        "resonance_hz": 40000.0,
        "q": 20.0,
    }
    act = {"beam": "extra", "sound": "tone.wav", "loop": True, "seat": "A3", "trim_db": -24.0}
    return (
        Put("rig.toml", ("panel", name), panel),
        Put("sheet.toml", ("beam", "extra"), {"panel": name}),
        Put("sheet.toml", ("cue", "9"), {"title": "the new panel"}, after="4"),
        Put("sheet.toml", ("cue", "9", "act", 0), act),
    )


def looked(running: Running) -> None:
    """Wait until all that was edited has been looked at."""
    wait_for(lambda: not running.snapshot().edit.waits, "the edited cues to be looked at")


def started_anew(running: Running, streams: int) -> None:
    """Wait until so many streams have begun and the guard sees the last."""
    wait_for(lambda: len(told(running.journal, "stream")) == streams, "another engine")
    wait_for(lambda: running.snapshot().guard.state != "BLIND", "the guard to see")
    wait_for(lambda: bool(running.link.levels()), "levels")
