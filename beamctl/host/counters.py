"""Counters of the engine and its sink: for the desk, and for the journal."""

from __future__ import annotations

from typing import Any

from beamctl.engine import layout as at
from beamctl.engine.drift import Drift
from beamctl.engine.outlet import Outlet
from beamctl.host.keeper import Keeper
from beamctl.host.status import Status
from beamctl.show.show import Show
from beamctl.snapshot import EngineView


def of(outlet: Outlet, status: Status, drift: Drift) -> dict[str, Any]:
    """Figures for one line of the journal."""
    return {
        "callbacks": outlet.callbacks,
        "dry": outlet.count(at.EMPTY),
        "longest_ms": outlet.count(at.LONGEST_NS) / 1e6,
        "fill": outlet.frames - outlet.room,
        "faults": outlet.count(at.FAULTS),
        "clips": outlet.count(at.CLIPS),
        "load_pct": status["load_ppm"] / 1e4,
        "drift_ppm": None if drift.ppm is None else round(drift.ppm, 2),
    }


def view(show: Show, sink: str, keeper: Keeper, drift: Drift, busy: str) -> EngineView:
    """The same for the desk; zeros while there is no engine."""
    rate, ready = show.rig.rate_hz, keeper.ready
    outlet = keeper.outlet
    reached = outlet.count(at.WRITTEN) if outlet is not None else 0
    if not ready:
        outlet = None
    return EngineView(
        sink=str(ready.get("sink", sink)),
        rate_hz=rate,
        feeds=show.channels,
        quantum=show.rig.quantum,
        ring_ms=float(ready.get("ring_ms", show.rig.ring_ms or 0.0)),
        rendered=reached,
        late=outlet.count(at.EMPTY) if outlet is not None else 0,
        load_pct=keeper.status["load_ppm"] / 1e4,
        compile_s=float(ready.get("compile_s", 0.0)),
        busy=busy,
        route=str(ready.get("route", "")),
        priority=str(ready.get("priority", "")),
        fill_ms=1000.0 * (outlet.frames - outlet.room) / rate if outlet is not None else 0.0,
        longest_ms=outlet.count(at.LONGEST_NS) / 1e6 if outlet is not None else 0.0,
        callbacks=outlet.callbacks if outlet is not None else 0,
        drift_ppm=drift.ppm,
    )
