"""Journals written line by line, with figures that a test knows."""

from __future__ import annotations

import json
import random
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any

from click.testing import CliRunner, Result

from beamctl.cli import main
from beamctl.show.records import Record

RATE_HZ = 192_000
BEGAN = "2026-12-01T19:00:00.000+00:00"
HEADER: Mapping[str, Any] = {
    "beamctl": "0.4.0",
    "journal": 1,
    "began": BEGAN,
    "folder": "/shows/night-tram",
    "digests": {"guard.toml": "a1" * 32, "sheet.toml": "b2" * 32, "sounds/bell.flac": "c3" * 32},
    "rate_hz": RATE_HZ,
    "channels": 20,
    "sink": "null",
    "title": "Night Tram",
    "cues": {"1": "rails hum", "12.5": "whisper crosses row B"},
}
SEATS_DB = {"20000": 70.0, "25000": 100.0, "31500": 100.0, "40000": 100.0}
CREW_DB = {"20000": 75.0, "25000": 110.0, "31500": 110.0, "40000": 110.0}
CAPS: Mapping[str, Any] = {
    "seats_db": SEATS_DB,
    "crew_db": CREW_DB,
    "averaging_s": 1.0,
    "dose_window_s": 3600.0,
    "margin_db": {"prow": 0.0, "stern": 10.0},
    "tables": {"seats": ["irpa-1984-public"], "crew": ["irpa-1984-workers"]},
    "measured": {"prow": "prow-2026-11-30.toml", "stern": ""},
    "blocks": {"stalls": "seats", "pit": "crew"},
    "signed_by": "A. Venue",
    "signed_on": "2026-11-30",
    "unsigned": "",
}

OPENED_S, SECONDS = 100, 1000
BLOCKS = {"stalls": ("B4", 100.0), "balcony": ("AA12", 100.0), "pit": ("X1", 110.0)}
CLASSES = {"stalls": "seats", "balcony": "seats", "pit": "crew"}
HOLDS = (("prow", 110, 114, 3.5), ("stern", 300, 307, 6.25), ("prow", 500, 500.5, 1.5))


def at(second: float) -> int:
    """The sample of a second."""
    return round(second * RATE_HZ)


def block(
    seat: str, level_db: float | None, cap_db: float, dose_pct: float, band_hz: float = 40_000.0
) -> dict[str, Any]:
    """A seat block in a `guard` record."""
    return {
        "seat": seat,
        "level_db": level_db,
        "band_hz": band_hz,
        "cap_db": cap_db,
        "dose_pct": dose_pct,
        "dose_seat": seat,
    }


def guard(
    second: float, blocks: Mapping[str, Any], state: str = "CLEAR", **held_db: float
) -> Record:
    """The guard's reading of a second."""
    args = {"state": state, "headroom_db": None, "seat": "", "band_hz": 0.0, "held_db": held_db}
    return Record(at(second), "guard", args=args | {"blocks": blocks})


def cap(second: float, panel: str, began: int, held_db: float, cue: str = "") -> Record:
    """A panel begins or ends being held."""
    args = {"panel": panel, "began": began, "held_db": held_db, "seat": "stalls B4"}
    return Record(at(second), "cap", cue=cue, args=args | {"band_hz": 40e3, "level_db": 100.4})


def output(second: float, before: str, after: str, by: str, who: str = "") -> Record:
    """The output entered another state."""
    return Record(at(second), "output", who=who, args={"from": before, "to": after, "by": by})


def lines(records: Sequence[Record], header: Mapping[str, Any] = HEADER) -> bytes:
    """A journal's bytes."""
    texts = [json.dumps(header), *(record.to_json() for record in records)]
    return "".join(f"{text}\n" for text in texts).encode()


def write(path: Path, records: Sequence[Record], header: Mapping[str, Any] = HEADER) -> Path:
    """A journal in a file."""
    path.write_bytes(lines(records, header))
    return path


def left(second: float) -> Record:
    """The last word of a journal."""
    args = {"entered": "e5" * 32, "written": 9, "read": 8, "left": None}
    return Record(at(second), "left", args=args)


def evening() -> list[Record]:
    """Seventeen minutes of sound with chance levels, three holds, a trip, and refusals."""
    rng = random.Random(4)
    records = [
        Record(0, "caps", args={**CAPS, "blocks": CLASSES}),
        Record(0, "air", args={"temperature_c": 21.5, "humidity_pct": 45.0, "pressure_kpa": 101.2}),
        Record(0, "clock", args={"utc": "2026-12-01T19:00:08+00:00"}),
        Record(0, "stream", args={"sink": "null", "route": "clock", "priority": "ordinary"}),
        output(0, "COLD", "SHUT", "sink-open"),
        *(refused(n, "10.0.0.4:5000") for n in range(5)),
        output(OPENED_S, "SHUT", "OPEN", "arm", "desk"),
        *_levels(rng),
        output(OPENED_S + SECONDS, "OPEN", "HUSHED", "hush", "desk"),
        *(cap(b, p, 1, 0.5, "12.5") for p, b, _, _ in HOLDS),
        *(cap(e, p, 0, db, "12.5") for p, _, e, db in HOLDS),
        Record(at(400), "trip", args={"reason": "prow sends sound below 17.8 kHz"}),
        Record(at(405), "clear", who="anna"),
        Record(at(200), "go", cue="1", who="desk"),
        Record(at(300), "go", cue="12.5", who="10.0.0.4:5000"),
        Record(at(450), "dry", args={"n": 3840}),
        Record(at(460), "fault", args={"clip": 7}),
    ]
    return [*sorted(records, key=lambda record: record.sample), left(1200)]


def _levels(rng: random.Random) -> Iterator[Record]:
    dose = dict.fromkeys(BLOCKS, 0.0)
    for second in range(OPENED_S, OPENED_S + SECONDS):
        told = {}
        for name, (seat, cap_db) in BLOCKS.items():
            heard = round(cap_db - rng.gauss(12.0, 4.0), 3) if rng.random() > 0.1 else None
            dose[name] += 0.01 * rng.random()
            told[name] = block(f"{name} {seat}", heard, cap_db, round(dose[name], 4))
        yield guard(second, told, "CLEAR")


def refused(second: float, who: str) -> Record:
    """A GO that came before the output was open."""
    args = {"asked": "go", "reason": "not-armed", "text": "SHUT: * then Enter opens the output"}
    return Record(at(second), "refused", who=who, args=args)


def run(*arguments: str | Path) -> Result:
    """`beamctl report`, in this process."""
    return CliRunner().invoke(main, ["report", *map(str, arguments)])
