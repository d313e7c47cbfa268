"""The renderer against a double-precision direct evaluation, standing and travelling."""

from __future__ import annotations

import numpy as np
import pytest
from support.oracle import direct_feeds
from support.rigs import analytic_tone, grid, make_show

from beamctl.engine.renderer import Renderer
from beamctl.show.records import Record

RATE = 192_000
START = 2_000  # even: a sound starts on the half-rate grid


def rendered(law: str, depth: float, tone_hz: float, moving: bool, columns: int, q: float):
    """A renderer at work, and the samples (n, F) of a window after everything has settled."""
    cells = grid(columns, 8)
    show = make_show(cells=cells, q=q, max_volts=5.0)
    renderer = Renderer(show, {"p": {"tone": analytic_tone(tone_hz, 1.0)}})
    first = np.array([np.sin(-0.3), np.cos(-0.3), 0.0])
    renderer.put(Record(START, "aim", "a", args={"direction": first.tolist(), "n": 0}))
    renderer.put(Record(START, "law", "a", args={"law": law, "n": 0}))
    renderer.put(Record(START, "depth", "a", args={"depth": depth, "n": 0}))
    renderer.put(Record(START, "play", "a", args={"sound": "tone", "loop": False}))
    renderer.put(Record(START, "level", "a", args={"power": 0.25, "n": 3840}))
    if moving:
        goal = [np.sin(0.3), np.cos(0.3), 0.0]
        n = round(np.degrees(0.6) / 60.0 * RATE)  # 60 degrees a second
        renderer.put(Record(10_000, "aim", "a", args={"direction": goal, "n": n}))
        renderer.put(Record(12_000, "reach", "a", args={"per_m": 0.5, "n": n}))
    out = np.zeros((24_000, show.channels), np.float32)
    for at in range(0, len(out), 256):
        renderer.render(out[at : at + 256])
    return renderer, out


@pytest.mark.parametrize("moving", [False, True], ids=["standing", "travelling"])
@pytest.mark.parametrize(
    ("law", "depth", "tone_hz", "bar_db"),
    [
        ("dsb", 0.7, 1_000.0, -80.0),
        ("dsb", 0.7, 8_000.0, -80.0),
        ("ssb", 0.7, 8_000.0, -80.0),
        ("root", 0.7, 4_000.0, -80.0),
        ("mam", 0.7, 4_000.0, -80.0),
        ("dsb", 0.5, 16_000.0, -60.0),
        ("ssb", 0.5, 16_000.0, -60.0),
    ],
)
def test_error_to_direct_evaluation(law, depth, tone_hz, bar_db, moving):
    """Peak error of every feed, re full scale, on a panel 320 mm wide, with cells of Q = 5."""
    renderer, out = rendered(law, depth, tone_hz, moving, columns=32, q=5.0)
    window = np.arange(16_000, 20_000)
    panel = renderer.panels["p"]
    wanted = direct_feeds(panel, panel.states[0], window, tone_hz, START, law, depth, 0.5)
    assert np.abs(wanted).max() > 0.2  # the comparison is about something
    error_db = 20.0 * np.log10(np.abs(out[window].T - wanted).max())
    print(law, tone_hz, moving, error_db)
    assert error_db <= bar_db


def test_every_block_size_gives_the_same_bits():
    """Blocks of 1, 64, 333 and 1,024 samples, across a GO, a travel and a re-aim mid-segment."""
    outs = []
    for block in (256, 1, 64, 333, 1024):
        show = make_show(("a", "b"))
        renderer = Renderer(show, {"p": {"tone": analytic_tone(700.0, 0.05)}})
        for beam, at in (("a", 101), ("b", 777)):
            renderer.put(Record(at, "aim", beam, args={"direction": [0.0, 1.0, 0.0], "n": 0}))
            renderer.put(Record(at, "play", beam, args={"sound": "tone", "loop": True}))
            renderer.put(Record(at, "level", beam, args={"power": 0.9, "n": 3840}))
        renderer.put(Record(3001, "aim", "a", args={"point_m": [1.0, 3.0, 0.2], "n": 9000}))
        renderer.put(Record(3333, "reach", "a", args={"per_m": "aim", "n": 4000}))
        renderer.put(Record(4097, "law", "b", args={"law": "mam", "n": 0}))
        renderer.put(Record(5000, "aim", "a", args={"direction": [-0.1, 1.0, 0.0], "n": 9000}))
        out = np.zeros((6_000, show.channels), np.float32)
        for at in range(0, len(out), block):
            renderer.render(out[at : at + block])
        outs.append(out)
    assert np.abs(outs[0]).max() > 0.3
    for other in outs[1:]:
        assert np.array_equal(outs[0], other)
