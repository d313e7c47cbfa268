"""Two thousand damaged copies of the shipped show: always an answer, never a traceback, in time."""

from __future__ import annotations

import random
import time
from pathlib import Path

import pytest

from beamctl.files.reader import read_show

FILES = ("sheet.toml", "rig.toml", "house.toml", "guard.toml", "wire.toml")
MUTANTS = 400  # of each file
LONGEST_S = 2.0
PIECES = [
    b"[[", b"]]", b"[", b"]", b"{", b"}", b'"', b'"""', b"'", b"=", b"#", b"\n", b"\r", b"\0",
    b"\xff", b"\xef\xbb\xbf", b"nan", b"inf", b"-", b"1e999", b"0x" + b"f" * 5000, b"9" * 5000,
    b"true", b"1979-05-27", b"a.b.c = 1\n", b"[cue]\n", b"[[cue.act]]\n", b"format = 1\n",
    b'"\\u0000"', b"[" * 2000, b"a." * 500,
]  # fmt: skip


def mutant(data: bytes, rng: random.Random) -> bytes:
    """Text with one to four wounds: bytes changed or cut, lines dropped, doubled or swapped."""
    for _ in range(rng.randint(1, 4)):
        kind = rng.randrange(5)
        if kind == 0:
            at = rng.randrange(len(data) + 1)
            data = data[:at] + rng.choice(PIECES) + data[at:]
        elif kind == 1:
            at = rng.randrange(len(data) + 1)
            data = data[:at] + bytes([rng.randrange(256)]) + data[at + 1 :]
        elif kind == 2:
            start = rng.randrange(len(data) + 1)
            data = data[:start] + data[start + rng.randrange(40) :]
        else:
            lines = data.split(b"\n")
            one, other = rng.randrange(len(lines)), rng.randrange(len(lines))
            lines[one] = lines[other] if kind == 3 else b""
            data = b"\n".join(lines)
    return data


@pytest.mark.parametrize("file", FILES)
def test_damaged_files_are_answered(folder: Path, file: str) -> None:
    whole = (folder / file).read_bytes()
    rng = random.Random(file)
    broken = 0
    for _ in range(MUTANTS):
        data = mutant(whole, rng)
        (folder / file).write_bytes(data)
        start = time.perf_counter()
        show, problems = read_show(folder)
        assert time.perf_counter() - start < LONGEST_S
        errors = [problem for problem in problems if problem.severity == "error"]
        assert (show is None) == bool(errors)
        assert all("\n" not in str(problem) for problem in problems)
        assert (folder / file).read_bytes() == data
        broken += show is None
    assert broken > MUTANTS // 4  # the wounds do hurt
