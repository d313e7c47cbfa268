"""The whole show in memory: the five files, the cell maps, and the facts of its sounds."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from beamctl.acoustics.cells import CellMap
from beamctl.show.house import House
from beamctl.show.limits import Guard, Wire
from beamctl.show.rig import Rig
from beamctl.show.sheet import Sheet
from beamctl.show.standing import Caps, standing


@dataclass(frozen=True, slots=True)
class SoundFacts:
    """What is known of a sound file without its samples."""

    path: str  # absolute
    frames: int
    rate_hz: int
    channels: int

    @property
    def seconds(self) -> float:
        """Length in seconds."""
        return self.frames / self.rate_hz


@dataclass(frozen=True, slots=True)
class Show:
    """A show folder that was read without an error."""

    folder: str  # absolute
    sheet: Sheet
    rig: Rig
    house: House
    guard: Guard
    wire: Wire
    cells: Mapping[str, CellMap]  # by panel
    sounds: Mapping[str, SoundFacts]  # by the name the sheet uses
    digests: Mapping[str, str]  # SHA-256 of each file that was read, by its name in the folder
    seal: str = ""  # digest of guard, rig and house, as a signature names it

    def panel_of(self, beam: str) -> str:
        """The panel that throws `beam`."""
        return self.sheet.beam[beam].panel

    @property
    def caps(self) -> Caps:
        """What the guard holds this show to."""
        return standing(self.guard, self.rig, self.seal)

    @property
    def channels(self) -> int:
        """Output channels the rig needs: its highest feed number."""
        last = (p.first_feed - 1 + self.cells[n].feeds for n, p in self.rig.panel.items())
        return max(last)
