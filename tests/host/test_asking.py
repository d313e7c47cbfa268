"""Requests for events: the figures that each field may have."""

from __future__ import annotations

from typing import Any

import pytest

from beamctl.host.asking import event_of
from beamctl.show.events import Go, Mode, SetAir, SoundNow, Tail


def asked(name: str, /, **arguments: Any) -> object:
    return event_of({"name": name, "arguments": arguments})


@pytest.mark.parametrize(
    ("name", "arguments", "event"),
    [
        ("go", {"ref": "12.5"}, Go("desk", "12.5")),
        ("tail", {"fall_s": 3600.0}, Tail("desk", "", 3600.0)),
        ("sound-now", {"ref": "1", "act": 2, "trim_db": -40.5}, SoundNow("desk", "1", 2, -40.5)),
        ("air", {"temperature_c": -3.5}, SetAir("desk", -3.5)),
        ("mode", {"to": "SHOW", "word": "show"}, Mode("desk", "SHOW", "show")),
    ],
)
def test_what_makes_an_event(name: str, arguments: dict[str, Any], event: object) -> None:
    assert asked(name, **arguments) == event


@pytest.mark.parametrize(
    ("name", "arguments"),
    [
        ("sound-now", {"trim_db": 0.5}),
        ("sound-now", {"trim_db": -1e6}),
        ("sound-now", {"trim_db": True}),
        ("sound-now", {"act": True}),
        ("sound-now", {"act": 1.0}),
        ("tail", {"fall_s": -1.0}),
        ("tail", {"fall_s": float("inf")}),
        ("air", {"humidity_pct": -1.0}),
        ("air", {"temperature_c": float("nan")}),
        ("mode", {"name": "two\nlines"}),
        ("undo", {}),
        ("no such action", {}),
    ],
)
def test_what_makes_none(name: str, arguments: dict[str, Any]) -> None:
    assert asked(name, **arguments) is None
