"""A device that vanishes under a running host, and what comes back."""

from __future__ import annotations

import time
from pathlib import Path

import pytest
from jackserver import SINK, jack_server
from support.running import host, outputs, told, wait_for
from support.smallshow import FEEDS, write_show

from beamctl.engine.outlet import Outlet
from beamctl.host.places import memory_folder, show_key

pytestmark = pytest.mark.real
BACK_S = 60.0


def test_lost_then_too_small_then_back(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """LOST within 500 ms; a device with too few channels stays LOST and both are told; the same
    device back is SHUT, not OPEN, and sounds again when somebody arms."""
    monkeypatch.setenv("BEAMCTL_RUNTIME", str(tmp_path / "run"))
    monkeypatch.setenv("BEAMCTL_STATE", str(tmp_path / "state"))
    show = write_show(tmp_path / "show")
    journal = tmp_path / "journal.jsonl"
    with jack_server(192_000, 1024, 2, FEEDS) as server:
        for name, value in server.env.items():
            monkeypatch.setenv(name, value)
        running = host(show, SINK, journal)
        there = running.__enter__()
        try:
            there.open()
            there.act("go", ref="1")
            there.pass_by(0.3)
            outlet = Outlet.attach(memory_folder() / f"{show_key(show)}.outlet")
            calls, asked_at = outlet.callbacks, time.monotonic()
            server.process.terminate()
            while there.snapshot().output != "LOST":
                if outlet.callbacks != calls:
                    calls, asked_at = outlet.callbacks, time.monotonic()
                assert time.monotonic() - asked_at < 0.5
            server.process.wait(20.0)
            with jack_server(192_000, 1024, 2, FEEDS - 4, name=server.name):
                wait_for(lambda: _told_of(there, f"offered {FEEDS - 4}"), "the refusal", BACK_S)
                assert _told_of(there, f"needed {FEEDS}")
                assert there.snapshot().output == "LOST"
            with jack_server(192_000, 1024, 2, FEEDS, name=server.name):
                wait_for(lambda: there.snapshot().output == "SHUT", "SHUT", BACK_S)
                assert outputs(journal)[-1] == "SHUT"
                there.open()
                wait_for(lambda: there.snapshot().panels[0].peak_db is not None, "the loop", 10.0)
                assert len(told(journal, "stream")) == 2
                assert there.stop() == 0
        finally:
            running.__exit__(None, None, None)


def _told_of(there, text: str) -> bool:
    return any(text in notice for notice in there.snapshot().notices)
