"""The snapshot: what the player knows, what the engine tells, and where the beams really point."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, field

import numpy as np

from beamctl.acoustics.air import Air, sound_speed_m_s
from beamctl.acoustics.cells import steerable
from beamctl.acoustics.geometry import angles_deg, direction
from beamctl.acoustics.pattern import predicted_peak
from beamctl.acoustics.steering import base_delay_s, cell_delays_s, feed_drive
from beamctl.acoustics.transfer import Emitters
from beamctl.host.status import Status
from beamctl.show.emission import emitters_of
from beamctl.show.plan import BeamPlan
from beamctl.show.player import Player
from beamctl.show.show import Show
from beamctl.show.targets import frame_of
from beamctl.snapshot import (
    BeamView,
    CueText,
    EngineView,
    GuardView,
    PanelView,
    SheetView,
    Snapshot,
)

Aim = tuple[float, float, float, float]  # direction and focus in 1/metres, rounded
Angles = tuple[float, float]


@dataclass
class Picture:
    """Makes snapshots; remembers the predicted peak of each beam until its aim changes."""

    show: Show
    _emitters: dict[str, Emitters] = field(default_factory=dict)
    _peaks: dict[str, tuple[Aim, Angles]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        self._air = Air(**self.show.house.air.model_dump())
        for name, panel in self.show.rig.panel.items():
            self._emitters[name] = emitters_of(panel, self.show.cells[name], self._air)

    def snapshot(
        self, player: Player, status: Status, engine: EngineView, guard: GuardView
    ) -> Snapshot:
        """All of a loaded show at the sample the engine has reached."""
        now = engine.rendered
        rate = player.rate_hz
        since = None if player.newest_at is None else max(0.0, (now - player.newest_at) / rate)
        follow = {
            run.follow[1]: max(0.0, (run.follow[0] - now) / rate)
            for run in player.runs.values()
            if run.follow is not None
        }
        states = {ref: str(player.state(ref)) for ref in {**player.states, **player.barred}}
        left = {ref: s for ref in player.runs if (s := _left_s(player, ref, now)) is not None}
        return Snapshot(
            sheet_version=0,
            output=player.output,
            standby=player.standby,
            newest=player.newest,
            since_go_s=since,
            holding=player.held_at is not None,
            arming=now <= player.ready_until,
            states=states,
            left_s=left,
            follow=follow,
            beams=tuple(self._beam(plan, now) for plan in player.plans.values()),
            panels=tuple(self._panels(status)),
            engine=engine,
            notices=(),
            guard=guard,
            barred=dict(player.barred),
            unvouched=player.locks.unvouched,
            mode=player.mode,
            trying=player.trying,
        )

    def _beam(self, plan: BeamPlan, now: int) -> BeamView:
        state = plan.state
        x, y, z, _ = state.direction_at(now)
        per_m = state.reach_per_m_at(now)
        power = state.power_at(now)
        sounding = power > 0.0
        return BeamView(
            name=plan.name,
            panel=self.show.panel_of(plan.name),
            cue=plan.cue,
            sound=plan.sound if sounding else "",
            target=plan.target.label,
            level_db=10.0 * math.log10(power) if sounding else None,
            depth=state.depth_at(now),
            law=state.law_name(),
            aim_deg=_angles((x, y, z)),
            peak_deg=self._peak(plan, (x, y, z), per_m) if sounding else None,
            reach_m=1.0 / per_m if per_m > 0.0 else None,
            travelling=state.travelling(now),
        )

    def _peak(self, plan: BeamPlan, unit: tuple[float, float, float], per_m: float) -> Angles:
        """Predicted peak of the beam's carrier, in degrees."""
        x, y, z = unit
        key: Aim = (round(x, 5), round(y, 5), round(z, 5), round(per_m, 5))
        kept = self._peaks.get(plan.name)
        if kept is not None and kept[0] == key:
            return kept[1]
        name = self.show.panel_of(plan.name)
        panel, cells = self.show.rig.panel[name], self.show.cells[name]
        speed = sound_speed_m_s(self._air)
        delays = cell_delays_s(cells.at_m, np.array(unit), per_m, speed, base_delay_s(cells.at_m))
        peak = predicted_peak(
            self._emitters[name],
            frame_of(panel),
            feed_drive(cells, delays, panel.carrier_hz),
            self._near(name, unit, speed),
            self._air,
            panel.carrier_hz,
            1.0 / per_m if per_m > 0.0 else None,
        )
        found = _angles((peak[0], peak[1], peak[2]))
        self._peaks[plan.name] = (key, found)
        return found

    def _near(
        self, panel: str, unit: tuple[float, float, float], speed_m_s: float
    ) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
        """Where to look for the main lobe: straight out in an axis that the loom cannot steer."""
        steers = steerable(
            self.show.cells[panel], speed_m_s / self.show.rig.panel[panel].carrier_hz
        )
        azimuth, elevation = _angles(unit)
        near: np.ndarray[tuple[int], np.dtype[np.float64]] = direction(
            azimuth if steers[0] else 0.0, elevation if steers[1] else 0.0
        )
        return near

    def _panels(self, status: Status) -> Iterable[PanelView]:
        for row, (name, cells) in zip(status.meters, self.show.cells.items(), strict=False):
            peak, gain = float(row[0]), float(row[1])
            peak_db = 20.0 * math.log10(peak) if peak > 1e-6 else None
            gain_db = 20.0 * math.log10(gain) if gain > 0.0 else 0.0
            yield PanelView(name, cells.feeds, peak_db, gain_db)


def sheet_view(show: Show, version: int) -> SheetView:
    """The sheet as text."""
    cues = (CueText(c.ref, c.title, c.note, c.then or "") for c in show.sheet.cue)
    return SheetView(version, show.sheet.title, tuple(cues))


def _angles(unit: tuple[float, float, float]) -> Angles:
    azimuth, elevation = angles_deg(np.array(unit))
    return float(azimuth), float(elevation)


def _left_s(player: Player, ref: str, now: int) -> float | None:
    """Seconds until a cue is done; None when a loop keeps it going."""
    run = player.runs[ref]
    last = run.acts[-1][0] if run.acts else now
    for plan in player.plans.values():
        if plan.owner == ref:
            if plan.ends_at is None:
                return None
            last = max(last, plan.ends_at)
    return max(0.0, (max(last, run.settles_at) - now) / player.rate_hz)
