"""The tables of one show file among its sections: where each stands, and where a new one goes.

Places are those of `show/edits.py`. Only a table with a header of its own can be edited: one that
is written inside a line is refused, with the header to write instead.
"""

from __future__ import annotations

from collections.abc import Iterator

from pydantic import BaseModel

from beamctl.errors import ShowError
from beamctl.files.locate import pairs
from beamctl.files.reader import WIRE
from beamctl.files.sections import sections
from beamctl.files.writing import Order, rank, written_keys
from beamctl.show.checks import GUARD, HOUSE, RIG, SHEET, unknown
from beamctl.show.edits import Place
from beamctl.show.house import AirSpec, Block, House, Spot, Surface
from beamctl.show.limits import Guard, Signed, Wire
from beamctl.show.rig import PanelSpec, Rig
from beamctl.show.sheet import Act, BeamSpec, Cue, Sheet

FILES: dict[str, type[BaseModel]] = {
    SHEET: Sheet, RIG: Rig, HOUSE: House, GUARD: Guard, WIRE: Wire,
}  # fmt: skip
TABLES: dict[str, type[BaseModel]] = {
    "beam": BeamSpec, "cue": Cue, "act": Act, "panel": PanelSpec, "air": AirSpec, "spot": Spot,
    "block": Block, "surface": Surface, "signed": Signed,
}  # fmt: skip
WITH_NAMES = ("beam", "panel", "spot", "block", "surface", "cue")
CUE, ACT = ("cue",), ("cue", "act")


class Tree:
    """The sections of a file, to be changed in `all`; ShowError for a file that is none of a show.

    A place that is no table's in any show file is a ShowError of every method.
    """

    def __init__(self, file: str, text: str) -> None:
        if file not in FILES:
            raise ShowError(f"{file} cannot be edited", f"expected one of {', '.join(FILES)}")
        self.file = file
        self.parts = sections(text)
        self.all = self.parts.all

    def kind(self, place: Place) -> str:
        """What a table is: "cue", "act", "panel", "air"; "" for the top of the file."""
        match place:
            case ():
                return ""
            case ("cue", str(), "act", int()):
                return "act"
            case (str(kind), str()) if kind in WITH_NAMES:
                return kind
            case (str(kind),) if kind not in WITH_NAMES:
                return kind
        raise ShowError(f"{self.file}: {place} is no place of a table")

    def order(self, place: Place) -> Order:
        """The keys of a table in the order of its model; none for a table of free keys."""
        kind = self.kind(place)
        model = TABLES.get(kind) if kind else FILES[self.file]
        return _keys(model) if model else ()

    def span(self, place: Place) -> list[int]:
        """Where the sections of a table are, its own first; empty when it is not there."""
        kind = self.kind(place)
        self._check_form(place)
        if kind == "":
            return [0]
        if kind in ACT:
            cue = self._cue(str(place[1]))
            return cue if kind == "cue" else self._act(cue, int(place[3]))
        found = [i for i, section in enumerate(self.all) if section.keys[: len(place)] == place]
        return sorted(found, key=lambda i: self.all[i].keys != place)

    def find(self, place: Place) -> list[int]:
        """As `span`; ShowError, with the nearest name, when the table is not there."""
        if found := self.span(place):
            return found
        kind = self.kind(place)
        if kind == "act" and self.find(place[:2]):
            raise self._no_act(place)
        raise ShowError(f"{self.file}: {unknown(kind, str(place[-1]), self._names(kind))}")

    def room(self, place: Place, after: str = "") -> int:
        """Where the first section of a new table goes, or of a cue that moves."""
        kind = self.kind(place)
        if kind == "act":
            return self._room_for_act(place)
        if kind == "cue" and after:
            return self.find(("cue", after))[-1] + 1
        alike = [i for i, section in enumerate(self.all) if section.keys[:1] == place[:1]]
        if alike:
            return alike[0] if kind == "cue" else alike[-1] + 1
        order = _keys(FILES[self.file])
        own = rank(str(place[0]), order)
        earlier = [i for i, s in enumerate(self.all) if s.keys and rank(s.keys[0], order) <= own]
        return max(earlier, default=0) + 1

    def gap(self, place: Place) -> str:
        """The empty lines before a new table: one, or as others of its kind have them.

        A cue always has one, a cue's acts and a second beam have none if others do not tell.
        """
        kind = self.kind(place)
        gaps = [section.before for section in self.all if kind_of(section.keys) == kind]
        if len(gaps) > 1 and kind != "cue":
            return gaps[-1]
        return "" if kind == "act" or (kind == "beam" and gaps) else self.parts.eol

    def _cue(self, ref: str) -> list[int]:
        """Sections of a cue; what belongs to another table may stand between them."""
        numbered = enumerate(self.all)
        start = next((i for i, s in numbered if s.keys == CUE and s.data.get("ref") == ref), None)
        if start is None:
            return []
        stop = next((i for i, section in numbered if section.keys == CUE), len(self.all))
        within = [i for i in range(start, stop) if self.all[i].keys[:1] in (CUE, ())]
        while not self.all[within[-1]].keys:
            within.pop()
        return within

    def _act(self, cue: list[int], number: int) -> list[int]:
        heads = [i for i in cue if self.all[i].keys == ACT]
        if not 0 <= number < len(heads):
            return []
        stop = [*heads, cue[-1] + 1][number + 1]
        return [i for i in cue if heads[number] <= i < stop and self.all[i].keys]

    def _room_for_act(self, place: Place) -> int:
        cue = self.find(place[:2])
        heads = [i for i in cue if self.all[i].keys == ACT]
        number = int(place[3])
        if not 0 <= number <= len(heads):
            raise self._no_act(place)
        return [*heads, cue[-1] + 1][number]

    def _no_act(self, place: Place) -> ShowError:
        acts = sum(self.all[i].keys == ACT for i in self._cue(str(place[1])))
        number = int(place[3]) + 1
        return ShowError(f"{self.file} cue {place[1]}: no act {number}, there are {acts}")

    def _names(self, kind: str) -> list[str]:
        if kind == "cue":
            return [str(s.data.get("ref")) for s in self.all if s.keys == CUE]
        return [s.keys[-1] for s in self.all if s.keys and kind_of(s.keys) == kind]

    def _check_form(self, place: Place) -> None:
        """ShowError for a table that the file has, but not under a header of its own."""
        for i, key in self._holders(place):
            if key in self.all[i].data:
                where = f"{self.file}:{self._line(i, key)} {key}"
                raise ShowError(f"{where}: written inside a line", f"write it as {_header(place)}")

    def _holders(self, place: Place) -> Iterator[tuple[int, str]]:
        """What would hold a table that has no header: a section and the key in it."""
        if not place:
            return
        yield 0, str(place[0])
        if place[0] == "cue":
            cue = self._cue(str(place[1])) if self.kind(place) == "act" else []
            yield from ((i, "act") for i in cue[:1])
        elif len(place) > 1:
            outer = (i for i, section in enumerate(self.all) if section.keys == place[:1])
            yield from ((i, str(place[1])) for i in outer)

    def _line(self, index: int, key: str) -> int:
        """The line of a key in a section."""
        section = self.all[index]
        start = next(pair.start for pair in pairs(section.body) if pair.keys[0] == key)
        above = "".join(one.text for one in self.all[:index])
        above += section.before + section.lead + section.head + section.body[:start]
        return above.count("\n") + 1


def _keys(model: type[BaseModel]) -> Order:
    return [field.alias or name for name, field in model.model_fields.items()]


def _header(place: Place) -> str:
    """The line that begins a table."""
    names = [str(key) for key in place]
    return f"[[{'.'.join(names[::2])}]]" if names[0] == "cue" else f"[{written_keys(names)}]"


def kind_of(keys: tuple[str, ...]) -> str:
    """The kind of table that a header begins; "" for none, or a table within one."""
    if keys in (CUE, ACT):
        return keys[-1]
    return keys[0] if keys and len(keys) == 1 + (keys[0] in WITH_NAMES) else ""
