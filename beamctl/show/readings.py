"""Air readings as somebody took them: looked through and told, for who begins anew by them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from pydantic import ValidationError

from beamctl.show.events import SetAir
from beamctl.show.expected import Expected
from beamctl.show.house import AirSpec
from beamctl.show.records import Record

if TYPE_CHECKING:
    from beamctl.show.player import Player


def set_air(player: Player, event: SetAir, sample: int) -> list[Record]:
    """Tell new readings while nothing sounds: beams and guard turn by them from the start only."""
    if player.output == "OPEN":
        why = "the air is taken up while nothing sounds: hush first"
        return player.refuse(event, sample, "busy", why)
    asked = {key: getattr(event, key) for key in AirSpec.model_fields}
    try:
        air = AirSpec(**asked)
    except ValidationError as failure:
        (key, *_) = failure.errors()[0]["loc"]
        what = f"{key} {asked[str(key)]}, expected {Expected(AirSpec).at((key,))}"
        return player.refuse(event, sample, "bad-type", what)
    return [Record(sample, "air", who=event.who, args=air.model_dump())]
