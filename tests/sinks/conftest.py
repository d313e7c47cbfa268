"""A computer whose devices are made up."""

from __future__ import annotations

from typing import Any

import pytest
from support.fakeaudio import Library

from beamctl.sinks import device, portaudio


@pytest.fixture
def given_up(monkeypatch: pytest.MonkeyPatch) -> list[Any]:
    """What was taken from the interpreter's exit."""
    taken: list[Any] = []
    monkeypatch.setattr(portaudio.atexit, "unregister", taken.append)
    return taken


@pytest.fixture
def offer(monkeypatch: pytest.MonkeyPatch) -> Any:
    """Pretend that the computer has these devices."""

    def pretend(*entries: tuple[str, str, int]) -> Library:
        library = Library(*entries)
        monkeypatch.setattr(portaudio, "_library", lambda: library)
        monkeypatch.setattr(portaudio, "_open", {})
        monkeypatch.setattr(device, "START_S", 0.1)
        return library

    return pretend
