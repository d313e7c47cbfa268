"""Random TOML texts whose writer keeps count of the lines."""

from __future__ import annotations

import random

Place = tuple[str | int, ...]
SCALARS = [
    "1", "-2.5", "true", '"a # b"', "'c \\'", '"q \\" ]"', "1979-05-27 07:32:00", '""', "''",
    '"""x"""', '"""\nx = 1\n[no]\n"""', "'''\ny = \"\"\"\n'''", '"""a\\"" ""b"""""', "nan",
]  # fmt: skip


class Writer:
    """Writes a random TOML text and the line of every key in it."""

    def __init__(self, rng: random.Random) -> None:
        self.rng = rng
        self.text = ""
        self.lines: dict[Place, int] = {}
        self.names = 0

    def document(self) -> None:
        self.table((), depth=0)

    def table(self, place: Place, depth: int) -> None:
        for _ in range(self.rng.randint(0, 3)):
            self.blank()
            self.pair(place, depth=0)
            self.text += self.rng.choice(["\n", "  # [x]\n", "\n\n"])
        if depth < 3:
            for _ in range(self.rng.randint(0, 2)):
                self.rng.choice([self.header, self.array_of_tables])(place, depth)

    def header(self, place: Place, depth: int) -> None:
        name, written = self.key()
        self.blank()
        self.mark((*place, name))
        self.text += f"[{self.dotted(place)}{written}] # c\n"
        self.table((*place, name), depth + 1)

    def array_of_tables(self, place: Place, depth: int) -> None:
        name, written = self.key()
        for index in range(self.rng.randint(1, 3)):
            self.blank()
            if index == 0:
                self.mark((*place, name))
            self.mark((*place, name, index))
            self.text += f"[[ {self.dotted(place)}{written} ]]\n"
            self.table((*place, name, index), depth + 1)

    def pair(self, place: Place, depth: int) -> None:
        for turn in range(self.rng.choice([1, 1, 1, 2, 3])):
            name, written = self.key()
            self.text += ("." if turn else "") + written
            place = (*place, name)
            self.mark(place)
        self.text += self.rng.choice([" = ", "=", "\t=\t"])
        self.value(place, depth)

    def value(self, place: Place, depth: int) -> None:
        kind = self.rng.choice(["scalar", "array", "inline"]) if depth < 3 else "scalar"
        if kind == "scalar":
            self.text += self.rng.choice(SCALARS)
        elif kind == "array":
            self.text += "["
            for index in range(self.rng.randint(0, 3)):
                self.text += self.rng.choice(["", " ", "\n  ", " # , ]\n"])
                self.mark((*place, index))
                self.value((*place, index), depth + 1)
                self.text += self.rng.choice([",", " ,", "\n,"])
            self.text += "]"
        else:
            self.text += "{"
            for index in range(self.rng.randint(0, 2)):
                self.text += ", " if index else ""
                self.pair(place, depth + 1)
            self.text += "}"

    def key(self) -> tuple[str, str]:
        self.names += 1
        name = f"k{self.names}"
        forms = [(name, name), (f"{name}.]#", f'"{name}.]#"'), (f'{name} "', f"'{name} \"'")]
        return self.rng.choice([*forms, (f"{name}é", f'"{name}\\u00e9"')])

    def dotted(self, place: Place) -> str:
        quoted = [name.replace('"', '\\"') for name in place if isinstance(name, str)]
        return "".join(f'"{name}".' for name in quoted)

    def mark(self, place: Place) -> None:
        self.lines[place] = self.text.count("\n") + 1

    def blank(self) -> None:
        self.text += self.rng.choice(["", "", "\n", "# key = 1\n", "   "])
