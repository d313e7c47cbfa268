"""Random cues on two beams, for tests that know nothing of what they do."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st
from support.playing import cue

whole = st.fixed_dictionaries(
    {"beam": st.sampled_from("ab"), "at_s": st.sampled_from((0.0, 0.3, 0.9, 1.02, 1.5, 4.0))}
)
changes = st.fixed_dictionaries(
    {},
    optional={
        "sound": st.sampled_from(("tone", "other")),
        "trim_db": st.sampled_from((-10.0, -20.0, -35.0)),
        "depth": st.sampled_from((0.2, 0.9)),
        "law": st.sampled_from(("dsb", "ssb", "mam")),
        "over_s": st.sampled_from((0.0, 0.5, 2.0)),
    },
)
ANGLES: list[dict[str, Any]] = [
    {"azimuth_deg": 20.0},
    {"azimuth_deg": -3.0, "elevation_deg": 4.0},
    {"azimuth_deg": 5.0, "reach": 7.0},
]
POINTS: list[dict[str, Any]] = [
    {"point_m": [1.0, 6.0, 0.5]},
    {"point_m": [-2.0, 3.0, 0.0], "reach": "aim"},
    {"reach": "aim"},
]
EITHER: list[dict[str, Any]] = [{}, {"reach": 2.0}, {"reach": "far"}]


def act(place: dict[str, Any], change: dict[str, Any], aim: dict[str, Any], repeat: bool) -> Any:
    looped = {"loop": True} if repeat and "sound" in change else {}
    return place | change | aim | looped


def acts_with(aims: list[dict[str, Any]]) -> st.SearchStrategy[list[dict[str, Any]]]:
    moves = st.builds(act, whole, changes, st.sampled_from([*EITHER, *aims]), st.booleans())
    falls = st.builds(
        lambda place, fall_s: place | {"fall_s": fall_s}, whole, st.sampled_from((0.0, 1.5))
    )
    return st.lists(st.one_of(moves, falls), max_size=5)


# A focus whose travel is cut short by angles stays half-way: the sheet alone cannot tell where,
# so no cue here mixes the two. Cues that follow one another do.
sheets = st.lists(acts_with(ANGLES) | acts_with(POINTS), min_size=1, max_size=4).map(
    lambda cues: [cue(str(i + 1), *acts) for i, acts in enumerate(cues)]
)
