"""Field types shared by the five files of a show folder."""

from __future__ import annotations

from typing import Annotated

from pydantic import BaseModel, ConfigDict, Field


class Model(BaseModel):
    """A table of a show file: unknown keys and silent conversions are errors, values are frozen."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True, allow_inf_nan=False)


Name = Annotated[str, Field(pattern=r"^[A-Za-z][A-Za-z0-9_-]{0,31}$")]
Text = Annotated[str, Field(min_length=1, max_length=200)]
Metres = Annotated[float, Field(ge=-1000.0, le=1000.0)]
Vector = Annotated[tuple[Metres, Metres, Metres], Field(strict=False)]
