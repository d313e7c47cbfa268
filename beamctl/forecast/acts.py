"""What one act finds and what it makes of its beam, by the sheet alone."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import cache

from beamctl.show.settle import led_to
from beamctl.show.settled import Settled, after_act
from beamctl.show.sheet import Act
from beamctl.show.show import Show
from beamctl.show.targets import Target, target_of

AIM_KEYS = ("seat", "spot", "point_m", "azimuth_deg", "elevation_deg", "via")


def before(show: Show, ref: str, number: int) -> Settled:
    """The beam of act `number` of cue `ref` when that act comes: KeyError, IndexError: none such.

    That is what an act that changes nothing leads to in its place.
    """
    at = show.sheet.position(ref)
    cue = show.sheet.cue[at]
    nothing = Act(beam=cue.act[number].beam, at_s=cue.act[number].at_s)
    acts = (*cue.act[:number], nothing, *cue.act[number + 1 :])
    with_it = cue.model_copy(update={"act": acts})
    cues = (*show.sheet.cue[:at], with_it, *show.sheet.cue[at + 1 :])
    altered = replace(show, sheet=show.sheet.model_copy(update={"cue": cues}))
    return led_to(altered, ref, nothing, _targets(show))[0]


def after(show: Show, state: Settled, act: Act) -> Settled:
    """What an act makes of its beam; KeyError for a seat, spot or surface that is not there."""
    return after_act(state, act, _target(show, act))


def _targets(show: Show) -> Callable[[Act], Target | None]:
    """Targets of acts, each place of the room worked out once."""

    @cache
    def found(beam: str, *aim: object) -> Target | None:
        named = dict(zip(AIM_KEYS, aim, strict=True))
        return _target(show, Act.model_validate({"beam": beam} | named))

    return lambda act: found(act.beam, *(getattr(act, key) for key in AIM_KEYS))


def _target(show: Show, act: Act) -> Target | None:
    if not act.aims:
        return None
    return target_of(act, show.house, show.rig.panel[show.panel_of(act.beam)])
