"""How the Sheet shares its room: the cues, and the one under the cursor in full."""

from __future__ import annotations

from dataclasses import dataclass

from beamctl.desk.format import Row, Span, beside, fit

BESIDE_FROM = 100  # cells; in a narrower terminal the cue stands below the list
_LIST, _WIDEST_LIST = 0.42, 76  # of the width; cells
_PART = 0.4  # of the height that the list takes above the cue
_GAP = 2
_NARROWED = 3  # rows that the list keeps while the cursor is inside a cue


@dataclass(frozen=True, slots=True)
class Frame:
    """Cells and rows of both; `at` is where the cue begins, None when it stands below the list."""

    at: int | None
    list_width: int
    list_height: int
    cue_width: int
    cue_height: int

    def joined(self, cues: list[Row], cue: list[Row], width: int) -> list[Row]:
        """Both as one picture; `cues` has `list_height` rows and `cue` has `cue_height`."""
        if self.at is not None:
            return beside(cues, cue, self.at, width)
        rule = [fit((Span("-" * width),), width)] if self.cue_height else []
        return [*cues, *rule, *cue]

    def part_at(self, x: int, y: int) -> tuple[bool, int]:
        """Whether cell `x` of row `y` belongs to the list, and which row of its part it is."""
        if self.at is not None:
            return x < self.at - _GAP, y
        return y < self.list_height, y if y < self.list_height else y - self.list_height - 1


def frame(width: int, height: int, inside: bool) -> Frame:
    """Room for both in `height` rows; a cue that is being worked on gets most of a small one."""
    height = max(height, 0)
    if width >= BESIDE_FROM:
        wide = min(round(width * _LIST), _WIDEST_LIST)
        return Frame(wide + _GAP, wide, height, width - wide - _GAP, height)
    part = min(_NARROWED if inside else round(height * _PART), height)
    return Frame(None, width, part, width, max(height - part - 1, 0))
