"""The guard as the host sees it: its readings made into locks, views, and lines of the journal."""

from __future__ import annotations

import time
from collections.abc import Iterable
from typing import Any

from beamctl.guard.points import listeners
from beamctl.host.warden import Warden
from beamctl.show.player import Player
from beamctl.show.records import Record
from beamctl.show.show import Show
from beamctl.snapshot import GuardView, SeatLevel

TOLD_S = 1.0  # between two lines of the journal, and before a hold counts as over


class Guarding:
    """Stands between one warden and one player; what it returns is for the journal."""

    def __init__(self, show: Show, warden: Warden, player: Player) -> None:
        self._show, self._warden, self._player = show, warden, player
        self._listeners = listeners(show.house)
        self._caps = show.caps
        self._told_at = 0.0
        self._held: dict[str, float] = {}  # panel → when it was held last

    def hear(self, message: dict[str, Any], sample: int) -> list[Record]:
        """Take in what the guard said; a trip ends what sounds."""
        if reason := self._warden.hear(message):
            return self._player.trip(reason, sample)
        return []

    def tick(self, sample: int) -> list[Record]:
        """What follows from how the guard stands now."""
        self._warden.watch()
        player, blind = self._player, self._warden.blind
        player.locks.blind = blind
        records = []
        if blind and player.output in ("OPEN", "HUSHED"):
            records += player.trip(f"blind: {blind}", sample)
        records += self._holds(sample)
        now = time.monotonic()
        if player.output == "OPEN" and now - self._told_at >= TOLD_S:
            self._told_at = now
            records.append(Record(sample, "guard", args=self._line()))
        return records

    def begins(self, sample: int, who: str) -> list[Record]:
        """The caps and the air from here on; `who` read the air, "" for the house's own."""
        caps, house = self._caps, self._show.house
        args = {
            "seats_db": {f"{hz:g}": db for hz, db in caps.seats_db.items()},
            "crew_db": {f"{hz:g}": db for hz, db in caps.crew_db.items()},
            "averaging_s": caps.averaging_s,
            "dose_window_s": caps.dose_window_s,
            "margin_db": dict(caps.margin_db),
            "measured": {name: panel.measured for name, panel in self._show.rig.panel.items()},
            "tables": {who: list(names) for who, names in caps.tables.items()},
            "blocks": {name: block.class_ for name, block in house.block.items()},
            "signed_by": caps.signed_by,
            "signed_on": caps.signed_on,
            "unsigned": caps.unsigned,
        }
        air = Record(sample, "air", who=who, args=house.air.model_dump())
        return [Record(sample, "caps", args=args), air]

    def dose(self) -> dict[str, tuple[float, float]]:
        """Listener → percent over the window and since doors; empty while none was counted."""
        return {
            who.name: (row[3], row[4])
            for who, row in zip(self._listeners, self._warden.levels, strict=False)
        }

    # -- views -----------------------------------------------------------------------------------

    def view(self) -> GuardView:
        """How it stands, for every desk."""
        state, reason = self._state()
        seats = self.levels()
        heard = [s for s in seats if s.level_db is not None]
        worst = min(heard, key=lambda s: s.cap_db - (s.level_db or 0.0), default=None)
        most = max(seats, key=lambda s: s.dose_pct, default=None)
        caps = self._caps
        signed = f"signed by {caps.signed_by} on {caps.signed_on}"
        tables = ", ".join(dict.fromkeys(name for names in caps.tables.values() for name in names))
        return GuardView(
            state=state,
            reason=reason,
            headroom_db=None if worst is None else worst.cap_db - (worst.level_db or 0.0),
            seat="" if worst is None else f"{worst.block} {worst.name}",
            band_hz=0.0 if worst is None else worst.band_hz,
            level_db=None if worst is None else worst.level_db,
            cap_db=0.0 if worst is None else worst.cap_db,
            held_db=dict(self._warden.reading.get("held_db", {})),
            dose_pct=0.0 if most is None else most.dose_pct,
            dose_seat="" if most is None else f"{most.block} {most.name}",
            signed=f"{f'UNSIGNED: {caps.unsigned}' if caps.unsigned else signed}; {tables}",
            margin_db=max(caps.margin_db.values()),
        )

    def levels(self) -> tuple[SeatLevel, ...]:
        """Every seat and crew point, as the guard measured it last."""
        return tuple(
            SeatLevel(who.seat, who.block, who.crew, who.at_m, level, band_hz, cap_db, dose)
            for who, (level, band_hz, cap_db, dose, _doors) in zip(
                self._listeners, self._warden.levels, strict=False
            )
        )

    def _state(self) -> tuple[str, str]:
        locks = self._player.locks
        if locks.tripped:
            return "TRIPPED", locks.tripped
        if self._warden.blind:
            return "BLIND", self._warden.blind
        return str(self._warden.reading.get("state", "BLIND")), ""

    # -- the journal -----------------------------------------------------------------------------

    def _holds(self, sample: int) -> list[Record]:
        """Panels that begin to be held, and those that are so no more."""
        now, held = time.monotonic(), self._warden.reading.get("held_db", {})
        if self._player.output != "OPEN":
            held = {}
        records = [
            self._cap(sample, panel, 1, db) for panel, db in held.items() if panel not in self._held
        ]
        self._held |= dict.fromkeys(held, now)
        silent = self._player.output != "OPEN"
        for panel, last in list(self._held.items()):
            if panel not in held and (silent or now - last > TOLD_S):
                del self._held[panel]
                records.append(self._cap(sample, panel, 0, 0.0))
        return records

    def _cap(self, sample: int, panel: str, began: int, held_db: float) -> Record:
        view = self.view()
        args = {"panel": panel, "began": began, "held_db": held_db, "seat": view.seat}
        args |= {"band_hz": view.band_hz, "level_db": view.level_db}
        return Record(sample, "cap", cue=self._cue_on(panel, sample), who="guard", args=args)

    def _cue_on(self, panel: str, sample: int) -> str:
        """The cue that last moved a beam which sounds on `panel`."""
        cues = [
            plan.cue
            for plan in self._player.plans.values()
            if self._show.panel_of(plan.name) == panel and plan.sounding(sample)
        ]
        return cues[-1] if cues else self._player.newest

    def _line(self) -> dict[str, Any]:
        """One reading for the journal: where it stands, and every block at its worst."""
        view, seats = self.view(), self.levels()
        doors = [row[4] for row in self._warden.levels]
        blocks: dict[str, dict[str, Any]] = {}
        for name in self._show.house.block:
            rows = [(s, d) for s, d in zip(seats, doors, strict=False) if s.block == name]
            if rows:
                blocks[name] = _worst(rows)
        return {
            "state": view.state,
            "headroom_db": None if view.headroom_db is None else round(view.headroom_db, 2),
            "seat": view.seat,
            "band_hz": view.band_hz,
            "held_db": view.held_db,
            "blocks": blocks,
        }


def _worst(rows: Iterable[tuple[SeatLevel, float]]) -> dict[str, Any]:
    """A block's seat nearest its cap, and the one with the most dose."""
    rows = list(rows)
    worst, _ = min(
        rows, key=lambda r: r[0].cap_db - (-1e9 if r[0].level_db is None else r[0].level_db)
    )
    most, doors = max(rows, key=lambda r: r[0].dose_pct)
    return {
        "seat": worst.name,
        "level_db": worst.level_db,
        "band_hz": worst.band_hz,
        "cap_db": worst.cap_db,
        "dose_pct": most.dose_pct,
        "doors_pct": doors,
        "dose_seat": most.name,
    }
