"""Records: the one layout of everything that happens, by absolute sample number.

The player makes them, the engine stamps and renders them, the journal keeps them; live, `render`
and `replay` read the same stream, so a journal gives back the very samples that were sent.

Records that change what a beam sounds (`SOUNDING`), with their `args`:

    play    sound, loop                 start a sound from its beginning
    stop    n                           fade the programme out over n samples
    level   power, n                    square of the beam's gain; the gain goes by a raised cosine
    depth   depth, n                    modulation depth
    law     law, n                      cross-fade to another law
    aim     point_m | direction, n      travel to a point / a direction, panel axes (right, out, up)
    reach   per_m | "aim", n            focus as 1/metres (0 is far); "aim" keeps it on the target
    freeze  -                           hold every glide of the beam where it is
    thaw    -                           carry on with what was frozen

Records of what the final stage did, for all feeds (`FINAL`); live it tells them, offline it takes
them in at their frame:

    gate    open, n, why                the way out opens or shuts, a ramp of n samples
    dry     n                           the ring ran dry: zeros, then a rise over n samples
    grant   ceilings                    highest drive per panel, in the order of the rig
    short   seen                        the ring held less than is looked ahead: chunks seen, 0 all

`stream` begins what one engine sent: its sample is the first one's number. `left` ends it. `texts`
is an edited show that the streams after it are played from. All others (`go`, `hush`, `refused`,
`output`, `fault` …) tell what was done and by whom.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any

SOUNDING = frozenset(("play", "stop", "level", "depth", "law", "aim", "reach", "freeze", "thaw"))
FINAL = frozenset(("gate", "dry", "grant", "short"))


@dataclass(frozen=True, slots=True)
class Record:
    """One thing that happens at one absolute sample; `cue` and `who` say on whose account."""

    sample: int
    what: str
    beam: str = ""
    cue: str = ""
    who: str = ""
    args: Mapping[str, Any] = field(default_factory=dict)

    def later(self, samples: int) -> Record:
        """The same record `samples` later."""
        return replace(self, sample=self.sample + samples)

    def to_json(self) -> str:
        """One line of the journal, without its line end."""
        row: dict[str, Any] = {"sample": self.sample, "what": self.what}
        row |= {k: v for k in ("beam", "cue", "who") if (v := getattr(self, k))}
        if self.args:
            row["args"] = dict(self.args)
        return json.dumps(row, separators=(",", ":"), ensure_ascii=False, allow_nan=False)

    @classmethod
    def from_json(cls, line: str) -> Record:
        """Inverse of `to_json`; ValueError when the line is not a record."""
        row = json.loads(line)
        if not isinstance(row, dict) or not isinstance(row.get("sample"), int):
            raise ValueError("not a record")
        unknown = row.keys() - {"sample", "what", "beam", "cue", "who", "args"}
        if unknown or not isinstance(row.get("what"), str):
            raise ValueError("not a record")
        return cls(**row)
