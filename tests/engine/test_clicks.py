"""200 random acts on silent programmes, through the player and the renderer: nothing clicks.

Two figures for every event. What each feed carries that an ear could hear by itself: its peak after
an 18 kHz low-pass (stop 22.4 kHz), re the largest feed sample around the event. And what the air
makes of the moving carrier, at the old aim, the new aim and twenty points between: the peak of the
second derivative of |E|², re that of a 1 kHz tone at depth 0.8 on the same carrier, which is
2 · 0.8 · (2π 1000)² |E|² (Berktay 1965, first order in depth), |E| being the largest level at any
of those points around the event. Filters and margins: support/hearing.py.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import pytest
from support.evening import KEPT_S, RATE, Evening, Happening
from support.hearing import MARGIN_S, hear, heard_below, spectra_of

from beamctl.acoustics.air import Air, sound_speed_m_s

EVENTS = 100  # per panel
TONE = 2.0 * 0.8 * (2.0 * np.pi * 1_000.0) ** 2
BEFORE, AFTER = round(0.002 * RATE), round(0.010 * RATE)
AROUND = round(0.050 * RATE)
MARGIN = round(MARGIN_S * RATE)
FAINTEST = 1e-4 / 2.0  # of full scale: no beam sounds, nothing to compare with


class Click(NamedTuple):
    """One event's two figures."""

    kind: str
    label: str
    feed_db: float
    air_db: float


def _measure(evening: Evening, event: Happening) -> Click | None:
    """Judged from just before the event to just before the next, or until all has settled.

    None where nothing sounded meanwhile.
    """
    begin = max(0, event.at - AROUND - MARGIN) // 2 * 2
    end = event.cut + AROUND + MARGIN
    feeds = evening.tape.take(begin, end)
    low, high = (event.at - BEFORE - begin) // 2, (event.cut - BEFORE - begin) // 2
    if np.abs(feeds[:, 2 * low : 2 * high]).max() < FAINTEST:
        return None
    loudest = np.abs(feeds).max()
    spectra = spectra_of(feeds)
    audible = heard_below(spectra, RATE, 18_000.0, 22_400.0)[:, low:high]
    speed = sound_speed_m_s(Air())
    heard = hear(spectra, RATE, 40_000.0, evening.cells_m, event.points_m, speed)
    level = heard.level[:, MARGIN // 2 : heard.level.shape[1] - MARGIN // 2].max()
    bend = np.abs(heard.bend[:, low:high]).max()
    return Click(
        event.kind,
        event.label,
        20.0 * np.log10(np.abs(audible).max() / loudest + 1e-12),
        20.0 * np.log10(bend / (TONE * level**2)),
    )


def _play(columns: int, rows: int, seed: int) -> list[Click]:
    """EVENTS measured events of one evening; every third interrupts the one before."""
    rng = np.random.default_rng(seed)
    evening = Evening(rng, columns, rows, 3 * EVENTS)
    waiting: list[Happening] = []
    clicks: list[Click] = []
    while len(clicks) < EVENTS:
        event = evening.next_event()
        lasts = event.settled - event.at
        interrupted = rng.random() < 0.35 and lasts > 0
        wait = round(rng.uniform(0.0, lasts)) if interrupted else lasts + AFTER
        event.cut = event.at + max(wait, BEFORE)
        evening.run_to(event.cut)
        waiting.append(event)
        while waiting and waiting[0].cut + AROUND + MARGIN <= evening.renderer.position:
            if (click := _measure(evening, waiting.pop(0))) is not None:
                clicks.append(click)
        first = waiting[0].at if waiting else event.cut
        evening.tape.forget(first - round(KEPT_S * RATE))
    return clicks[:EVENTS]


@pytest.fixture(scope="module")
def clicks() -> list[Click]:
    return [click for columns, rows in ((8, 4), (32, 1)) for click in _play(columns, rows, columns)]


def _hold(clicks: list[Click], what: str, bar_db: float) -> None:
    figures = [(getattr(click, what), click.label) for click in clicks]
    assert figures
    worst, label = max(figures)
    median = np.median([figure for figure, _ in figures])
    said = f"{what}: {len(figures)} events, median {median:.1f}, worst {worst:.1f} dB, {label}"
    print(said)
    assert worst <= bar_db, said


def test_every_kind_of_event_is_among_them(clicks):
    assert len(clicks) == 2 * EVENTS
    for kind in ("go", "re-aim", "hush", "restore"):
        assert sum(click.kind == kind for click in clicks) >= 15, kind


def test_feeds_carry_nothing_an_ear_could_hear(clicks):
    """Every feed, re the carrier's peak."""
    _hold(clicks, "feed_db", -80.0)


@pytest.mark.parametrize(
    ("kind", "bar_db"), [("go", -60), ("re-aim", -60), ("restore", -60), ("hush", -45)]
)
def test_the_air_makes_no_click(clicks, kind, bar_db):
    """Along the way from the old aim to the new one, re a 1 kHz tone at depth 0.8."""
    _hold([click for click in clicks if click.kind == kind], "air_db", bar_db)
