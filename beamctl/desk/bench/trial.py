"""A trial: fields of one act as they are being tried out, before anybody takes them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from pydantic import ValidationError

from beamctl.show.sheet import Act


@dataclass(frozen=True, slots=True)
class Trial:
    """What an act's fields would be, as plain data; None takes a field away."""

    fields: Mapping[str, Any] = field(default_factory=dict)

    def __bool__(self) -> bool:
        return bool(self.fields)

    def tried(self, fields: Mapping[str, Any]) -> Trial:
        """With these fields too, in place of what they were tried as before."""
        return Trial({**self.fields, **fields})

    def of(self, act: Act) -> Act:
        """The act as tried; ValueError says in a line why there can be no such act."""
        table = act.model_dump(exclude_unset=True, by_alias=True) | dict(self.fields)
        try:
            return Act.model_validate({k: v for k, v in table.items() if v is not None})
        except ValidationError as failure:
            error = failure.errors(include_url=False)[0]
            raise ValueError(str(error.get("ctx", {}).get("error", error["msg"]))) from None
