"""sheet.toml: the beams, the ordered cues, and the acts of each cue."""

from __future__ import annotations

import re
from typing import Annotated, Literal, Self

from pydantic import AfterValidator, Field, model_validator

from beamctl.show.fields import Model, Name, Text, Vector

Law = Literal["dsb", "root", "ssb", "mam"]
Reach = Annotated[float, Field(gt=0.0)] | Literal["far", "aim"]

REF_PATTERN = re.compile(r"[0-9]+(\.[0-9]+)*[A-Za-z]*")


def _check_ref(ref: str) -> str:
    if not REF_PATTERN.fullmatch(ref):
        raise ValueError('a cue reference such as "12", "12.5" or "12A"')
    return ref


Ref = Annotated[str, AfterValidator(_check_ref)]


class Act(Model):
    """One thing a cue does to one beam; what it does not name stays as it is."""

    at_s: float = Field(0.0, ge=0.0, le=86_400.0)
    beam: Name
    sound: Text | None = None
    loop: bool = False
    seat: Text | None = None
    spot: Name | None = None
    point_m: Vector | None = None
    azimuth_deg: float | None = Field(None, ge=-80.0, le=80.0)
    elevation_deg: float | None = Field(None, ge=-80.0, le=80.0)
    via: Name | None = None
    reach: Reach | None = None
    law: Law | None = None
    depth: float | None = Field(None, ge=0.0, le=1.0)
    trim_db: float | None = Field(None, ge=-90.0, le=0.0)
    over_s: float = Field(0.0, ge=0.0, le=3600.0)
    fall_s: float | None = Field(None, ge=0.0, le=3600.0)

    @property
    def aims(self) -> bool:
        """True when the act gives its beam a new aim."""
        angles = self.azimuth_deg is not None or self.elevation_deg is not None
        return angles or any(t is not None for t in (self.seat, self.spot, self.point_m))

    @model_validator(mode="after")
    def _one_target(self) -> Self:
        angles = self.azimuth_deg is not None or self.elevation_deg is not None
        room = [k for k in ("seat", "spot", "point_m") if getattr(self, k) is not None]
        if len(room) + angles > 1:
            named = ", ".join([*room, "azimuth_deg/elevation_deg"] if angles else room)
            raise ValueError(f"one target per act, not {named}")
        if self.via is not None and not room:
            raise ValueError("via needs a seat, a spot or a point_m to bounce to")
        if self.loop and self.sound is None:
            raise ValueError("loop = true needs a sound to repeat")
        if self.reach == "aim" and self.aims and not room:
            raise ValueError('reach = "aim" needs a seat, a spot or a point_m, not angles')
        if self.fall_s is not None:
            self._only_a_fall()
        return self

    def _only_a_fall(self) -> None:
        if self.aims or self.sound is not None or self.trim_db is not None:
            raise ValueError(
                "fall_s stands alone, it ends the sound: use a second act for the rest"
            )


class Cue(Model):
    """A number as it is called, a title, and acts."""

    ref: Ref
    title: Text
    note: str = ""
    then: Ref | None = None
    then_at_s: float | None = Field(None, ge=0.0, le=86_400.0)
    act: Annotated[tuple[Act, ...], Field(strict=False)] = ()

    def in_time(self) -> list[Act]:
        """Its acts as they come; those at one time in the order of the file."""
        return sorted(self.act, key=lambda act: act.at_s)

    @model_validator(mode="after")
    def _follow_on(self) -> Self:
        if (self.then is None) != (self.then_at_s is None):
            raise ValueError("then and then_at_s go together: which cue, and seconds after this GO")
        return self


class BeamSpec(Model):
    """A named source on one panel."""

    panel: Name


class Sheet(Model):
    """sheet.toml."""

    format: Literal[1]
    title: Text
    beam: dict[Name, BeamSpec] = Field(min_length=1)
    cue: Annotated[tuple[Cue, ...], Field(strict=False)] = ()

    def position(self, ref: str) -> int:
        """Index of cue `ref` in the sheet; KeyError when there is none."""
        for index, cue in enumerate(self.cue):
            if cue.ref == ref:
                return index
        raise KeyError(ref)
