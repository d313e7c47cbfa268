"""Big readings: glyphs five rows tall, drawn for this desk, one cell a dot."""

from __future__ import annotations

ROWS = 5

_DRAWN = {
    "0": " ## /#  #/#  #/#  #/ ## ",
    "1": " #  /##  / #  / #  /### ",
    "2": "### /   #/ ## /#   /####",
    "3": "### /   #/ ## /   #/### ",
    "4": "#  #/#  #/####/   #/   #",
    "5": "####/#   /### /   #/### ",
    "6": " ## /#   /### /#  #/ ## ",
    "7": "####/   #/  # / #  / #  ",
    "8": " ## /#  #/ ## /#  #/ ## ",
    "9": " ## /#  #/ ###/   #/ ## ",
    "A": " ## /#  #/####/#  #/#  #",
    "B": "### /#  #/### /#  #/### ",
    "C": " ###/#   /#   /#   / ###",
    "D": "### /#  #/#  #/#  #/### ",
    "E": "####/#   /### /#   /####",
    "F": "####/#   /### /#   /#   ",
    "G": " ###/#   /# ##/#  #/ ###",
    "H": "#  #/#  #/####/#  #/#  #",
    "I": "###/ # / # / # /###",
    "J": "  ##/   #/   #/#  #/ ## ",
    "K": "#  #/# # /##  /# # /#  #",
    "L": "#   /#   /#   /#   /####",
    "M": "#   #/## ##/# # #/#   #/#   #",
    "N": "#  #/## #/# ##/#  #/#  #",
    "O": "####/#  #/#  #/#  #/####",
    "P": "### /#  #/### /#   /#   ",
    "Q": " ## /#  #/#  #/# ##/ ###",
    "R": "### /#  #/### /# # /#  #",
    "S": " ###/#   / ## /   #/### ",
    "T": "###/ # / # / # / # ",
    "U": "#  #/#  #/#  #/#  #/ ## ",
    "V": "#   #/#   #/ # # / # # /  #  ",
    "W": "#   #/#   #/# # #/## ##/#   #",
    "X": "#  #/#  #/ ## /#  #/#  #",
    "Y": "#  #/#  #/ ###/   #/ ## ",
    "Z": "####/  # / #  /#   /####",
    " ": " / / / / ",
    ".": " / / / /#",
    ":": " /#/ /#/ ",
    "-": "   /   /###/   /   ",
    "+": "   / # /###/ # /   ",
    "?": "### /   #/ ## /    / #  ",
}
_GLYPHS = {sign: drawn.split("/") for sign, drawn in _DRAWN.items()}
SIGNS = frozenset(_GLYPHS)


def width_of(text: str) -> int:
    """Cells that `text` takes as a big reading."""
    return sum(len(_glyph(sign)[0]) + 1 for sign in text) - 1 if text else 0


def draw(text: str, dot: str) -> list[str]:
    """`text` as ROWS equally long strings of `dot` and space; lower case is drawn as upper."""
    rows = (" ".join(_glyph(sign)[row] for sign in text) for row in range(ROWS))
    return [row.replace("#", dot) for row in rows]


def _glyph(sign: str) -> list[str]:
    return _GLYPHS.get(sign.upper(), _GLYPHS["?"])
