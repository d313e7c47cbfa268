"""The mode that outlives a host, and what it makes of a file that says no mode."""

from __future__ import annotations

from pathlib import Path

import pytest

from beamctl.host.remembered import remember_mode, remembered_mode


@pytest.fixture
def state(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("BEAMCTL_STATE", str(tmp_path / "state"))
    return tmp_path / "state"


def test_each_show_keeps_its_own_mode(state: Path, tmp_path: Path) -> None:
    assert remembered_mode(tmp_path / "a") == "WRITE"
    assert remember_mode(tmp_path / "a", "SHOW") == ""
    assert remember_mode(tmp_path / "b", "WALK") == ""
    assert (remembered_mode(tmp_path / "a"), remembered_mode(tmp_path / "b")) == ("SHOW", "WALK")


@pytest.mark.parametrize("kept", [b"", b"show", b"SHOW\n", b"\xff\xfe"])
def test_what_is_no_mode_counts_as_none(state: Path, tmp_path: Path, kept: bytes) -> None:
    remember_mode(tmp_path / "a", "SHOW")
    (place,) = (state / "modes").iterdir()
    place.write_bytes(kept)
    assert remembered_mode(tmp_path / "a") == "WRITE"


def test_a_disk_that_refuses_is_told(state: Path, tmp_path: Path) -> None:
    state.mkdir()
    (state / "modes").write_text("a file where the folder should be")
    assert "will not be in SHOW" in remember_mode(tmp_path / "a", "SHOW")
