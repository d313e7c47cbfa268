"""A device 200 ppm fast, for one simulated hour: nothing lost, cues on its count, drift shown."""

from __future__ import annotations

import numpy as np
import pytest
from support.rigs import analytic_tone, grid, make_show

from beamctl.engine import layout as at
from beamctl.engine.chain import ramp_n, wires_of
from beamctl.engine.drift import Drift
from beamctl.engine.outlet import Outlet
from beamctl.engine.renderer import Renderer
from beamctl.show.events import Confirm, Go, Ready
from beamctl.show.player import Player
from beamctl.show.records import FINAL

RATE = 96_000
QUANTUM = 4096
PPM = 200.0
HOUR_S = 3600.0
EVERY_S = 60.0
ACT_AT_S = 5.0
TICK_S = 0.004

CUES = [
    {
        "ref": "1",
        "title": "comes, and a second beam five seconds on",
        "act": [
            {"beam": "a", "sound": "tone", "azimuth_deg": 0.0, "trim_db": -20.0},
            {"at_s": ACT_AT_S, "beam": "b", "sound": "tone", "azimuth_deg": 0.0, "trim_db": -20.0},
        ],
    }
]


def test_one_hour_on_a_fast_device() -> None:
    """Simulated system time drives the host's part, the device's own count the pulls."""
    show = make_show(("a", "b"), CUES, cells=grid(2, 1), rate_hz=RATE, q=1.0)
    renderer = Renderer(show, {"p": {"tone": analytic_tone(1000.0, 1.0, RATE)}})
    outlet = Outlet.create(None, 4 * QUANTUM, show.channels, wires_of(show), ramp_n(show))
    player, drift = Player(show), Drift(RATE)
    rng = np.random.default_rng(5)
    block = np.zeros((QUANTUM, show.channels), np.float32)
    out = np.zeros((QUANTUM, show.channels), np.float32)
    sounded: list[int] = []
    fired: list[int] = []
    quiet_for = RATE
    system_s = 0.0
    go_at = EVERY_S

    def send(records) -> None:
        for record in records:
            if record.what == "gate":
                outlet.ask_open(record.args["n"])
            elif record.what not in FINAL:
                renderer.put(record)

    def fill() -> None:
        while outlet.room >= QUANTUM:
            renderer.render(block)
            outlet.push(block)

    fill()
    outlet.flow()
    outlet.grant(1 << 62, [1e6])
    outlet.host_lives(1 << 62)
    send(player.sink("sink-open", renderer.position))
    send(player.handle(Ready(), renderer.position))
    send(player.handle(Confirm(), renderer.position))
    pulls = 0
    while system_s < HOUR_S:
        # the device asks when its own clock says so; the host looks a little later
        system_s = (pulls + 1) * QUANTUM / RATE / (1.0 + PPM * 1e-6)
        out[:] = 0.0
        outlet.pull(out, 1)
        loud = np.flatnonzero(out.any(axis=1))
        first = pulls * QUANTUM
        for frame in loud[:1]:
            if quiet_for > RATE // 2:
                sounded.append(first + int(frame))
        quiet_for = 0 if len(loud) else quiet_for + QUANTUM
        pulls += 1
        drift.note(round((system_s + rng.uniform(0.0, TICK_S)) * 1e9), outlet.count(at.LAST_READ))
        fill()
        if system_s >= go_at:
            go_at += EVERY_S
            fired.append(renderer.position)
            send(player.handle(Go(ref="1"), renderer.position))
        send(player.advance(renderer.position + 4 * QUANTUM))
    assert outlet.count(at.EMPTY) == 0
    assert outlet.count(at.READ) == pulls * QUANTUM
    assert outlet.count(at.WRITTEN) == renderer.position
    # both acts of every cue, by the sink's own count, within a millisecond of when they were due
    due = [s for go in fired for s in (go, go + round(ACT_AT_S * RATE))]
    due = [s for s in due if s < pulls * QUANTUM]
    assert len(sounded) == len(due) >= 110
    assert np.abs(np.array(sounded) - np.array(due)).max() < RATE / 1000
    assert drift.ppm == pytest.approx(PPM, rel=0.05)
