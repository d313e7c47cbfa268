"""ruff and mypy as tests, and the commands that README, CI and contributors share."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]


@pytest.mark.parametrize(
    "command",
    [
        ["ruff", "check", "."],
        ["ruff", "format", "--check", "."],
        ["mypy"],
    ],
    ids=["ruff check", "ruff format", "mypy"],
)
def test_static_check(command: list[str]) -> None:
    """No finding."""
    result = subprocess.run(
        [sys.executable, "-m", *command], cwd=ROOT, capture_output=True, text=True, check=False
    )
    assert result.returncode == 0, result.stdout + result.stderr


def test_ci_runs_the_test_command_of_the_readme() -> None:
    """One command line for a newcomer, a contributor and CI."""
    lines = (ROOT / "README.md").read_text(encoding="utf-8").splitlines()
    commands = [line for line in lines if line.startswith("python3 -m venv") and "pytest" in line]
    assert len(commands) == 1
    assert commands[0] in (ROOT / ".ci" / "run").read_text(encoding="utf-8").splitlines()


def test_top_level_is_as_agreed() -> None:
    """What git tracks at the top."""
    listing = subprocess.run(
        ["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=True
    ).stdout.splitlines()
    top = {line.split("/")[0] for line in listing if not line.startswith(".")}
    assert top == {"README.md", "DEVELOPERS.md", "pyproject.toml", "beamctl", "tests", "scenes"}
