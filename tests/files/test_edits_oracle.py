"""Random edits of random small shows, against the same edits made on plain dicts.

Every comment has a number: those of tables that were dropped must be gone, and no other.
"""

from __future__ import annotations

import json
import random
import re
import tomllib
from collections.abc import Iterator
from copy import deepcopy
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from beamctl.files.edits import edited
from beamctl.show.edits import Drop, Edit, Move, Put, Rename, Set, Step

SHEET, RIG, HOUSE = "sheet.toml", "rig.toml", "house.toml"
KINDS = {"beam": SHEET, "panel": RIG, "spot": HOUSE, "surface": HOUSE, "block": HOUSE}
VALUES = [1, -2.5, True, "a", 'q " \\', "é # no", [1.0, 2, 3], ["A", "B"], {"a": 1, "b c": [2.0]}]
Table = dict[str, Any]


class Show:
    """A show as plain dicts; `names` are numbered, so that a new one is never an old one."""

    def __init__(self, rng: random.Random) -> None:
        self.rng = rng
        self.names = 0
        self.files: dict[str, Table] = {file: {"format": 1} for file in (SHEET, RIG, HOUSE)}
        for kind, file in KINDS.items():
            for _ in range(rng.randint(0 if file == HOUSE else 1, 3)):
                self.files[file].setdefault(kind, {})[self.name()] = self.table(kind)
        if rng.random() < 0.5:
            self.files[HOUSE]["air"] = self.table("air")
        self.files[SHEET]["cue"] = [self.cue() for _ in range(rng.randint(1, 4))]

    def name(self) -> str:
        self.names += 1
        return f"n{self.names}"

    def pick(self, kind: str) -> str:
        """A name of that kind, or one that nobody has."""
        return self.rng.choice([*self.files[KINDS[kind]].get(kind, {}), "nobody"])

    def table(self, kind: str) -> Table:
        keys = self.rng.sample(["a", "b c", "loop", "q", "title"], self.rng.randint(0, 3))
        found: Table = {key: self.rng.choice(VALUES) for key in keys}
        names = {
            "beam": {"panel": "panel"},
            "act": {"beam": "beam", "spot": "spot", "via": "surface"},
        }
        for key, of in names.get(kind, {}).items():
            if self.rng.random() < 0.7:
                found[key] = self.pick(of)
        return found

    def cue(self) -> Table:
        refs = [cue["ref"] for cue in self.files[SHEET].get("cue", [])]
        found = {"ref": self.name(), **self.table("cue")}
        if refs and self.rng.random() < 0.5:
            found["then"] = self.rng.choice(refs)
        if acts := [self.table("act") for _ in range(self.rng.randint(0, 3))]:
            found["act"] = acts
        return found


class Writer:
    """Writes the texts of a show; `owner` says whose each comment is, 0 for nobody's."""

    def __init__(self, show: Show, eol: str) -> None:
        self.show, self.rng, self.eol = show, show.rng, eol
        self.owner: dict[int, int] = {}

    def texts(self) -> dict[str, str]:
        return {file: self.file(data) for file, data in self.show.files.items()}

    def file(self, data: Table) -> str:
        text = self.comment(0) + self.pairs(data, 0)
        for kind, value in data.items():
            if isinstance(value, dict):
                for name, table in {"": value}.items() if kind == "air" else value.items():
                    text += self.section(f"[{kind}{name and '.' + name}]", table)
            for cue in value if kind == "cue" else ():
                text += self.section("[[cue]]", cue)
                text += "".join(self.section("[[cue.act]]", act) for act in cue.get("act", ()))
        text += self.rng.choice(["", "\n", "\n\n", "\n" + self.comment(0)])
        return text.replace("\n", self.eol)

    def section(self, head: str, table: Table) -> str:
        gaps = ["", "\n", "\n\n"]
        if head != "[[cue.act]]":
            gaps.append("\n" + self.comment(0) + "\n")  # within a cue it would be the cue's
        gap = self.rng.choice(gaps)
        end = self.rng.choice(["\n", "  " + self.comment(id(table))])
        lead = self.comment(id(table)) if gap else ""  # else it may be of the table above
        return gap + lead + head + end + self.pairs(table, id(table))

    def pairs(self, table: Table, owner: int) -> str:
        text = ""
        for key in [key for key in table if key != "act"] if owner else ["format"]:
            end = self.rng.choice(["\n", self.comment(owner)])
            text += f'"{key}" = {self.value(table[key])} {end}'
        return text

    def value(self, value: Any) -> str:
        if isinstance(value, dict):
            return "{" + ", ".join(f'"{k}" = {self.value(v)}' for k, v in value.items()) + "}"
        if isinstance(value, list):
            return "[\n  " + ",\n  ".join(map(self.value, value)) + ",\n]"
        if isinstance(value, str):
            return '"' + value.replace("\\", "\\\\").replace('"', '\\"') + '"'
        return str(value).lower()

    def comment(self, owner: int) -> str:
        number = len(self.owner) + 1
        self.owner[number] = owner
        return f"# {number} [x]\n"


class Oracle:
    """Makes up steps, and takes each of them on the dicts of a show."""

    def __init__(self, show: Show) -> None:
        self.show, self.rng, self.files = show, show.rng, show.files

    def step(self) -> Step:
        """One step that can be taken, and is taken here."""
        choices = [self.set, self.set, self.put, self.put_act, self.drop, self.move, self.rename]
        while (step := self.rng.choice(choices)()) is None:
            pass
        return deepcopy(step)  # later steps change the tables in it

    def places(self) -> Iterator[tuple[str, tuple[str | int, ...], Table]]:
        """Every table that has a header, and the tops of the files."""
        for file, data in self.files.items():
            yield file, (), data
            for kind, value in data.items():
                if kind in KINDS:
                    yield from ((file, (kind, name), table) for name, table in value.items())
        if "air" in self.files[HOUSE]:
            yield HOUSE, ("air",), self.files[HOUSE]["air"]
        for cue in self.cues():
            yield SHEET, ("cue", cue["ref"]), cue
            for number, act in enumerate(cue.get("act", ())):
                yield SHEET, ("cue", cue["ref"], "act", number), act

    def cues(self) -> list[Table]:
        return self.files[SHEET].setdefault("cue", [])

    def set(self) -> Step:
        file, place, table = self.rng.choice(list(self.places()))
        key, value = self.rng.choice(["a", "b c", "new", "title"]), self.rng.choice([None, *VALUES])
        table.pop(key, None)
        if value is not None:
            table[key] = value
        return Set(file, place, key, value)

    def put(self) -> Step | None:
        kind = self.rng.choice([*KINDS, "cue", "air"])
        if kind == "cue":
            after, cue = (
                self.rng.choice(["", *(cue["ref"] for cue in self.cues())]),
                self.show.cue(),
            )
            self.cues().insert(self.index(after) + 1 if after else 0, cue)
            given = {key: value for key, value in cue.items() if key != "ref"}
            return Put(SHEET, ("cue", cue["ref"]), given, after)
        data, table = self.files[KINDS.get(kind, HOUSE)], self.show.table(kind)
        if kind == "air":
            return Put(HOUSE, ("air",), table) if data.setdefault("air", table) is table else None
        name = self.show.name()
        data.setdefault(kind, {})[name] = table
        return Put(KINDS[kind], (kind, name), table)

    def put_act(self) -> Step | None:
        if not self.cues():
            return None
        cue, table = self.rng.choice(self.cues()), self.show.table("act")
        number = self.rng.randint(0, len(cue.get("act", ())))
        cue.setdefault("act", []).insert(number, table)
        return Put(SHEET, ("cue", cue["ref"], "act", number), table)

    def drop(self) -> Step | None:
        file, place, _ = self.rng.choice(list(self.places()))
        match place:
            case ("cue", str(ref)):
                del self.cues()[self.index(ref)]
            case ("cue", str(ref), "act", int(number)):
                del self.cues()[self.index(ref)]["act"][number]
            case ("air",):
                del self.files[file]["air"]
            case (str(kind), str(name)):
                del self.files[file][kind][name]
            case _:
                return None
        return Drop(file, place)

    def move(self) -> Step | None:
        if len(self.cues()) < 2:
            return None
        one, other = self.rng.sample(self.cues(), 2)
        after = self.rng.choice(["", other["ref"]])
        self.cues().remove(one)
        self.cues().insert(self.index(after) + 1 if after else 0, one)
        return Move(SHEET, ("cue", one["ref"]), after)

    def rename(self) -> Step | None:
        file, place, table = self.rng.choice(list(self.places()))
        if len(place) != 2:
            return None
        (kind, old), new = place, self.show.name()
        acts = [act for cue in self.cues() for act in cue.get("act", ())]
        beams = list(self.files[SHEET].get("beam", {}).values())
        if kind == "cue":
            table["ref"] = new
        else:
            names = self.files[file][kind]
            self.files[file][kind] = {new if n == old else n: names[n] for n in names}
        tables, key = {
            "cue": (self.cues(), "then"), "beam": (acts, "beam"), "panel": (beams, "panel"),
            "spot": (acts, "spot"), "surface": (acts, "via"),
        }.get(str(kind), ([], ""))  # fmt: skip
        for one in tables:
            if one.get(key) == old:
                one[key] = new
        return Rename(file, place, new)

    def index(self, ref: str) -> int:
        return [cue["ref"] for cue in self.cues()].index(ref)


def _kept(value: Any) -> Any:
    """Data as it is read again: a table of tables with nothing in it is not written."""
    if isinstance(value, list):
        return [_kept(item) for item in value]
    if isinstance(value, dict):
        return {
            key: _kept(inner)
            for key, inner in value.items()
            if inner or key not in (*KINDS, "cue", "act")
        }
    return value


@given(st.integers(0, 2**32), st.sampled_from(["\n", "\r\n"]))
@settings(max_examples=250, deadline=None)
def test_an_edit_of_the_texts_is_the_edit_of_what_they_say(seed: int, eol: str) -> None:
    rng = random.Random(seed)
    show = Show(rng)
    writer, oracle = Writer(show, eol), Oracle(show)
    texts = writer.texts()
    said = {file: tomllib.loads(text) for file, text in texts.items()}
    assert json.dumps(said, sort_keys=True) == json.dumps(_kept(show.files), sort_keys=True)
    everyone = [table for _, _, table in oracle.places()]  # so that no address is used again
    written = comments(texts)
    steps = tuple(oracle.step() for _ in range(rng.randint(1, 5)))
    texts = edited(texts, Edit("some steps", steps))
    said = {file: tomllib.loads(text) for file, text in texts.items()}
    assert json.dumps(said, sort_keys=True) == json.dumps(_kept(show.files), sort_keys=True)
    alive = {0, *(id(table) for _, place, table in oracle.places() if place)}
    assert comments(texts) == [number for number in written if writer.owner[number] in alive]
    assert all(text.count("\n") == text.count(eol) for text in texts.values())
    assert everyone


def comments(texts: dict[str, str]) -> list[int]:
    """The numbers of the comments in the texts."""
    return sorted(int(number) for number in re.findall(r"# (\d+) \[x\]", str(texts)))
