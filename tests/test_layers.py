"""Who may import whom, read from the source and tried in a fresh interpreter."""

from __future__ import annotations

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

import beamctl

ROOT = Path(beamctl.__file__).parent
FILES = sorted(path.relative_to(ROOT).as_posix() for path in ROOT.rglob("*.py"))
TESTS = Path(__file__).parent
LONGEST = 400

# What each package or module may import of beamctl besides itself; `host` and `cli` compose.
MAY = {
    "__init__": set(),
    "errors": set(),
    "caution": set(),
    "snapshot": set(),
    "actions": {"show"},
    "acoustics": set(),
    "show": {"acoustics"},
    "report": {"acoustics", "caution", "show"},
    "signal": {"errors"},
    "engine": {"acoustics", "show", "signal", "errors"},
    "guard": {"acoustics", "show", "errors"},
    "forecast": {"acoustics", "guard", "show", "signal", "errors"},
    "files": {"acoustics", "show", "errors"},
    "sinks": {"errors"},
    "osc": {"actions", "errors", "show", "snapshot"},
    "desk": {"acoustics", "actions", "caution", "errors", "forecast", "show", "snapshot"},
    "__main__": {"cli"},
}
COMPOSE = {"host", "cli", "commands"}
PURE = {"acoustics", "show"}
IMPURE = {
    *("asyncio", "concurrent", "ctypes", "datetime", "importlib", "io", "logging"),
    *("multiprocessing", "os", "pathlib", "pythonosc", "queue", "random", "shutil", "signal"),
    *("socket", "sounddevice", "soundfile", "soxr", "subprocess", "sys", "tempfile", "textual"),
    *("threading", "time"),
}
ONLY_IN = {"textual": "desk", "pythonosc": "osc"}
DEVICE, DEVICE_FILE = ("sounddevice", "_sounddevice"), "sinks/portaudio.py"


def part_of(file: str) -> str:
    """The package of `file`, or the module when it stands at the top."""
    return file.split("/")[0].removesuffix(".py")


def imported(tree: ast.Module) -> Iterator[tuple[str, bool]]:
    """Every dotted name that is imported, and whether it is when the module loads."""
    later = {
        node
        for function in ast.walk(tree)
        if isinstance(function, ast.FunctionDef | ast.AsyncFunctionDef | ast.Lambda)
        for node in ast.walk(function)
    }
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            for alias in node.names:
                yield alias.name, node not in later
        elif isinstance(node, ast.ImportFrom):
            base = "." * node.level + (node.module or "")
            for alias in node.names:
                yield f"{base}.{alias.name}", node not in later


def faults(file: str, source: str) -> list[str]:
    """What is wrong with the imports and the length of one file of beamctl."""
    part = part_of(file)
    found = []
    if part not in MAY and part not in COMPOSE:
        found.append(f"{file}: no rule for {part}")
    if (lines := source.count("\n")) > LONGEST:
        found.append(f"{file}: {lines} lines, over {LONGEST}")
    for name, at_once in imported(ast.parse(source)):
        if what := _fault(file, part, name.split("."), at_once):
            found.append(f"{file}: {what}")
    return found


def _fault(file: str, part: str, names: list[str], at_once: bool) -> str:
    top = names[0]
    if top == "":
        return "relative import"
    if top == "beamctl":
        other = names[1] if len(names) > 1 else "__init__"
        allowed = part in COMPOSE or other == part or other in MAY.get(part, set())
        return "" if allowed or other == "__version__" else f"{part} may not import {other}"
    if part in PURE and top in IMPURE:
        return f"{part} is pure and may not import {top}"
    if top in DEVICE and file != DEVICE_FILE:
        return f"{top} outside {DEVICE_FILE}"
    if top in DEVICE and at_once:
        return f"{top} imported when the module loads"
    if part != ONLY_IN.get(top, part):
        return f"{top} outside {ONLY_IN[top]}"
    return ""


@pytest.mark.parametrize("file", FILES)
def test_every_file_keeps_the_rule(file: str) -> None:
    assert faults(file, (ROOT / file).read_text(encoding="utf-8")) == []


def test_the_rule_is_read_from_every_file_there_is() -> None:
    assert {"acoustics/air.py", "show/player.py", "sinks/portaudio.py"} <= set(FILES)


@pytest.mark.parametrize(
    ("file", "source", "what"),
    [
        ("acoustics/x.py", "import beamctl.show.player", "acoustics may not import show"),
        ("acoustics/x.py", "from beamctl import show", "acoustics may not import show"),
        ("show/x.py", "from beamctl.engine.renderer import Renderer", "show may not import engine"),
        ("show/x.py", "import time", "show is pure and may not import time"),
        ("show/x.py", "from pathlib import Path", "show is pure and may not import pathlib"),
        ("show/x.py", "def f():\n    import os.path", "show is pure and may not import os"),
        ("acoustics/x.py", "from os import path", "acoustics is pure and may not import os"),
        ("acoustics/x.py", "import random as r", "acoustics is pure and may not import random"),
        ("acoustics/x.py", "import numpy, threading", "acoustics is pure and may not import"),
        ("engine/x.py", "from beamctl.sinks.ring import Ring", "engine may not import sinks"),
        ("signal/x.py", "from beamctl.show.show import Show", "signal may not import show"),
        ("files/x.py", "import beamctl.signal.cache", "files may not import signal"),
        ("sinks/x.py", "from beamctl.engine import panel", "sinks may not import engine"),
        ("desk/x.py", "from beamctl.host.link import Link", "desk may not import host"),
        ("desk/x.py", "from beamctl.files.reader import load_show", "desk may not import files"),
        ("desk/x.py", "import beamctl.cli", "desk may not import cli"),
        ("snapshot.py", "from beamctl.show.show import Show", "snapshot may not import show"),
        ("desk/x.py", "from . import keys", "relative import"),
        ("sinks/null.py", "def f():\n    import sounddevice", "sounddevice outside"),
        ("host/x.py", "import _sounddevice", "_sounddevice outside"),
        ("sinks/portaudio.py", "import sounddevice as sd", "when the module loads"),
        ("sinks/portaudio.py", "class A:\n    import sounddevice", "when the module loads"),
        ("cli.py", "def f():\n    from textual.app import App", "textual outside desk"),
        ("host/x.py", "import pythonosc.udp_client", "pythonosc outside osc"),
        ("lights/x.py", "", "no rule for lights"),
        ("show/x.py", "\n" * (LONGEST + 1), "401 lines, over 400"),
    ],
)
def test_each_rule_can_fail(file: str, source: str, what: str) -> None:
    (fault,) = faults(file, source)
    assert what in fault


@pytest.mark.parametrize(
    ("file", "source"),
    [
        ("show/x.py", "from beamctl.acoustics.air import Air\nimport numpy"),
        ("sinks/portaudio.py", "def f():\n    import sounddevice"),
        ("host/x.py", "from beamctl.sinks.ring import Ring\nimport time"),
        ("cli.py", "from beamctl import __version__"),
        ("show/x.py", "\n" * LONGEST),
    ],
)
def test_what_is_allowed_passes(file: str, source: str) -> None:
    assert faults(file, source) == []


@pytest.mark.parametrize("path", sorted(TESTS.rglob("*.py")), ids=lambda path: path.name)
def test_no_file_of_the_tests_is_too_long(path: Path) -> None:
    assert len(path.read_text(encoding="utf-8").splitlines()) <= LONGEST


LOADS = """
import importlib, pkgutil, sys
for package in sys.argv[2:]:
    found = importlib.import_module(package)
    for module in pkgutil.walk_packages(getattr(found, "__path__", ()), package + "."):
        importlib.import_module(module.name)
print(*sorted(name for name in sys.argv[1].split(",") if name in sys.modules))
"""


def loaded(heavy: str, *packages: str) -> list[str]:
    """Which of the `heavy` modules a fresh interpreter has, once it has loaded the packages."""
    command = [sys.executable, "-c", LOADS, heavy, *packages]
    return subprocess.run(command, capture_output=True, text=True, check=True).stdout.split()


HEAVY = "textual,sounddevice,_sounddevice,pythonosc"


def test_physics_show_and_engine_load_no_screen_no_device_and_no_network() -> None:
    assert loaded(HEAVY, "beamctl.acoustics", "beamctl.show", "beamctl.engine") == []


def test_the_check_of_what_is_loaded_can_fail() -> None:
    assert loaded(HEAVY, "beamctl.desk", "sounddevice", "pythonosc") == sorted(HEAVY.split(","))
